//! The simplest network with the same derived functions, step by step.
//!
//! Passive parts that nothing refers to become edges between nodes; an edge holds a tree of parts in
//! series and in parallel (`circuit`). A node that nobody asks for and that joins two edges makes
//! them one in series, edges between the same nodes become one in parallel, and inside each tree
//! parts of one class become one part (`merge`): in a series string the order of parts is free, so
//! C–R–C has one capacitor. Edges without current or voltage go (`idle`). Every rule is a
//! well-known equivalence of one-ports; the whole is proven afterwards by comparing functions
//! (`proof`).
//!
//! Values need no protection: the original symbols stay, tied by relations. What must stay are parts
//! whose current is asked or sensed, parts that a question takes out, coupled coils and parts with
//! an initial value; and nodes at which a voltage is asked or sensed or another part stands.

pub mod circuit;
mod idle;
mod merge;
pub mod part;
pub mod proof;
mod star;
mod steps;

use std::collections::BTreeSet;

use crate::analysis::functions;
use crate::analysis::report::Wanted;
use crate::network::Network;
pub use circuit::{Circuit, Edge, EdgeId, Tree, TreeId};
pub use part::{Class, Definition, Part, PartId};

/// Why a step may be taken.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Rule {
    /// One current flows through the parts.
    Series,
    /// The same, after other parts of the string were moved aside.
    Exchange,
    /// One voltage stands across the parts.
    Parallel,
    /// No current flows in the parts.
    NoCurrent,
    /// No voltage stands across the parts.
    NoVoltage,
    /// An ideal source or output holds the voltage across the parts.
    Held,
    /// An ideal current source sends its current through the parts.
    Driven,
    /// Three parts at one node become three between its neighbours (Kennelly 1899).
    StarDelta,
}

/// One step.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Step {
    /// Why.
    pub rule: Rule,
    /// What goes in: parts of the file or parts made before.
    pub parts: Vec<PartId>,
    /// What comes out; nothing where parts are dropped.
    pub makes: Option<PartId>,
    /// The part that holds the voltage or sends the current.
    pub by: Option<String>,
}

/// A reduced network beside its original.
#[derive(Clone, Debug)]
pub struct Reduction {
    /// The edges that are left, and all parts with their definitions.
    pub circuit: Circuit,
    /// The steps: parts that go first, then each made part after those it is made of.
    pub steps: Vec<Step>,
    /// Which questions are asked of it, as indices into the network's questions.
    pub questions: BTreeSet<usize>,
}

/// Reduces a network for the questions that are wanted.
///
/// Cost: all but linear for series–parallel networks.
#[must_use]
pub fn reduce(network: &Network, wanted: &Wanted, star_delta: bool) -> Reduction {
    let questions = functions::needed(network, wanted).into_iter().collect();
    let mut circuit = Circuit::new(network, &questions);
    loop {
        circuit.settle();
        if !(circuit.drop_held(network)
            || circuit.pass_driven(network)
            || star_delta && circuit.star_to_delta())
        {
            break;
        }
    }
    let steps = circuit.finish(network);
    Reduction {
        circuit,
        steps,
        questions,
    }
}
