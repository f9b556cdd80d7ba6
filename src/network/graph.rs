//! The checked network.

use std::collections::BTreeMap;

use crate::algebra::{Symbol, SymbolTable};
use crate::network::element::{Coupling, Device, Drive, Element};
use crate::network::id::{DeviceId, DriveId, ElementId, NodeId, RelationId};
use crate::network::question::{Assumption, Claim, Question, Start};
use crate::network::relation::Relation;
use crate::network::value::SymbolFacts;
use crate::source::Span;

/// A node after joins were merged.
#[derive(Clone, Debug)]
pub struct Node {
    /// Name in answers; nodes without a name read `(R1–C1)` after two of their parts.
    pub name: String,
    /// First place in the text.
    pub place: Span,
}

/// A network with its questions and claims. Comes only from [`NetworkBuilder`](super::NetworkBuilder).
#[derive(Clone, Debug)]
pub struct Network {
    pub(super) title: Option<String>,
    pub(super) symbols: SymbolTable,
    pub(super) facts: BTreeMap<Symbol, SymbolFacts>,
    pub(super) nodes: Vec<Node>,
    pub(super) elements: Vec<Element>,
    pub(super) devices: Vec<Device>,
    pub(super) couplings: Vec<Coupling>,
    pub(super) drives: Vec<Drive>,
    pub(super) relations: Vec<Relation>,
    pub(super) set_by: BTreeMap<Symbol, RelationId>,
    pub(super) questions: Vec<Question>,
    pub(super) claims: Vec<Claim>,
    pub(super) assumptions: Vec<Assumption>,
    pub(super) starts: Vec<Start>,
}

impl Network {
    /// Title line, if any.
    #[must_use]
    pub fn title(&self) -> Option<&str> {
        self.title.as_deref()
    }

    /// Names of all symbols.
    #[must_use]
    pub fn symbols(&self) -> &SymbolTable {
        &self.symbols
    }

    /// What is known of a symbol; `None` for `s` and `pi`.
    #[must_use]
    pub fn facts(&self, symbol: Symbol) -> Option<&SymbolFacts> {
        self.facts.get(&symbol)
    }

    /// All symbols with their facts, in the order they were introduced.
    pub fn all_facts(&self) -> impl Iterator<Item = &SymbolFacts> {
        self.facts.values()
    }

    /// Number of nodes, the reference included.
    #[must_use]
    pub fn node_count(&self) -> usize {
        self.nodes.len()
    }

    /// A node.
    #[must_use]
    pub fn node(&self, id: NodeId) -> &Node {
        &self.nodes[id.index()]
    }

    /// All parts in file order with their ids.
    pub fn elements(&self) -> impl ExactSizeIterator<Item = (ElementId, &Element)> {
        self.elements
            .iter()
            .enumerate()
            .map(|(index, element)| (ElementId::at(index), element))
    }

    /// A part.
    #[must_use]
    pub fn element(&self, id: ElementId) -> &Element {
        &self.elements[id.index()]
    }

    /// A device.
    #[must_use]
    pub fn device(&self, id: DeviceId) -> &Device {
        &self.devices[id.index()]
    }

    /// All devices.
    #[must_use]
    pub fn devices(&self) -> &[Device] {
        &self.devices
    }

    /// All couplings.
    #[must_use]
    pub fn couplings(&self) -> &[Coupling] {
        &self.couplings
    }

    /// A drive.
    #[must_use]
    pub fn drive(&self, id: DriveId) -> &Drive {
        &self.drives[id.index()]
    }

    /// All drives.
    #[must_use]
    pub fn drives(&self) -> &[Drive] {
        &self.drives
    }

    /// All relations in file order with their ids.
    pub fn relations(&self) -> impl ExactSizeIterator<Item = (RelationId, &Relation)> {
        self.relations
            .iter()
            .enumerate()
            .map(|(index, relation)| (RelationId::at(index), relation))
    }

    /// A relation.
    #[must_use]
    pub fn relation(&self, id: RelationId) -> &Relation {
        &self.relations[id.index()]
    }

    /// The relation that sets a symbol.
    #[must_use]
    pub fn set_by(&self, symbol: Symbol) -> Option<RelationId> {
        self.set_by.get(&symbol).copied()
    }

    /// The `derive` lines in file order.
    #[must_use]
    pub fn questions(&self) -> &[Question] {
        &self.questions
    }

    /// The question a derived-function symbol stands for.
    #[must_use]
    pub fn question_of(&self, symbol: Symbol) -> Option<usize> {
        self.questions
            .iter()
            .position(|question| question.symbol == symbol)
    }

    /// The `claim` lines in file order.
    #[must_use]
    pub fn claims(&self) -> &[Claim] {
        &self.claims
    }

    /// The `assume` lines.
    #[must_use]
    pub fn assumptions(&self) -> &[Assumption] {
        &self.assumptions
    }

    /// The `starts` lines.
    #[must_use]
    pub fn starts(&self) -> &[Start] {
        &self.starts
    }
}
