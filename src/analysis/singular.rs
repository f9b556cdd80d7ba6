//! Why a determinant is zero: the message for a network without a unique solution.

mod matching;
mod pattern;

use crate::analysis::singular::matching::undetermined;
use crate::analysis::singular::pattern::{Pattern, Unknown};
use crate::diagnostic::Diagnostic;
use crate::network::check::{faults, list, node_list, part_names};
use crate::network::{ElementId, Network, NodeId, Port};
use crate::source::Span;

/// The network whose determinant is zero.
#[derive(Clone, Copy, Debug)]
pub struct Case<'a> {
    /// The network.
    pub network: &'a Network,
    /// Parts taken out.
    pub without: &'a [ElementId],
    /// Node pairs that the question touches.
    pub touched: &'a [Port],
    /// A node pair that the question shorts.
    pub short: Option<Port>,
    /// Parts met on the way: those that were contracted when the determinant vanished.
    pub met: &'a [ElementId],
    /// The question, where only its own network is singular.
    pub question: Option<Span>,
}

/// Explains a zero determinant: a fault of the wiring where one is found, else the unknowns that too
/// few equations speak of, else the parts met, else that values and relations make it so.
///
/// Cost: all but linear in the number of parts where the wiring is at fault; else that of a
/// bipartite matching.
#[must_use]
pub fn explain(case: &Case<'_>) -> Diagnostic {
    let mut found = wiring(case)
        .or_else(|| too_few_equations(case))
        .unwrap_or_else(|| by_values(case));
    if !case.without.is_empty() {
        let names = list(&part_names(case.network, case.without));
        found
            .message
            .push_str(&format!(" (with {names} taken out)"));
    }
    match case.question {
        Some(place) if found.place != Some(place) => found.label(place, "asked here"),
        _ => found,
    }
}

fn wiring(case: &Case<'_>) -> Option<Diagnostic> {
    faults(case.network, case.without, case.touched)
        .into_iter()
        .next()
}

/// Unknowns that stand in fewer equations than they are.
fn too_few_equations(case: &Case<'_>) -> Option<Diagnostic> {
    let network = case.network;
    let pattern = Pattern::new(network, case.without, case.short);
    let open = undetermined(&pattern.rows, pattern.unknowns.len());
    if open.is_empty() {
        return None;
    }
    let (mut nodes, mut parts): (Vec<NodeId>, Vec<ElementId>) = (Vec::new(), Vec::new());
    for index in open {
        match pattern.unknowns[index as usize] {
            Unknown::Voltage(node) => nodes.push(node),
            Unknown::Current(part) => parts.push(part),
            Unknown::Short => {}
        }
    }
    parts.dedup();
    let mut what = Vec::new();
    if !nodes.is_empty() {
        let word = if nodes.len() == 1 {
            "voltage"
        } else {
            "voltages"
        };
        what.push(format!("the {word} of {}", node_list(network, &nodes)));
    }
    if !parts.is_empty() {
        let names = part_names(network, &parts);
        let word = if names.len() == 1 {
            "current"
        } else {
            "currents"
        };
        what.push(format!("the {word} of {}", list(&names)));
    }
    let message = if what.is_empty() {
        "the short at the port closes a loop of voltage sources".to_owned()
    } else {
        format!("no unique solution: too few equations for {}", list(&what))
    };
    let at = place(case, &parts).unwrap_or_else(|| {
        let node = nodes.first().copied().unwrap_or(NodeId::GROUND);
        network.node(node).place
    });
    Some(Diagnostic::error(at, message).help(way_out(network, &parts)))
}

fn way_out(network: &Network, parts: &[ElementId]) -> &'static str {
    let ideal = |id: &ElementId| network.element(*id).is_nullor();
    if parts.iter().any(ideal) {
        "an ideal opamp sets its output only where that moves its own inputs: check what its \
         output and its inputs are connected to, or give it a finite gain"
    } else {
        "add a part that fixes a voltage or takes a current there, or take out one that repeats \
         what others fix"
    }
}

fn place(case: &Case<'_>, parts: &[ElementId]) -> Option<Span> {
    let first = parts.iter().min()?;
    Some(case.network.element(*first).place)
}

/// Singular though the wiring gives every unknown an equation.
fn by_values(case: &Case<'_>) -> Diagnostic {
    let network = case.network;
    let suspects: Vec<ElementId> = if case.met.is_empty() {
        let elements = network.elements();
        elements
            .filter(|(id, element)| {
                let fixes = element.port().is_none() || element.forced_current().is_some();
                let senses = element.forced_voltage().is_none();
                !case.without.contains(id) && fixes && (senses || element.port().is_none())
            })
            .map(|(id, _)| id)
            .collect()
    } else {
        case.met.to_vec()
    };
    let names = list(&part_names(network, &suspects));
    let message = match (case.met.is_empty(), names.is_empty()) {
        (false, _) => {
            format!("no unique solution: the equations of {names} repeat or contradict each other")
        }
        (true, false) => format!(
            "no unique solution: with the relations and device numbers given, the equations of \
             {names} repeat or contradict each other"
        ),
        (true, true) => {
            "no unique solution: with the relations given, equations repeat each other".to_owned()
        }
    };
    let at = place(case, &suspects)
        .or(case.question)
        .unwrap_or_else(|| network.node(NodeId::GROUND).place);
    Diagnostic::error(at, message).help(
        "give an ideal amplifier a finite gain, or put a resistance in series with one of the \
         parts; a gain of exactly 1 or a relation between gains may be what cancels",
    )
}

#[cfg(test)]
mod tests;
