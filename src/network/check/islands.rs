//! Nodes that nothing ties to the reference.
//!
//! Each test is one of connectedness: of the network as it conducts, of the current graph (current
//! sources open), of the voltage graph. Where one of the last two falls apart it has no spanning
//! tree, and the determinant is zero.

use super::naming::{is_written, list, node_list, part_name, part_names};
use super::{Wiring, few, number};
use crate::diagnostic::Diagnostic;
use crate::network::element::{Element, Kind};
use crate::network::id::{ElementId, NodeId};
use crate::network::incidence::{Components, components};
use crate::network::topology::Edges;
use crate::source::Span;

/// No part stands at the reference.
pub(super) fn reference(wiring: &Wiring<'_>) -> Option<Diagnostic> {
    let (_, first) = wiring.parts.first()?;
    let touches = |edges: Edges| {
        edges
            .iter()
            .any(|port| port.from == NodeId::GROUND || port.to == NodeId::GROUND)
    };
    if wiring
        .parts
        .iter()
        .any(|(_, element)| touches(element.conducting()))
    {
        return None;
    }
    let zero = (0..wiring.nodes()).any(|node| wiring.network.node(NodeId::at(node)).name == "0");
    let help = if zero {
        "node 0 is an ordinary node: write ground"
    } else {
        "write ground for the node that all voltages are counted from"
    };
    let message = "no part is connected to ground, so no voltage has a reference";
    Some(Diagnostic::error(first.place, message).help(help))
}

/// Islands, cut-sets of current sources, nodes whose voltage nothing determines; nothing is said of
/// nodes that are marked as told.
pub(super) fn faults(wiring: &Wiring<'_>, mut told: Vec<bool>) -> Vec<Diagnostic> {
    if is_held_by_two_ended_parts(wiring) {
        return Vec::new();
    }
    let rest = |more| format!("and {more} more such places");
    let mut found = Vec::new();

    let islands = Island::all(wiring, &mut told, Element::conducting);
    found.extend(few(
        islands.iter().map(|island| island.floating(wiring)),
        rest,
    ));

    let islands = Island::all(wiring, &mut told, Element::current_edges);
    let sources = |island: &Island| island.starved(wiring);
    found.extend(few(islands.iter().map(sources), rest));

    let islands = Island::all(wiring, &mut told, Element::voltage_edges);
    let undetermined = |island: &Island| island.undetermined(wiring);
    found.extend(few(islands.iter().map(undetermined), rest));
    found
}

/// Whether parts whose edge stands in all three graphs join every node to the reference.
fn is_held_by_two_ended_parts(wiring: &Wiring<'_>) -> bool {
    let edges = wiring.parts.iter().filter_map(|(_, element)| {
        let everywhere = element.value().is_some() || element.is_short();
        let port = element.port().filter(|_| everywhere)?;
        Some((number(port.from), number(port.to)))
    });
    components(wiring.nodes(), edges).count == 1
}

/// A component without the reference.
struct Island {
    nodes: Vec<NodeId>,
    /// Parts that conduct at its nodes.
    conducting: Vec<ElementId>,
    /// Parts that sense at its nodes.
    sensing: Vec<ElementId>,
}

impl Island {
    /// The components without the reference, but for nodes told of already; marks their nodes.
    fn all(wiring: &Wiring<'_>, told: &mut [bool], edges: impl Fn(&Element) -> Edges) -> Vec<Self> {
        let parted = components(wiring.nodes(), wiring.ends(edges));
        if parted.count == 1 {
            return Vec::new();
        }
        let mut islands = Self::nodes_of(&parted, told);
        let place: Vec<Option<usize>> = {
            let mut place = vec![None; wiring.nodes()];
            for (index, island) in islands.iter().enumerate() {
                for node in &island.nodes {
                    place[node.index()] = Some(index);
                }
            }
            place
        };
        for (id, element) in &wiring.parts {
            for (sensing, edges) in [
                (false, element.conducting()),
                (true, element.voltage_edges()),
            ] {
                for node in edges.iter().flat_map(|port| [port.from, port.to]) {
                    if let Some(index) = place[node.index()] {
                        islands[index].touch(*id, sensing);
                    }
                }
            }
        }
        islands
    }

    fn nodes_of(parted: &Components, told: &mut [bool]) -> Vec<Self> {
        let ground = parted.label[0];
        let mut at = vec![None; parted.count];
        let mut islands: Vec<Self> = Vec::new();
        for (node, &label) in parted.label.iter().enumerate() {
            if label == ground || told[node] {
                continue;
            }
            told[node] = true;
            let index = *at[label as usize].get_or_insert_with(|| {
                islands.push(Self {
                    nodes: Vec::new(),
                    conducting: Vec::new(),
                    sensing: Vec::new(),
                });
                islands.len() - 1
            });
            islands[index].nodes.push(NodeId::at(node));
        }
        islands
    }

    fn touch(&mut self, id: ElementId, sensing: bool) {
        let list = if sensing {
            &mut self.sensing
        } else {
            &mut self.conducting
        };
        if list.last() != Some(&id) {
            list.push(id);
        }
    }

    /// The first part concerned, in the order of the file.
    fn place(&self, wiring: &Wiring<'_>) -> Span {
        let first = self.conducting.first().or(self.sensing.first());
        match first {
            Some(&id) => wiring.network.element(id).place,
            None => wiring.network.node(self.nodes[0]).place,
        }
    }

    fn names(&self, wiring: &Wiring<'_>) -> String {
        node_list(wiring.network, &self.nodes)
    }

    /// No conducting path to the reference.
    fn floating(&self, wiring: &Wiring<'_>) -> Diagnostic {
        let nodes = self.names(wiring);
        let place = self.place(wiring);
        if self.conducting.is_empty() {
            return self.unconducted(wiring, place, &nodes);
        }
        let have = if self.nodes.len() == 1 { "has" } else { "have" };
        let parts = list(&part_names(wiring.network, &self.conducting));
        let message = format!("{nodes} ({parts}) {have} no conducting path to ground");
        let help = self.winding(wiring).unwrap_or_else(|| {
            let name = &wiring.network.node(self.nodes[0]).name;
            if is_written(name) {
                format!("tie the island to ground: {name} -- ground, or a part between them")
            } else {
                "tie the island to ground by a part or by node -- ground".to_owned()
            }
        });
        Diagnostic::error(place, message).help(help)
    }

    fn unconducted(&self, wiring: &Wiring<'_>, place: Span, nodes: &str) -> Diagnostic {
        let message = if self.sensing.is_empty() {
            format!("no part is connected to {nodes}")
        } else {
            let parts = list(&part_names(wiring.network, &self.sensing));
            let verb = if self.sensing.len() == 1 {
                "senses"
            } else {
                "sense"
            };
            format!("nothing conducts to {nodes}: {parts} only {verb} there")
        };
        Diagnostic::error(place, message)
            .help("check how the node is spelt, or connect a part that carries current to it")
    }

    /// A winding whose partner stands outside: the usual cause, with the terminal to tie.
    fn winding(&self, wiring: &Wiring<'_>) -> Option<String> {
        let network = wiring.network;
        let inside = |node: NodeId| self.nodes.binary_search(&node).is_ok();
        let tie = |terminal: &str, of: &str, node: NodeId| {
            let name = &network.node(node).name;
            if is_written(name) {
                format!("tie {terminal} of {of} to ground: {name} -- ground")
            } else {
                format!("tie {terminal} of {of} to ground")
            }
        };
        for &id in &self.conducting {
            let element = network.element(id);
            if let Kind::Transformer {
                primary, secondary, ..
            }
            | Kind::Gyrator {
                primary, secondary, ..
            } = &element.kind
            {
                let name = part_name(network, element);
                return Some(if inside(secondary.to) {
                    tie("s2", name, secondary.to)
                } else {
                    tie("p2", name, primary.to)
                });
            }
        }
        network.couplings().iter().find_map(|coupling| {
            [coupling.second, coupling.first].iter().find_map(|&coil| {
                let end = network.element(coil).port()?.to;
                (inside(end) && self.conducting.binary_search(&coil).is_ok())
                    .then(|| tie("the right end", &network.element(coil).name, end))
            })
        })
    }

    /// Only independent current sources lead here.
    fn starved(&self, wiring: &Wiring<'_>) -> Diagnostic {
        let inside = |node: NodeId| self.nodes.binary_search(&node).is_ok();
        let sources: Vec<ElementId> = self
            .conducting
            .iter()
            .copied()
            .filter(|&id| {
                let element = wiring.network.element(id);
                element.is_current_source()
                    && element
                        .port()
                        .is_some_and(|port| inside(port.from) != inside(port.to))
            })
            .collect();
        let nodes = self.names(wiring);
        let parts = list(&part_names(wiring.network, &sources));
        let message = if let [_] = sources[..] {
            format!("only the current source {parts} leads to {nodes}: its current has no way on")
        } else {
            format!(
                "only the current sources {parts} lead to {nodes}: \
                 their currents would have to add up to zero"
            )
        };
        let place = sources.first().map_or_else(
            || self.place(wiring),
            |&id| wiring.network.element(id).place,
        );
        Diagnostic::error(place, message).help(self.load(wiring, "take a source out"))
    }

    /// Currents lead here, but no equation names the voltage.
    fn undetermined(&self, wiring: &Wiring<'_>) -> Diagnostic {
        let nodes = self.names(wiring);
        let parts = list(&part_names(wiring.network, &self.conducting));
        let verb = if self.conducting.len() == 1 {
            "drives"
        } else {
            "drive"
        };
        let message = format!("nothing determines the voltage of {nodes}: {parts} only {verb} it");
        let other = match self
            .conducting
            .first()
            .map(|&id| wiring.network.element(id))
        {
            Some(element) if element.is_nullor() => {
                format!(
                    "feed it back to the inputs of {}",
                    part_name(wiring.network, element)
                )
            }
            _ => "give the source an output resistance".to_owned(),
        };
        Diagnostic::error(self.place(wiring), message).help(self.load(wiring, &other))
    }

    fn load(&self, wiring: &Wiring<'_>, other: &str) -> String {
        let name = &wiring.network.node(self.nodes[0]).name;
        format!(
            "connect a part that conducts, such as a resistor from {name} to ground, or {other}"
        )
    }
}
