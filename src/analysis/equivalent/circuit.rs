//! The graph that is reduced: edges between nodes, each a tree of parts in series and in parallel.
//!
//! Trees stand in one list, later trees refer to earlier ones, so that no depth of nesting needs a
//! stack.

use std::collections::{BTreeMap, BTreeSet};

use crate::analysis::equivalent::Step;
use crate::analysis::equivalent::part::{Class, Definition, Part, PartId};
use crate::network::{Ask, Combination, ElementId, Kind, Network, NodeId, Port, Probe, Sense};

/// Position in the list of trees.
pub type TreeId = usize;
/// Position in the list of edges.
pub type EdgeId = usize;

/// A one-port of parts.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Tree {
    /// One part.
    Part(PartId),
    /// One current; `nodes` are the nodes between neighbours, one fewer than items.
    Series {
        /// The members.
        items: Vec<TreeId>,
        /// The nodes between them.
        nodes: Vec<NodeId>,
    },
    /// One voltage.
    Parallel(Vec<TreeId>),
}

/// A tree between two nodes.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Edge {
    /// First node.
    pub from: NodeId,
    /// Second node.
    pub to: NodeId,
    /// What stands between them.
    pub tree: TreeId,
}

/// The network while it is reduced.
#[derive(Clone, Debug, Default)]
pub struct Circuit {
    /// All parts, those of the file first.
    pub parts: Vec<Part>,
    /// All trees.
    pub trees: Vec<Tree>,
    /// All edges; `None` where one has gone.
    pub edges: Vec<Option<Edge>>,
    /// Nodes at which a terminal of an independent or controlled current source was moved on, by
    /// the part: see [`Circuit::terminal`].
    pub(super) moved: BTreeMap<(ElementId, NodeId), NodeId>,
    pub(super) kept: BTreeSet<ElementId>,
    pub(super) at: Vec<BTreeSet<EdgeId>>,
    pub(super) between: BTreeMap<(NodeId, NodeId), EdgeId>,
    /// Nodes that are asked or sensed.
    pub(super) asked: BTreeSet<NodeId>,
    /// Terminals of other parts at each node.
    pub(super) terminals: Vec<Vec<ElementId>>,
    pub(super) waiting: Vec<NodeId>,
    pub(super) drops: Vec<Step>,
}

impl Circuit {
    /// The parts that may be merged as edges, all else noted at its nodes.
    pub(super) fn new(network: &Network, questions: &BTreeSet<usize>) -> Self {
        let mut circuit = Self {
            at: vec![BTreeSet::new(); network.node_count()],
            terminals: vec![Vec::new(); network.node_count()],
            ..Self::default()
        };
        circuit.asked.insert(NodeId::GROUND);
        circuit.keep_what_is_asked(network, questions);
        circuit.keep_what_is_sensed(network);
        for (id, element) in network.elements() {
            match (Class::of(&element.kind), element.port()) {
                (Some((class, value)), Some(port)) if !circuit.kept.contains(&id) => {
                    let part = circuit.part(Part {
                        name: element.name.clone(),
                        class,
                        definition: Definition::Given(id, value.clone()),
                        exchanged: false,
                    });
                    let tree = circuit.tree(Tree::Part(part));
                    circuit.connect(port.from, port.to, tree);
                }
                _ => circuit.hang(id, &element.kind),
            }
        }
        circuit.waiting = (0..network.node_count()).rev().map(NodeId::at).collect();
        circuit
    }

    fn keep_what_is_asked(&mut self, network: &Network, questions: &BTreeSet<usize>) {
        for &index in questions {
            let question = &network.questions()[index];
            self.kept.extend(&question.without);
            match &question.ask {
                Ask::Transfer { response, .. } => self.combination(response),
                Ask::Ratio { upper, lower, .. } => {
                    self.combination(upper);
                    self.combination(lower);
                }
                Ask::Impedance(port) | Ask::Admittance(port) => self.pair(*port),
                Ask::ReturnRatio(_)
                | Ask::Function(_)
                | Ask::Limit { .. }
                | Ask::FirstOrder { .. } => {}
            }
        }
        for coupling in network.couplings() {
            self.kept.extend([coupling.first, coupling.second]);
        }
        self.kept
            .extend(network.starts().iter().map(|start| start.element));
    }

    fn keep_what_is_sensed(&mut self, network: &Network) {
        for (_, element) in network.elements() {
            let Kind::Source(source) = &element.kind else {
                continue;
            };
            for control in &source.controls {
                match control.sense {
                    Sense::Voltage(port) => self.pair(port),
                    Sense::Current(part) => {
                        self.kept.insert(part);
                    }
                }
            }
        }
    }

    fn combination(&mut self, combination: &Combination) {
        for (_, probe) in &combination.terms {
            match probe {
                Probe::Voltage(port) => self.pair(*port),
                Probe::Current(part) => {
                    self.kept.insert(*part);
                }
            }
        }
    }

    fn pair(&mut self, port: Port) {
        self.asked.extend([port.from, port.to]);
    }

    fn hang(&mut self, id: ElementId, kind: &Kind) {
        for node in terminals(kind) {
            self.terminals[node.index()].push(id);
        }
    }

    pub(super) fn part(&mut self, part: Part) -> PartId {
        self.parts.push(part);
        self.parts.len() - 1
    }

    pub(super) fn tree(&mut self, tree: Tree) -> TreeId {
        self.trees.push(tree);
        self.trees.len() - 1
    }

    /// Whether a node may go.
    pub(super) fn is_free(&self, node: NodeId) -> bool {
        !self.asked.contains(&node) && self.terminals[node.index()].is_empty()
    }

    /// Whether a part of the file stays as it is.
    #[must_use]
    pub fn is_kept(&self, id: ElementId) -> bool {
        self.kept.contains(&id)
    }

    /// Where a terminal of a part that is no edge stands now.
    #[must_use]
    pub fn terminal(&self, id: ElementId, node: NodeId) -> NodeId {
        let mut node = node;
        while let Some(&next) = self.moved.get(&(id, node)) {
            node = next;
        }
        node
    }

    /// The edges that are left, in order.
    pub fn living(&self) -> impl Iterator<Item = Edge> {
        self.edges.iter().flatten().copied()
    }

    /// The parts of a tree.
    #[must_use]
    pub fn parts_of(&self, tree: TreeId) -> Vec<PartId> {
        let mut found = Vec::new();
        let mut waiting = vec![tree];
        while let Some(tree) = waiting.pop() {
            match &self.trees[tree] {
                Tree::Part(part) => found.push(*part),
                Tree::Series { items, .. } | Tree::Parallel(items) => {
                    waiting.extend(items.iter().rev());
                }
            }
        }
        found
    }

    /// The parts of the file a part is made of.
    pub(super) fn given(&self, parts: &[PartId]) -> Vec<PartId> {
        let mut seen = BTreeSet::new();
        let mut waiting = parts.to_vec();
        while let Some(part) = waiting.pop() {
            if seen.insert(part) {
                waiting.extend(self.parts[part].definition.members());
            }
        }
        seen.retain(|&part| matches!(self.parts[part].definition, Definition::Given(..)));
        seen.into_iter().collect()
    }
}

/// The nodes a part stands at, as often as it stands there.
fn terminals(kind: &Kind) -> Vec<NodeId> {
    let ports: &[Port] = match kind {
        Kind::Resistor(port, _)
        | Kind::Conductance(port, _)
        | Kind::Capacitor(port, _)
        | Kind::Inductor(port, _)
        | Kind::Impedance(port, _)
        | Kind::Admittance(port, _)
        | Kind::Meter(port) => &[*port],
        Kind::Source(source) => &[source.port],
        Kind::Amplifier { input, output, .. } | Kind::Nullor { input, output } => {
            &[*input, *output]
        }
        Kind::Transformer {
            primary, secondary, ..
        }
        | Kind::Gyrator {
            primary, secondary, ..
        } => &[*primary, *secondary],
        Kind::Conveyor {
            x, y, z, reference, ..
        } => return vec![*x, *y, *z, *reference],
    };
    ports.iter().flat_map(|port| [port.from, port.to]).collect()
}
