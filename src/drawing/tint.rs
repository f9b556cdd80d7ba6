//! Emphasis by the order ledger, with the remarks that say what it means.

use petgraph::unionfind::UnionFind;

use crate::analysis::report::{NetworkOrder, Stored};
use crate::drawing::shape::{Drawing, Label, Role, Tint, width};
use crate::network::{ElementId, Network, NodeId};

/// Tints symbols and wires and writes the remarks.
pub(super) fn tint(drawing: &mut Drawing, network: &Network, order: &NetworkOrder) {
    let mut notes = Vec::new();
    for coupling in network.couplings() {
        let [first, second] = [coupling.first, coupling.second].map(|it| &network.element(it).name);
        notes.push((
            format!("{}: {first} and {second} are coupled", coupling.name),
            Role::Note,
        ));
    }
    for members in &order.capacitor_loops {
        mark(drawing, members, Tint::Loop);
        notes.push((
            format!(
                "{} form a loop, which takes one state away",
                names(network, members)
            ),
            Role::Tinted(Tint::Loop),
        ));
    }
    for set in &order.static_sets {
        mark(drawing, &set.members, Tint::Static);
        let what = match set.stored {
            Stored::Charge => {
                trapped(drawing, network, &set.members);
                "charge stays on"
            }
            Stored::Flux => "flux stays in",
        };
        notes.push((
            format!("{what} {}", names(network, &set.members)),
            Role::Tinted(Tint::Static),
        ));
    }
    for (text, role) in notes {
        drawing.width = drawing.width.max(width(&text) + 48);
        drawing.labels.push(Label {
            text,
            at: (24, drawing.height),
            starts: true,
            role,
        });
        drawing.height += 20;
    }
}

fn names(network: &Network, members: &[ElementId]) -> String {
    let list: Vec<&str> = members
        .iter()
        .map(|id| network.element(*id).name.as_str())
        .collect();
    list.join(", ")
}

fn mark(drawing: &mut Drawing, members: &[ElementId], tint: Tint) {
    for symbol in &mut drawing.symbols {
        if symbol.elements.iter().any(|id| members.contains(id)) {
            symbol.tint = Some(tint);
        }
    }
}

/// The nodes that the members cut off from ground keep the charge.
fn trapped(drawing: &mut Drawing, network: &Network, members: &[ElementId]) {
    let mut sets = UnionFind::<usize>::new(network.node_count());
    for (id, element) in network.elements() {
        if let Some(port) = element.port().filter(|_| !members.contains(&id)) {
            sets.union(port.from.index(), port.to.index());
        }
    }
    for device in network.devices() {
        for (_, node) in &device.terminals {
            sets.union(device.terminals[0].1.index(), node.index());
        }
    }
    let ground = sets.find(NodeId::GROUND.index());
    let cut: Vec<usize> = members
        .iter()
        .filter_map(|id| network.element(*id).port())
        .flat_map(|port| [port.from, port.to])
        .map(|node| sets.find(node.index()))
        .filter(|set| *set != ground)
        .collect();
    for wire in &mut drawing.wires {
        if cut.contains(&sets.find(wire.node.index())) {
            wire.tint = Some(Tint::Static);
        }
    }
}
