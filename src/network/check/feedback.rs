//! Ideal amplifiers whose output has no path back to their inputs.
//!
//! Nodes that two-way parts join fall into classes; sources of fixed voltage count as the
//! reference. A spanning tree has in each class as many edges as the class has nodes, in the
//! current graph and in the voltage graph alike. So the one-way parts that a term of the determinant
//! uses from one class to another make up closed circuits; an ideal amplifier is used in every
//! term, and one that lies on no circuit makes the determinant zero.

use std::collections::BTreeMap;

use petgraph::algo::kosaraju_scc;
use petgraph::graph::{DiGraph, NodeIndex};
use petgraph::unionfind::UnionFind;

use super::naming::{list, node_list, part_name};
use super::{Wiring, few, number};
use crate::diagnostic::Diagnostic;
use crate::network::element::{Element, Kind, Port, Sense};
use crate::network::graph::Network;
use crate::network::id::{ElementId, NodeId};
use crate::network::incidence::{Components, components};
use crate::network::topology::Edges;

/// One message for each ideal amplifier or nullor without feedback.
pub(super) fn faults(wiring: &Wiring<'_>) -> Vec<Diagnostic> {
    if !wiring.parts.iter().any(|(_, element)| element.is_nullor()) {
        return Vec::new();
    }
    let classes = Classes::new(wiring);
    let circuit = classes.circuits(wiring);
    let open = wiring.parts.iter().filter(|(_, element)| {
        let one_way = || {
            let (input, output) = nullor(element)?;
            let sensed = classes.of(input)?;
            let driven = classes.of(output)?;
            Some(circuit[sensed] != circuit[driven])
        };
        one_way().unwrap_or(false)
    });
    let found = open.map(|(_, element)| message(wiring, element));
    few(found, |more| format!("and {more} more such amplifiers"))
}

fn nullor(element: &Element) -> Option<(Port, Port)> {
    match &element.kind {
        Kind::Amplifier {
            input,
            output,
            gain: None,
            ..
        }
        | Kind::Nullor { input, output } => Some((*input, *output)),
        _ => None,
    }
}

fn message(wiring: &Wiring<'_>, element: &Element) -> Diagnostic {
    let network = wiring.network;
    let name = part_name(network, element);
    let Some((input, output)) = nullor(element) else {
        return Diagnostic::error(element.place, format!("{name} has no feedback"));
    };
    let nodes: Vec<NodeId> = [output.from, output.to]
        .into_iter()
        .filter(|&node| node != NodeId::GROUND)
        .collect();
    let message = format!(
        "the output of {name} ({}) has no path back to its inputs",
        node_list(network, &nodes)
    );
    let inputs: Vec<String> = [input.from, input.to]
        .into_iter()
        .filter(|&node| node != NodeId::GROUND)
        .map(|node| network.node(node).name.clone())
        .collect();
    let help = match element.kind {
        Kind::Amplifier { .. } => format!(
            "an ideal opamp needs feedback: connect the output to {} through a part, or give it a \
             finite gain with gain = A0",
            list(&inputs)
        ),
        _ => format!("connect the output to {} through a part", list(&inputs)),
    };
    Diagnostic::error(element.place, message).help(help)
}

struct Classes {
    /// Joined to the reference by sources of fixed voltage and meters.
    held: Components,
    class: Components,
    /// Sensed parts, each with a sensing node in case its ends are held.
    sensed: BTreeMap<ElementId, usize>,
}

impl Classes {
    fn new(wiring: &Wiring<'_>) -> Self {
        let shorts = wiring.parts.iter().filter_map(|(id, element)| {
            let short = element.is_short() && !wiring.sensed.contains(id);
            let port = element.port().filter(|_| short)?;
            Some((number(port.from), number(port.to)))
        });
        let held = components(wiring.nodes(), shorts);
        let mut sets = UnionFind::<u32>::new(wiring.nodes());
        let is_held = |node: NodeId| held.joined((0, number(node)));
        let mut join = |nodes: &[NodeId]| {
            let mut free = nodes.iter().filter(|&&node| !is_held(node));
            if let Some(&first) = free.next() {
                for &node in free {
                    sets.union(number(first), number(node));
                }
            }
        };
        for (_, element) in &wiring.parts {
            if element.is_current_source() {
                continue;
            }
            let two_way = matches!(
                element.kind,
                Kind::Transformer { .. } | Kind::Gyrator { .. }
            );
            let mut edges: Edges = element.current_edges();
            edges.extend(element.voltage_edges());
            if two_way {
                let ends: Vec<NodeId> = ends(&edges).collect();
                join(&ends);
            } else {
                edges.iter().for_each(|port| join(&[port.from, port.to]));
            }
        }
        for coupling in wiring.network.couplings() {
            let coils = [coupling.first, coupling.second];
            let ends: Vec<NodeId> = coils
                .iter()
                .filter_map(|&coil| wiring.network.element(coil).port())
                .flat_map(|port| [port.from, port.to])
                .collect();
            join(&ends);
        }
        let class = Components::of(sets);
        let sensed = wiring.sensed.iter().copied().zip(class.count..).collect();
        Self {
            held,
            class,
            sensed,
        }
    }

    /// The class of a part with two ends, or its sensing node.
    fn of_part(&self, network: &Network, part: ElementId) -> Option<usize> {
        let class = network.element(part).port().and_then(|port| self.of(port));
        class.or_else(|| self.sensed.get(&part).copied())
    }

    /// The class of a node pair; `None` when both its nodes are held.
    fn of(&self, port: Port) -> Option<usize> {
        [port.from, port.to]
            .into_iter()
            .find(|&node| !self.held.joined((0, number(node))))
            .map(|node| self.class.label[node.index()] as usize)
    }

    /// For each class, the strongly connected group it lies in under the one-way parts.
    fn circuits(&self, wiring: &Wiring<'_>) -> Vec<usize> {
        let mut graph = DiGraph::<(), ()>::new();
        let count = self.class.count + self.sensed.len();
        for _ in 0..count {
            graph.add_node(());
        }
        for &(id, element) in &wiring.parts {
            for (from, to) in self.one_way(wiring.network, id, element) {
                if from != to {
                    graph.add_edge(NodeIndex::new(from), NodeIndex::new(to), ());
                }
            }
        }
        let mut group = vec![0; count];
        for (index, members) in kosaraju_scc(&graph).iter().enumerate() {
            for member in members {
                group[member.index()] = index;
            }
        }
        group
    }

    /// Pairs (sensed class, driven class) of a part that acts one way.
    fn one_way(&self, network: &Network, id: ElementId, element: &Element) -> Vec<(usize, usize)> {
        match &element.kind {
            Kind::Amplifier { input, output, .. } | Kind::Nullor { input, output } => {
                self.of(*input).zip(self.of(*output)).into_iter().collect()
            }
            Kind::Conveyor {
                x, y, z, reference, ..
            } => {
                let sensed = Port { from: *x, to: *y };
                let driven = Port {
                    from: *z,
                    to: *reference,
                };
                self.of(sensed).zip(self.of(driven)).into_iter().collect()
            }
            Kind::Source(source) => source
                .controls
                .iter()
                .filter(|control| control.acts())
                .filter_map(|control| {
                    let sensed = match control.sense {
                        Sense::Voltage(port) => self.of(port),
                        Sense::Current(part) => self.of_part(network, part),
                    };
                    sensed.zip(self.of_part(network, id))
                })
                .collect(),
            _ => Vec::new(),
        }
    }
}

fn ends(edges: &[Port]) -> impl Iterator<Item = NodeId> {
    edges.iter().flat_map(|port| [port.from, port.to])
}
