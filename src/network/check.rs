//! Wiring checks: what makes the equations singular for sure, and parts that do nothing.
//!
//! Everything reported as an error makes the determinant zero for every value of the parts: a node
//! without a conducting path to the reference, a node that only current sources lead to, a loop of
//! parts that fix voltages, an ideal amplifier without feedback. A network that passes may still be
//! singular in a way that no short sentence tells; the determinant finds that.

mod feedback;
mod idle;
mod islands;
mod loops;
mod naming;
mod ports;

use std::collections::BTreeSet;

use petgraph::unionfind::UnionFind;

use crate::diagnostic::Diagnostic;
use crate::network::element::{Element, Port};
use crate::network::graph::Network;
use crate::network::id::{ElementId, NodeId};
use crate::network::topology::{Edges, sensed_currents};

pub use naming::{list, node_list, part_name, part_names};

#[cfg(test)]
mod tests;

/// At most so many messages of one sort; the last one counts the rest.
const MESSAGES: usize = 10;

/// All that is wrong or odd about the wiring: errors first, each sort in file order.
///
/// Cost: all but linear in the number of parts.
#[must_use]
pub fn check(network: &Network) -> Vec<Diagnostic> {
    let wiring = Wiring::new(network, &[]);
    let mut found = match islands::reference(&wiring) {
        Some(fault) => vec![fault],
        None => singular(&wiring, vec![false; wiring.nodes()]),
    };
    if found.is_empty() {
        found = ports::faults(network);
    }
    found.extend(idle::warnings(network));
    found
}

/// What makes the network of a question singular for sure, with the parts in `without` taken out;
/// empty where the wiring is sound.
///
/// Islands that come about by taking parts out float freely and are no fault, unless the question
/// touches them by one of the node pairs in `touched`.
///
/// Cost: all but linear in the number of parts.
#[must_use]
pub fn faults(network: &Network, without: &[ElementId], touched: &[Port]) -> Vec<Diagnostic> {
    let wiring = Wiring::new(network, without);
    let free = wiring.free_nodes(touched);
    singular(&wiring, free)
}

/// Faults, but for nodes that may float.
fn singular(wiring: &Wiring<'_>, free: Vec<bool>) -> Vec<Diagnostic> {
    let mut found = islands::faults(wiring, free);
    found.extend(loops::faults(wiring));
    if found.is_empty() {
        found = feedback::faults(wiring);
    }
    found
}

/// The parts that stay in, and the edges they make.
struct Wiring<'a> {
    network: &'a Network,
    parts: Vec<(ElementId, &'a Element)>,
    /// Parts whose current a controlled source senses.
    sensed: BTreeSet<ElementId>,
}

impl<'a> Wiring<'a> {
    fn new(network: &'a Network, without: &[ElementId]) -> Self {
        let mut out = vec![
            false;
            if without.is_empty() {
                0
            } else {
                network.elements().len()
            }
        ];
        for id in without {
            out[id.index()] = true;
        }
        let parts = network
            .elements()
            .filter(|(id, _)| !out.get(id.index()).copied().unwrap_or(false))
            .collect();
        let mut wiring = Self {
            network,
            parts,
            sensed: BTreeSet::new(),
        };
        wiring.sensed = sensed_currents(wiring.parts.iter().map(|(_, element)| *element));
        wiring
    }

    /// Nodes that neither a current nor a voltage ties to the reference.
    fn free_nodes(&self, touched: &[Port]) -> Vec<bool> {
        let mut sets = UnionFind::<u32>::new(self.nodes());
        for port in touched {
            sets.union(number(port.from), number(port.to));
        }
        for (_, element) in &self.parts {
            let mut edges = element.current_edges();
            edges.extend(element.voltage_edges());
            let mut ends = edges.iter().flat_map(|port| [port.from, port.to]);
            if let Some(first) = ends.next() {
                for end in ends {
                    sets.union(number(first), number(end));
                }
            }
        }
        let ground = sets.find(0);
        sets.into_labeling()
            .into_iter()
            .map(|set| set != ground)
            .collect()
    }

    fn nodes(&self) -> usize {
        self.network.node_count()
    }

    /// The ends of all edges that `edges` takes from each part.
    fn ends(&self, edges: impl Fn(&Element) -> Edges) -> impl Iterator<Item = (u32, u32)> {
        self.parts.iter().flat_map(move |(_, element)| {
            edges(element)
                .into_iter()
                .map(|port| (number(port.from), number(port.to)))
        })
    }
}

/// A node as the graph algorithms number it.
fn number(node: NodeId) -> u32 {
    u32::try_from(node.index()).unwrap_or(u32::MAX)
}

/// Keeps the first few messages; `rest` words how many more there are.
fn few(
    mut found: impl Iterator<Item = Diagnostic>,
    rest: impl Fn(usize) -> String,
) -> Vec<Diagnostic> {
    let mut list: Vec<Diagnostic> = found.by_ref().take(MESSAGES).collect();
    let more = found.count();
    if more > 0
        && let Some(last) = list.last_mut()
    {
        last.message.push_str(&format!(" ({})", rest(more)));
    }
    list
}
