//! How messages name parts and nodes.

use crate::network::element::{Element, Kind};
use crate::network::graph::Network;
use crate::network::id::{ElementId, NodeId};

/// Names listed before the rest is counted.
const LISTED: usize = 6;

/// `a`, `a and b`, `a, b and c`; from the seventh name on the rest is counted.
#[must_use]
pub fn list(names: &[String]) -> String {
    match names {
        [] => String::new(),
        [one] => one.clone(),
        [front @ .., last] if names.len() <= LISTED => format!("{} and {last}", front.join(", ")),
        _ => {
            let more = names.len() - LISTED;
            format!("{} and {more} more", names[..LISTED].join(", "))
        }
    }
}

/// `node a`, `nodes a and b`.
#[must_use]
pub fn node_list(network: &Network, nodes: &[NodeId]) -> String {
    let word = if nodes.len() == 1 { "node" } else { "nodes" };
    let names: Vec<String> = nodes
        .iter()
        .map(|&node| network.node(node).name.clone())
        .collect();
    format!("{word} {}", list(&names))
}

/// The name a user knows a part by: that of its device for what has no value of its own.
#[must_use]
pub fn part_name<'a>(network: &'a Network, element: &'a Element) -> &'a str {
    let passive = element.value().is_some();
    match element.device {
        Some(device) if !passive => &network.device(device).name,
        _ => &element.name,
    }
}

/// Names of parts, each once, in the order given.
#[must_use]
pub fn part_names(network: &Network, parts: &[ElementId]) -> Vec<String> {
    let mut names: Vec<String> = Vec::with_capacity(parts.len().min(LISTED + 1));
    for &id in parts {
        let name = part_name(network, network.element(id));
        if names.last().is_none_or(|last| last != name) {
            names.push(name.to_owned());
        }
    }
    names
}

/// Whether a name can be written in a file; nodes without a name cannot.
pub(super) fn is_written(name: &str) -> bool {
    !name.starts_with('(')
}

/// `the output of U1`, `Vs`: what fixes a voltage, in words.
pub(super) fn holder(network: &Network, element: &Element) -> String {
    let name = part_name(network, element);
    match element.kind {
        Kind::Amplifier { .. } | Kind::Nullor { .. } => format!("the output of {name}"),
        _ => name.to_owned(),
    }
}
