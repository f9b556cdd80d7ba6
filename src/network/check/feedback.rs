//! Ideal amplifiers whose output has no path back to their inputs.
//!
//! Take the current edges and voltage edges of all parts as one graph, sources of fixed voltage
//! contracted, and its blocks. A spanning tree has in each block one edge less than the block has
//! nodes, in the current graph and in the voltage graph alike. So the parts that a term of the
//! determinant uses with a voltage edge in one block and a current edge in another make up closed
//! circuits of blocks; an ideal amplifier is used in every term, and one that lies on no circuit
//! makes the determinant zero.

use std::collections::BTreeMap;

use petgraph::algo::kosaraju_scc;
use petgraph::graph::{DiGraph, NodeIndex};

use super::naming::{list, node_list, part_name};
use super::{Wiring, few, number};
use crate::diagnostic::Diagnostic;
use crate::network::blocks::blocks;
use crate::network::element::{Element, Kind, Port, Sense};
use crate::network::graph::Network;
use crate::network::id::{ElementId, NodeId};
use crate::network::incidence::{Components, Ends, components};

/// One message for each ideal amplifier or nullor without feedback.
pub(super) fn faults(wiring: &Wiring<'_>) -> Vec<Diagnostic> {
    if !wiring.parts.iter().any(|(_, element)| element.is_nullor()) {
        return Vec::new();
    }
    let map = Blocks::new(wiring);
    let circuit = map.circuits(wiring);
    let open = wiring.parts.iter().filter(|(_, element)| {
        let one_way = || {
            let (input, output) = nullor(element)?;
            let sensed = map.of(input)?;
            let driven = map.of(output)?;
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

/// Which block each node pair lies in.
struct Blocks {
    /// Nodes joined by sources of fixed voltage and meters are one.
    merged: Components,
    /// Node pairs that a part joins, sorted, and the block of each.
    pairs: Vec<Ends>,
    block: Vec<usize>,
    count: usize,
    /// Sensed parts, each with a block of its own in case its ends are one node.
    sensed: BTreeMap<ElementId, usize>,
}

impl Blocks {
    fn new(wiring: &Wiring<'_>) -> Self {
        let shorts = wiring.parts.iter().filter_map(|(id, element)| {
            let short = element.is_short() && !wiring.sensed.contains(id);
            let port = element.port().filter(|_| short)?;
            Some((number(port.from), number(port.to)))
        });
        let merged = components(wiring.nodes(), shorts);
        let mut pairs: Vec<Ends> = wiring
            .ends(Element::current_edges)
            .chain(wiring.ends(Element::voltage_edges))
            .map(|ends| pair(&merged, ends))
            .filter(|(a, b)| a != b)
            .collect();
        pairs.sort_unstable();
        pairs.dedup();
        let found = blocks(merged.count, &pairs);
        let count = found.len();
        let mut block = vec![0; pairs.len()];
        for (index, edges) in found.iter().enumerate() {
            for &edge in edges {
                block[edge as usize] = index;
            }
        }
        Self {
            merged,
            pairs,
            block,
            count,
            sensed: wiring.sensed.iter().copied().zip(count..).collect(),
        }
    }

    /// The block of a node pair; `None` when it is one node.
    fn of(&self, port: Port) -> Option<usize> {
        let ends = pair(&self.merged, (number(port.from), number(port.to)));
        let at = self.pairs.binary_search(&ends).ok()?;
        Some(self.block[at])
    }

    /// The block of a part with two ends, or its own.
    fn of_part(&self, network: &Network, part: ElementId) -> Option<usize> {
        let block = network.element(part).port().and_then(|port| self.of(port));
        block.or_else(|| self.sensed.get(&part).copied())
    }

    /// For each block, the strongly connected group it lies in.
    fn circuits(&self, wiring: &Wiring<'_>) -> Vec<usize> {
        let count = self.count + self.sensed.len();
        let mut graph = DiGraph::<(), ()>::with_capacity(count, 0);
        for _ in 0..count {
            graph.add_node(());
        }
        let mut act = |sensed: Option<usize>, driven: Option<usize>| {
            if let Some((from, to)) = sensed.zip(driven).filter(|(from, to)| from != to) {
                graph.add_edge(NodeIndex::new(from), NodeIndex::new(to), ());
            }
        };
        for &(id, element) in &wiring.parts {
            self.links(wiring.network, id, element, &mut act);
        }
        for coupling in wiring.network.couplings() {
            let coils = [coupling.first, coupling.second];
            let [first, second] = coils.map(|coil| self.of_part(wiring.network, coil));
            act(first, second);
            act(second, first);
        }
        let mut group = vec![0; count];
        for (index, members) in kosaraju_scc(&graph).iter().enumerate() {
            for member in members {
                group[member.index()] = index;
            }
        }
        group
    }

    /// From each block that the part senses to each that it drives.
    fn links(
        &self,
        network: &Network,
        id: ElementId,
        element: &Element,
        act: &mut impl FnMut(Option<usize>, Option<usize>),
    ) {
        match &element.kind {
            Kind::Source(source) => {
                let driven = self.of_part(network, id);
                for control in source.controls.iter().filter(|control| control.acts()) {
                    let sensed = match control.sense {
                        Sense::Voltage(port) => self.of(port),
                        Sense::Current(part) => self.of_part(network, part),
                    };
                    act(sensed, driven);
                }
            }
            Kind::Amplifier { .. }
            | Kind::Nullor { .. }
            | Kind::Conveyor { .. }
            | Kind::Transformer { .. }
            | Kind::Gyrator { .. } => {
                for sensed in element.voltage_edges() {
                    for driven in element.current_edges() {
                        act(self.of(sensed), self.of(driven));
                    }
                }
            }
            Kind::Resistor(..)
            | Kind::Conductance(..)
            | Kind::Capacitor(..)
            | Kind::Inductor(..)
            | Kind::Impedance(..)
            | Kind::Admittance(..)
            | Kind::Meter(_) => {}
        }
    }
}

fn pair(merged: &Components, (a, b): Ends) -> Ends {
    let (a, b) = (merged.label[a as usize], merged.label[b as usize]);
    (a.min(b), a.max(b))
}
