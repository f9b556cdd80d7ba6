//! Driving points across sources that short them.

use super::naming::{list, part_names};
use super::number;
use crate::diagnostic::Diagnostic;
use crate::network::cycle::{Loops, closing};
use crate::network::element::Port;
use crate::network::graph::Network;
use crate::network::id::ElementId;
use crate::network::incidence::Ends;
use crate::network::question::{Ask, Question};

/// One message for each question that asks an impedance or admittance where a source of voltage or
/// a meter joins the two nodes.
pub(super) fn faults(network: &Network) -> Vec<Diagnostic> {
    let questions = network.questions().iter();
    questions
        .filter_map(|question| fault(network, question))
        .collect()
}

fn fault(network: &Network, question: &Question) -> Option<Diagnostic> {
    let (Ask::Impedance(port) | Ask::Admittance(port)) = question.ask else {
        return None;
    };
    let name = &question.name;
    if port.from == port.to {
        let node = &network.node(port.from).name;
        let message = format!("{name} asks between node {node} and itself");
        return Some(Diagnostic::error(question.place, message).help("name two different nodes"));
    }
    let shorts = shorting(network, &question.without, port);
    let first = *shorts.first()?;
    let names = part_names(network, &shorts);
    let verb = if names.len() == 1 { "joins" } else { "join" };
    let message = format!(
        "{} {verb} the two nodes of {name}: its sources at zero, the port is shorted",
        list(&names)
    );
    let source = shorts
        .iter()
        .copied()
        .find(|&id| network.element(id).independent_source().is_some())
        .unwrap_or(first);
    let mut out = question.without.clone();
    out.push(source);
    let out = part_names(network, &out).join(", ");
    let place = network.element(source).place;
    Some(
        Diagnostic::error(question.place, message)
            .label(place, "stands across the port")
            .help(format!("add without {out}")),
    )
}

/// The sources of voltage and meters that join the nodes of a port, in order from one to the
/// other; empty where none do.
fn shorting(network: &Network, without: &[ElementId], port: Port) -> Vec<ElementId> {
    let shorts: Vec<(ElementId, Ends)> = network
        .elements()
        .filter(|(id, element)| element.is_short() && !without.contains(id))
        .filter_map(|(id, element)| {
            let port = element.port()?;
            Some((id, (number(port.from), number(port.to))))
        })
        .collect();
    let mut edges: Vec<Ends> = shorts.iter().map(|(_, ends)| *ends).collect();
    edges.push((number(port.from), number(port.to)));
    let closing = closing(network.node_count(), &edges);
    let Some(last) = closing
        .last()
        .filter(|&&edge| edge as usize == shorts.len())
    else {
        return Vec::new();
    };
    let mut loops = Loops::new(network.node_count(), &edges, &closing);
    let around = loops.of(*last).into_iter().skip(1);
    around.map(|edge| shorts[edge as usize].0).collect()
}
