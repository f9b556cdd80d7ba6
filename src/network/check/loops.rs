//! Loops of parts that fix voltages: the current in such a loop, or the output that should bring
//! the voltage about, has no unique value.

use super::naming::{holder, list, node_list, part_name};
use super::{Wiring, few, number};
use crate::diagnostic::Diagnostic;
use crate::network::cycle::{Loops, closing};
use crate::network::element::{Element, Kind, Port};
use crate::network::id::{ElementId, NodeId};
use crate::network::incidence::Ends;

/// Loops of sources, meters and outputs; loops of sources, meters and nodes held equal.
pub(super) fn faults(wiring: &Wiring<'_>) -> Vec<Diagnostic> {
    let currents = |id: ElementId, element: &Element| {
        let sensed = wiring.sensed.contains(&id);
        element.forced_current().filter(|_| !sensed)
    };
    let voltages = |_, element: &Element| element.forced_voltage();
    let mut found =
        Forced::new(wiring, currents).report(wiring, |around| Some(source_loop(wiring, around)));
    found.extend(Forced::new(wiring, voltages).report(wiring, |around| equal_loop(wiring, around)));
    found
}

/// The forced edges of one graph, sources and meters before the rest.
struct Forced<'a> {
    edges: Vec<Ends>,
    parts: Vec<Part<'a>>,
}

type Part<'a> = (ElementId, &'a Element);

/// The parts of a loop, from the one that closes it on, and its nodes, the reference last.
struct Loop<'a> {
    parts: Vec<Part<'a>>,
    nodes: Vec<NodeId>,
}

impl<'a> Forced<'a> {
    fn new(wiring: &Wiring<'a>, edge: impl Fn(ElementId, &Element) -> Option<Port>) -> Self {
        let mut list: Vec<(bool, Part<'a>, Port)> = wiring
            .parts
            .iter()
            .filter_map(|&(id, element)| {
                let port = edge(id, element)?;
                Some((!element.is_short(), (id, element), port))
            })
            .collect();
        list.sort_by_key(|(device, ..)| *device);
        Self {
            edges: list
                .iter()
                .map(|(.., port)| (number(port.from), number(port.to)))
                .collect(),
            parts: list.into_iter().map(|(_, part, _)| part).collect(),
        }
    }

    fn report(
        &self,
        wiring: &Wiring<'_>,
        tell: impl Fn(&Loop<'_>) -> Option<Diagnostic>,
    ) -> Vec<Diagnostic> {
        let closing = closing(wiring.nodes(), &self.edges);
        if closing.is_empty() {
            return Vec::new();
        }
        let mut loops = Loops::new(wiring.nodes(), &self.edges, &closing);
        let found = closing.iter().filter_map(|&edge| {
            let list = loops.of(edge);
            tell(&self.around(&list))
        });
        few(found, |more| format!("and {more} more such loops"))
    }

    fn around(&self, list: &[u32]) -> Loop<'a> {
        let (first, mut at) = self.edges[list[0] as usize];
        let mut nodes = vec![NodeId::at(first as usize)];
        for &edge in &list[1..] {
            nodes.push(NodeId::at(at as usize));
            let (a, b) = self.edges[edge as usize];
            at = if a == at { b } else { a };
        }
        nodes.sort_unstable_by_key(|&node| (node == NodeId::GROUND, node));
        Loop {
            parts: list.iter().map(|&edge| self.parts[edge as usize]).collect(),
            nodes,
        }
    }
}

fn source_loop(wiring: &Wiring<'_>, found: &Loop<'_>) -> Diagnostic {
    let network = wiring.network;
    let mut parts = found.parts.clone();
    parts.sort_by_key(|(id, _)| *id);
    let parts: Vec<&Element> = parts.into_iter().map(|(_, element)| element).collect();
    let nodes = node_list(network, &found.nodes);
    let names: Vec<String> = parts.iter().map(|part| holder(network, part)).collect();
    let meters = parts
        .iter()
        .all(|element| matches!(element.kind, Kind::Meter(_)));
    let (message, help) = match &names[..] {
        [one] => (
            format!("both ends of {one} are connected to {nodes}, so its current is undetermined"),
            "take it out, or connect its ends to different nodes",
        ),
        [_, _] => (
            format!(
                "{} are in parallel ({nodes}), so the current between them is undetermined",
                list(&names)
            ),
            "take one of them out, or put a resistance in series with one",
        ),
        _ => (
            format!(
                "{} form a loop of voltage sources through {nodes}, \
                 so the current around it is undetermined",
                list(&names)
            ),
            "take one of them out, or put a resistance in series with one",
        ),
    };
    let help = if meters && names.len() > 1 {
        "take one of the meters out"
    } else {
        help
    };
    labelled(Diagnostic::error(parts[0].place, message), wiring, &parts).help(help)
}

/// A loop of node pairs with fixed voltage; `None` when it has been told of as a loop of sources
/// and meters.
fn equal_loop(wiring: &Wiring<'_>, found: &Loop<'_>) -> Option<Diagnostic> {
    let network = wiring.network;
    let (holders, mut fixed): (Vec<&Element>, Vec<&Element>) = found
        .parts
        .iter()
        .map(|(_, element)| *element)
        .partition(|element| !element.is_short());
    let Some(&first) = holders.first() else {
        let sensed = found.parts.iter().any(|(id, _)| wiring.sensed.contains(id));
        return sensed.then(|| source_loop(wiring, found));
    };
    let name = part_name(network, first);
    let nodes = node_list(network, &found.nodes);
    let ends = match first.kind {
        Kind::Conveyor { .. } => "x and y",
        Kind::Source(_) => "input and output",
        _ => "+ and -",
    };
    let message = if found.parts.len() == 1 {
        format!("{ends} of {name} are both connected to {nodes}, so its output is undetermined")
    } else {
        let mut names: Vec<String> = holders[1..]
            .iter()
            .map(|part| format!("the equal ends of {}", part_name(network, part)))
            .collect();
        names.extend(fixed.iter().map(|part| part.name.clone()));
        let verb = if names.len() == 1 && fixed.len() == 1 {
            "fixes"
        } else {
            "fix"
        };
        format!(
            "{name} is to hold its {ends} at one voltage, but {} {verb} that voltage already \
             (through {nodes})",
            list(&names)
        )
    };
    fixed.insert(0, first);
    let help = match first.kind {
        Kind::Amplifier { .. } => {
            "an ideal opamp needs inputs that can move and feedback that moves them: \
             put a part in series with an input, or give it a gain"
        }
        _ => "put a part in series with one of the terminals",
    };
    Some(labelled(Diagnostic::error(first.place, message), wiring, &fixed).help(help))
}

/// Points at the other parts of a loop, as long as they are few.
fn labelled(diagnostic: Diagnostic, wiring: &Wiring<'_>, parts: &[&Element]) -> Diagnostic {
    if parts.len() > 4 {
        return diagnostic;
    }
    parts[1..].iter().fold(diagnostic, |diagnostic, part| {
        diagnostic.label(part.place, part_name(wiring.network, part))
    })
}
