//! Puts a network together; the only way to get one.

use std::collections::BTreeMap;

use crate::algebra::{Symbol, SymbolTable};
use crate::network::element::{Coupling, Device, Drive, Element};
use crate::network::graph::{Network, Node};
use crate::network::id::{DeviceId, DriveId, ElementId, NodeId, RelationId};
use crate::network::question::{Assumption, Claim, Question, Start};
use crate::network::relation::Relation;
use crate::network::value::SymbolFacts;
use crate::source::Span;

/// A network under construction. Ids are valid as soon as they are given out.
#[derive(Clone, Debug)]
pub struct NetworkBuilder {
    network: Network,
}

impl NetworkBuilder {
    /// An empty network with its reference node; `place` is where the reference is first written.
    #[must_use]
    pub fn new(place: Span) -> Self {
        Self {
            network: Network {
                title: None,
                symbols: SymbolTable::new(),
                facts: BTreeMap::new(),
                nodes: vec![Node {
                    name: "ground".to_owned(),
                    place,
                }],
                elements: Vec::new(),
                devices: Vec::new(),
                couplings: Vec::new(),
                drives: Vec::new(),
                relations: Vec::new(),
                set_by: BTreeMap::new(),
                questions: Vec::new(),
                claims: Vec::new(),
                assumptions: Vec::new(),
                starts: Vec::new(),
            },
        }
    }

    /// What stands so far.
    #[must_use]
    pub fn network(&self) -> &Network {
        &self.network
    }

    /// Sets the title.
    pub fn title(&mut self, title: impl Into<String>) {
        self.network.title = Some(title.into());
    }

    /// The symbol table, to intern names.
    pub fn symbols(&mut self) -> &mut SymbolTable {
        &mut self.network.symbols
    }

    /// Adds a node.
    pub fn node(&mut self, name: impl Into<String>, place: Span) -> NodeId {
        self.network.nodes.push(Node {
            name: name.into(),
            place,
        });
        NodeId::at(self.network.nodes.len() - 1)
    }

    /// States what is known of a symbol; replaces what was known before.
    pub fn facts(&mut self, facts: SymbolFacts) {
        self.network.facts.insert(facts.symbol, facts);
    }

    /// Changes what is known of a symbol.
    pub fn facts_mut(&mut self, symbol: Symbol) -> Option<&mut SymbolFacts> {
        self.network.facts.get_mut(&symbol)
    }

    /// Adds a part.
    pub fn element(&mut self, element: Element) -> ElementId {
        let id = ElementId::at(self.network.elements.len());
        if let Some(device) = element.device {
            self.network.devices[device.index()].elements.push(id);
        }
        self.network.elements.push(element);
        id
    }

    /// Changes a part, for relations of sources that are read after the wiring.
    pub fn element_mut(&mut self, id: ElementId) -> &mut Element {
        &mut self.network.elements[id.index()]
    }

    /// Adds a device; its parts follow with [`NetworkBuilder::element`].
    pub fn device(&mut self, device: Device) -> DeviceId {
        self.network.devices.push(device);
        DeviceId::at(self.network.devices.len() - 1)
    }

    /// Adds a coupling.
    pub fn coupling(&mut self, coupling: Coupling) {
        self.network.couplings.push(coupling);
    }

    /// Adds a drive.
    pub fn drive(&mut self, drive: Drive) -> DriveId {
        self.network.drives.push(drive);
        DriveId::at(self.network.drives.len() - 1)
    }

    /// Changes a drive.
    pub fn drive_mut(&mut self, id: DriveId) -> &mut Drive {
        &mut self.network.drives[id.index()]
    }

    /// Adds a relation. Each symbol is set once and relations contain no cycle: the caller has
    /// checked both.
    pub fn relation(&mut self, relation: Relation) -> RelationId {
        let id = RelationId::at(self.network.relations.len());
        for (symbol, _) in &relation.sets {
            let before = self.network.set_by.insert(*symbol, id);
            debug_assert!(before.is_none(), "a symbol is set once");
        }
        self.network.relations.push(relation);
        id
    }

    /// Adds a question.
    pub fn question(&mut self, question: Question) {
        self.network.questions.push(question);
    }

    /// Adds a claim.
    pub fn claim(&mut self, claim: Claim) {
        self.network.claims.push(claim);
    }

    /// Adds an assumption.
    pub fn assumption(&mut self, assumption: Assumption) {
        self.network.assumptions.push(assumption);
    }

    /// Adds an initial value.
    pub fn start(&mut self, start: Start) {
        self.network.starts.push(start);
    }

    /// The network as it stands. Wiring is judged by [`check`](super::check::check) afterwards.
    #[must_use]
    pub fn finish(self) -> Network {
        self.network
    }
}
