//! What is to be drawn: symbols with pins to both sides, and branches that hang to ground.

use std::collections::BTreeSet;

use crate::drawing::nominal::nominal;
use crate::drawing::symbol::Glyph;
use crate::network::{
    Ask, Device, DeviceId, Element, ElementId, Kind, Network, NodeId, Port, Probe, Quantity, Value,
};

/// Where a wire leaves a symbol.
#[derive(Clone, Copy, Debug)]
pub(super) struct Pin {
    pub(super) node: NodeId,
    pub(super) left: bool,
    /// Height above (negative) or below the middle.
    pub(super) height: i32,
}

/// A symbol to be placed.
#[derive(Clone, Debug)]
pub(super) struct Item {
    pub(super) name: String,
    pub(super) value: Option<String>,
    pub(super) title: String,
    pub(super) glyph: Glyph,
    pub(super) pins: Vec<Pin>,
    pub(super) elements: Vec<ElementId>,
    /// A part with two ends.
    pub(super) is_lane: bool,
    /// An independent source.
    pub(super) drives: bool,
}

impl Item {
    /// Both ends of a lane.
    pub(super) fn ends(&self) -> (NodeId, NodeId) {
        (self.pins[0].node, self.pins[self.pins.len() - 1].node)
    }
}

/// Parts in series from a node down to ground.
#[derive(Clone, Debug)]
pub(super) struct Branch {
    pub(super) node: NodeId,
    /// Parts from above, each with whether its first end is above.
    pub(super) parts: Vec<(Item, bool)>,
}

/// Longest series that hangs as one branch.
const LONGEST: usize = 3;

/// All that is to be drawn.
#[derive(Clone, Debug)]
pub(super) struct Plan {
    pub(super) items: Vec<Item>,
    pub(super) branches: Vec<Branch>,
    /// Nodes that a source drives against ground.
    pub(super) inputs: BTreeSet<NodeId>,
    /// Nodes a question asks for.
    pub(super) outputs: BTreeSet<NodeId>,
}

impl Plan {
    pub(super) fn new(network: &Network) -> Self {
        let mut plan = Self {
            items: Vec::new(),
            branches: Vec::new(),
            inputs: BTreeSet::new(),
            outputs: outputs(network),
        };
        let mut done: BTreeSet<DeviceId> = BTreeSet::new();
        for (id, element) in network.elements() {
            match element.device {
                Some(device) if is_drawn_whole(network.device(device)) => {
                    if done.insert(device) {
                        plan.items
                            .push(device_item(network, network.device(device)));
                    }
                }
                _ => plan.part(network, id, element),
            }
        }
        plan.join_branches(network);
        plan
    }

    /// Number of symbols.
    pub(super) fn count(&self) -> usize {
        let hanging = self.branches.iter().map(|branch| branch.parts.len());
        self.items.len() + hanging.sum::<usize>()
    }

    fn part(&mut self, network: &Network, id: ElementId, element: &Element) {
        let Some(port) = element.port() else {
            return;
        };
        let item = lane(network, id, element, port);
        let (above, down) = match (port.from, port.to) {
            (NodeId::GROUND, NodeId::GROUND) => return self.items.push(item),
            (NodeId::GROUND, node) => (node, false),
            (node, NodeId::GROUND) => (node, true),
            _ => return self.items.push(item),
        };
        if item.drives {
            self.inputs.insert(above);
        }
        self.branches.push(Branch {
            node: above,
            parts: vec![(item, down)],
        });
    }

    /// A node without a name between a lane and a branch is no column: the lane hangs above.
    fn join_branches(&mut self, network: &Network) {
        loop {
            let mut uses = vec![0_usize; network.node_count()];
            for item in &self.items {
                item.pins.iter().for_each(|pin| uses[pin.node.index()] += 1);
            }
            for branch in &self.branches {
                uses[branch.node.index()] += 1;
            }
            let joint = |branch: &Branch| {
                uses[branch.node.index()] == 2
                    && network.node(branch.node).name.starts_with('(')
                    && !self.outputs.contains(&branch.node)
                    && branch.parts.len() < LONGEST
                    && !branch.parts.iter().any(|(item, _)| item.drives)
            };
            let found = self
                .branches
                .iter()
                .enumerate()
                .find_map(|(index, branch)| {
                    let lane = self.items.iter().position(|item| {
                        let (from, to) = item.ends();
                        item.is_lane && from != to && (from == branch.node || to == branch.node)
                    });
                    lane.filter(|_| joint(branch)).map(|lane| (index, lane))
                });
            let Some((index, lane)) = found else {
                return;
            };
            let item = self.items.remove(lane);
            let (from, to) = item.ends();
            let branch = &mut self.branches[index];
            let down = to == branch.node;
            branch.node = if down { from } else { to };
            branch.parts.insert(0, (item, down));
        }
    }
}

fn outputs(network: &Network) -> BTreeSet<NodeId> {
    let mut list = BTreeSet::new();
    for question in network.questions() {
        let responses = match &question.ask {
            Ask::Transfer { response, .. } => vec![response],
            Ask::Ratio { upper, lower, .. } => vec![upper, lower],
            _ => Vec::new(),
        };
        for (_, probe) in responses.iter().flat_map(|it| &it.terms) {
            if let Probe::Voltage(port) = probe {
                list.extend([port.from, port.to]);
            }
        }
    }
    list.remove(&NodeId::GROUND);
    list
}

fn lane(network: &Network, id: ElementId, element: &Element, port: Port) -> Item {
    let coupled = || {
        let mut couplings = network.couplings().iter();
        couplings.any(|it| it.first == id || it.second == id)
    };
    let glyph = match &element.kind {
        Kind::Capacitor(..) => Glyph::Capacitor,
        Kind::Inductor(..) => Glyph::Inductor { coupled: coupled() },
        Kind::Impedance(..) => Glyph::Letter("Z"),
        Kind::Admittance(..) => Glyph::Letter("Y"),
        Kind::Conductance(..) => Glyph::Letter("G"),
        Kind::Meter(_) => Glyph::Meter,
        Kind::Source(source) => Glyph::Source {
            voltage: source.quantity == Quantity::Voltage,
            controlled: !source.controls.is_empty(),
        },
        _ => Glyph::Resistor,
    };
    let value = element.value().and_then(|value| nominal(network, value));
    let relation = element.value().and_then(|value| match value {
        Value::Symbol(symbol) => network.set_by(*symbol),
        Value::Number(_) => None,
    });
    let detail = value
        .clone()
        .or_else(|| relation.map(|id| network.relation(id).text.clone()));
    Item {
        title: match detail {
            Some(detail) => format!("{}: {detail}", element.name),
            None => element.name.clone(),
        },
        name: element.name.clone(),
        value,
        glyph,
        pins: [(port.from, true), (port.to, false)]
            .map(|(node, left)| Pin {
                node,
                left,
                height: 0,
            })
            .to_vec(),
        elements: vec![id],
        is_lane: true,
        drives: element.independent_source().is_some(),
    }
}

fn is_drawn_whole(device: &Device) -> bool {
    !device.terminals.is_empty()
}

fn device_item(network: &Network, device: &Device) -> Item {
    let (glyph, sides): (Glyph, &[(&str, bool, i32)]) = match device.kind {
        "opamp" => (
            Glyph::Amplifier { inputs: 2 },
            &[("-", true, -20), ("+", true, 20), ("out", false, 0)],
        ),
        "buffer" => (
            Glyph::Amplifier { inputs: 1 },
            &[("in", true, 0), ("out", false, 0)],
        ),
        "bjt" => (
            Glyph::Bipolar,
            &[("b", true, 0), ("c", false, -20), ("e", false, 20)],
        ),
        "fet" => (
            Glyph::FieldEffect,
            &[("g", true, 0), ("d", false, -20), ("s", false, 20)],
        ),
        "triode" => (
            Glyph::Triode,
            &[("g", true, 0), ("a", false, -20), ("k", false, 20)],
        ),
        "transformer" => (
            Glyph::Transformer,
            &[
                ("p1", true, -20),
                ("p2", true, 20),
                ("s1", false, -20),
                ("s2", false, 20),
            ],
        ),
        "gyrator" => (
            Glyph::Box(30, "gyrator"),
            &[
                ("p1", true, -20),
                ("p2", true, 20),
                ("s1", false, -20),
                ("s2", false, 20),
            ],
        ),
        "nullor" => (
            Glyph::Box(30, "nullor"),
            &[
                ("+", true, -20),
                ("-", true, 20),
                ("p", false, -20),
                ("q", false, 20),
            ],
        ),
        "conveyor" => (
            Glyph::Box(30, "y x → z"),
            &[("y", true, -20), ("x", true, 20), ("z", false, 0)],
        ),
        "transconductor" => (
            Glyph::Box(30, "+ − gm"),
            &[("+", true, -20), ("-", true, 20), ("out", false, 0)],
        ),
        _ => (
            Glyph::Box(30, "+ − gain"),
            &[
                ("+", true, -20),
                ("-", true, 20),
                ("out+", false, -20),
                ("out-", false, 20),
            ],
        ),
    };
    let node = |name: &str| {
        let found = device
            .terminals
            .iter()
            .find(|(terminal, _)| terminal == name);
        found.map_or(NodeId::GROUND, |(_, node)| *node)
    };
    let mut pins: Vec<Pin> = sides
        .iter()
        .map(|&(name, left, height)| Pin {
            node: node(name),
            left,
            height,
        })
        .collect();
    let mut glyph = glyph;
    // A further terminal is drawn where it is not where it stands by default.
    let further = match device.kind {
        "fet" => ("b", node("s")),
        "diffamp" => ("cm", NodeId::GROUND),
        _ => ("ref", NodeId::GROUND),
    };
    let extra = device
        .terminals
        .iter()
        .find(|(name, node)| name == further.0 && *node != further.1);
    if let Some((_, node)) = extra {
        pins.push(Pin {
            node: *node,
            left: false,
            height: 60,
        });
        glyph = Glyph::Box(70, kind_sign(device.kind));
    }
    let inner: Vec<&str> = device
        .elements
        .iter()
        .map(|id| network.element(*id).name.as_str())
        .filter(|name| *name != device.name)
        .collect();
    Item {
        name: device.name.clone(),
        value: None,
        title: if inner.is_empty() {
            format!("{}: {}", device.name, device.kind)
        } else {
            format!("{}: {} with {}", device.name, device.kind, inner.join(", "))
        },
        glyph,
        pins,
        elements: device.elements.clone(),
        is_lane: false,
        drives: false,
    }
}

fn kind_sign(kind: &'static str) -> &'static str {
    match kind {
        "opamp" => "− + opamp",
        other => other,
    }
}
