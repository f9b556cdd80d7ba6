//! A network of parts between nodes, with its relations, questions and claims; no syntax, no answers.
//!
//! Devices are already taken apart into [`Kind`]s; joins (`a -- b`) are already one node. Node 0 is
//! the reference. Every value is a symbol or a number; a symbol that a relation sets is tied to
//! others by a [`Fraction`](crate::algebra::Fraction), the rest are independent.

pub mod blocks;
pub mod builder;
pub mod check;
pub mod cycle;
pub mod element;
pub mod graph;
pub mod id;
pub mod incidence;
#[cfg(test)]
pub(crate) mod oracle;
pub mod question;
pub mod relation;
#[cfg(test)]
pub(crate) mod scatter;
#[cfg(test)]
pub(crate) mod sketch;
pub mod topology;
pub mod value;

pub use builder::NetworkBuilder;
pub use element::{
    Control, Coupling, Device, Drive, Element, Follow, Kind, Port, Quantity, Sense, Source,
    Strength,
};
pub use graph::{Network, Node};
pub use id::{DeviceId, DriveId, ElementId, NodeId, RelationId};
pub use question::{
    Ask, Assertion, Assumption, CancellationClass, Claim, ClaimedValue, Combination, Comparison,
    LimitPoint, Probe, Question, Side, Start, Subject,
};
pub use relation::Relation;
pub use value::{Dimension, Origin, Range, Sign, SymbolFacts, Tolerance, Value};
