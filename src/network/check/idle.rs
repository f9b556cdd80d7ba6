//! Parts that do nothing where they stand.

use super::few;
use super::naming::part_name;
use crate::diagnostic::Diagnostic;
use crate::network::element::{Element, Kind, Port};
use crate::network::graph::Network;

/// Warnings for parts with both ends on one node and for sources that sense nothing.
///
/// Parts inside a device are left out: a device wired as a diode has some by intention.
pub(super) fn warnings(network: &Network) -> Vec<Diagnostic> {
    let found = network
        .elements()
        .filter(|(_, element)| element.device.is_none())
        .filter_map(|(_, element)| {
            idle(network, element)
                .map(|message| Diagnostic::warning(element.place, message))
                .or_else(|| blind(network, element))
        });
    let mut list = few(found, |more| format!("and {more} more such parts"));
    list.extend(
        network
            .elements()
            .filter_map(|(_, element)| shorted(network, element)),
    );
    list
}

fn on_one_node(port: Port) -> bool {
    port.from == port.to
}

fn idle(network: &Network, element: &Element) -> Option<String> {
    let port = element.port()?;
    if !on_one_node(port) || element.forced_current().is_some() {
        return None;
    }
    let name = &element.name;
    let node = &network.node(port.from).name;
    Some(if matches!(element.kind, Kind::Inductor(..)) {
        format!(
            "both ends of {name} are connected to node {node}: \
             it only adds a natural frequency at s = 0"
        )
    } else {
        format!("both ends of {name} are connected to node {node}: it does nothing")
    })
}

fn blind(network: &Network, element: &Element) -> Option<Diagnostic> {
    let Kind::Source(source) = &element.kind else {
        return None;
    };
    let pair = source
        .controls
        .iter()
        .filter_map(|control| control.sensed_pair())
        .find(|&pair| on_one_node(pair))?;
    let node = &network.node(pair.from).name;
    let message = format!(
        "{} senses the voltage from node {node} to itself, which is always zero",
        element.name
    );
    Some(Diagnostic::warning(element.place, message))
}

fn shorted(network: &Network, element: &Element) -> Option<Diagnostic> {
    let (Kind::Transformer {
        primary, secondary, ..
    }
    | Kind::Gyrator {
        primary, secondary, ..
    }) = &element.kind
    else {
        return None;
    };
    let (ends, node) = if on_one_node(*primary) {
        ("p1 and p2", primary.from)
    } else if on_one_node(*secondary) {
        ("s1 and s2", secondary.from)
    } else {
        return None;
    };
    let message = format!(
        "{ends} of {} are both connected to node {}",
        part_name(network, element),
        network.node(node).name
    );
    Some(Diagnostic::warning(element.place, message))
}
