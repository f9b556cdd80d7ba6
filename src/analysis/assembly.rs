//! A network as blocks: one for each part, private nodes for drives and sensed currents.

use std::collections::{BTreeMap, BTreeSet};

use petgraph::unionfind::UnionFind;

use crate::algebra::Rational;
use crate::analysis::block::{Atom, Block, Choice, Edge, Slot, Term, Weight, source};
use crate::analysis::setup::{Frame, Insertion};
use crate::network::{
    Element, ElementId, Kind, Network, NodeId, Origin, Port, Probe, Quantity, Sense, Source,
    Strength, Value,
};

/// Blocks over numbered nodes.
#[derive(Clone, Debug)]
pub(crate) struct Assembly {
    /// Number of nodes, the reference included.
    pub(crate) nodes: u32,
    /// Blocks.
    pub(crate) blocks: Vec<Block>,
    /// What weights are made of.
    pub(crate) slots: Vec<Slot>,
}

struct Builder<'a> {
    network: &'a Network,
    frame: &'a Frame,
    insertion: &'a Insertion,
    nodes: u32,
    /// Private node that carries a sensed current as a voltage.
    current_node: BTreeMap<ElementId, u32>,
    drive_node: Option<u32>,
    blocks: Vec<Block>,
    slots: Vec<Slot>,
    value_slot: BTreeMap<String, usize>,
}

/// Takes the network apart into blocks.
pub(crate) fn assemble(network: &Network, frame: &Frame, insertion: &Insertion) -> Assembly {
    let mut builder = Builder {
        network,
        frame,
        insertion,
        nodes: u32::try_from(network.node_count()).unwrap_or(u32::MAX),
        current_node: BTreeMap::new(),
        drive_node: None,
        blocks: Vec::new(),
        slots: Vec::new(),
        value_slot: BTreeMap::new(),
    };
    if frame.drive.is_some() {
        builder.drive_node = Some(builder.private_node());
    }
    for element in builder.sensed_elements() {
        let node = builder.private_node();
        builder.current_node.insert(element, node);
    }
    for (id, element) in network.elements() {
        if !frame.without.contains(&id) {
            builder.element(id, element);
        }
    }
    builder.insert();
    builder.tie_islands();
    Assembly {
        nodes: builder.nodes,
        blocks: builder.blocks,
        slots: builder.slots,
    }
}

fn node(id: NodeId) -> u32 {
    u32::try_from(id.index()).unwrap_or(u32::MAX)
}

fn edge(port: Port) -> Edge {
    (node(port.from), node(port.to))
}

impl Builder<'_> {
    fn private_node(&mut self) -> u32 {
        self.nodes += 1;
        self.nodes - 1
    }

    /// Parts whose current is needed: by controlled sources, couplings and responses.
    fn sensed_elements(&self) -> BTreeSet<ElementId> {
        let mut sensed = self.frame.sensed.clone();
        for (id, element) in self.network.elements() {
            if self.frame.without.contains(&id) {
                continue;
            }
            if let Kind::Source(source) = &element.kind {
                for control in &source.controls {
                    if let Sense::Current(of) = control.sense {
                        sensed.insert(of);
                    }
                }
            }
        }
        for coupling in self.network.couplings() {
            sensed.extend([coupling.first, coupling.second]);
        }
        sensed.retain(|id| !self.frame.without.contains(id));
        sensed
    }

    fn slot(&mut self, value: &Value) -> usize {
        let key = format!("{value:?}");
        if let Some(&slot) = self.value_slot.get(&key) {
            return slot;
        }
        self.slots.push(Slot::Value(value.clone()));
        self.value_slot.insert(key, self.slots.len() - 1);
        self.slots.len() - 1
    }

    /// The edge a part with two ends stands on; a sensed part moves behind a meter.
    fn behind_meter(&mut self, id: ElementId, port: Port) -> Edge {
        let (from, to) = edge(port);
        let Some(&carrier) = self.current_node.get(&id) else {
            return (from, to);
        };
        let inner = self.private_node();
        // K = [0 0; 1 0], P = 1: the voltage of the carrier is the current of the meter.
        let edges = [(from, inner), (carrier, 0)];
        self.blocks.push(
            Block::new(Some(id), edges, edges)
                .choice([0, 1], [0, 1], Weight::of([]))
                .choice([1], [0], Weight::of([]).negated()),
        );
        (inner, to)
    }

    fn element(&mut self, id: ElementId, element: &Element) {
        use Atom::{Above, Below, S};
        match &element.kind {
            Kind::Resistor(port, value) | Kind::Impedance(port, value) => {
                let slot = self.slot(value);
                self.two_ends(id, *port, [Above(slot)], [Below(slot)]);
            }
            Kind::Conductance(port, value) | Kind::Admittance(port, value) => {
                let slot = self.slot(value);
                self.two_ends(id, *port, [Below(slot)], [Above(slot)]);
            }
            Kind::Capacitor(port, value) => {
                let slot = self.slot(value);
                self.two_ends(id, *port, [Below(slot)], [Above(slot), S]);
            }
            Kind::Inductor(port, value) => self.inductor(id, *port, value),
            Kind::Meter(port) => {
                let edge = self.behind_meter(id, *port);
                self.blocks.push(Block::join(Some(id), edge));
            }
            Kind::Source(source) => self.source(id, source),
            Kind::Amplifier {
                input,
                output,
                gain,
                rout,
            } => self.amplifier(id, *input, *output, gain.as_ref(), rout.as_ref()),
            Kind::Nullor { input, output } => {
                self.blocks.push(
                    Block::new(Some(id), [edge(*output)], [edge(*input)]).choice(
                        [0],
                        [0],
                        Weight::of([]),
                    ),
                );
            }
            Kind::Conveyor {
                x,
                y,
                z,
                reference,
                polarity,
            } => {
                let slot = self.slot(polarity);
                let reference = node(*reference);
                let edges = [(node(*x), reference), (node(*z), reference)];
                let mut block = Block::new(Some(id), edges, [(node(*x), node(*y))]).choice(
                    [0],
                    [0],
                    Weight::of([Below(slot)]),
                );
                if !self.is_quiet(id) {
                    block = block.choice([1], [0], Weight::of([Above(slot)]));
                }
                self.blocks.push(block);
            }
            Kind::Transformer {
                primary,
                secondary,
                ratio,
            } => {
                let slot = self.slot(ratio);
                let edges = [edge(*primary), edge(*secondary)];
                let across = || Weight::of([Above(slot), Below(slot)]).negated();
                self.blocks.push(
                    Block::new(Some(id), edges, edges)
                        .choice([0], [0], Weight::of([Below(slot), Below(slot)]))
                        .choice([0], [1], across())
                        .choice([1], [0], across())
                        .choice([1], [1], Weight::of([Above(slot), Above(slot)])),
                );
            }
            Kind::Gyrator {
                primary,
                secondary,
                g,
            } => {
                let slot = self.slot(g);
                let edges = [edge(*primary), edge(*secondary)];
                let across = || Weight::of([Above(slot), Below(slot)]);
                self.blocks.push(
                    Block::new(Some(id), edges, edges)
                        .choice([], [], Weight::of([Below(slot), Below(slot)]))
                        .choice([0], [1], across())
                        .choice([1], [0], across().negated())
                        .choice([0, 1], [0, 1], Weight::of([Above(slot), Above(slot)])),
                );
            }
        }
    }

    /// z·i = y·v
    fn two_ends<const Z: usize, const Y: usize>(
        &mut self,
        id: ElementId,
        port: Port,
        z: [Atom; Z],
        y: [Atom; Y],
    ) {
        let edge = self.behind_meter(id, port);
        self.blocks.push(
            Block::new(Some(id), [edge], [edge])
                .choice([], [], Weight::of(z))
                .choice([0], [0], Weight::of(y)),
        );
    }

    /// v = s·L·i + Σ s·M·i′: the mutual terms are a controlled voltage source in series.
    fn inductor(&mut self, id: ElementId, port: Port, value: &Value) {
        let slot = self.slot(value);
        let mut mutual = Vec::new();
        for (index, coupling) in self.network.couplings().iter().enumerate() {
            let other = if coupling.first == id {
                coupling.second
            } else if coupling.second == id {
                coupling.first
            } else {
                continue;
            };
            if let Some(&carrier) = self.current_node.get(&other) {
                mutual.push((index, carrier));
            }
        }
        let (from, to) = self.behind_meter(id, port);
        let mut end = to;
        if !mutual.is_empty() {
            end = self.private_node();
            let terms: Vec<Term> = mutual
                .into_iter()
                .map(|(index, carrier)| Term {
                    factor: Rational::one(),
                    slot: self.mutual_slot(index),
                    edge: (carrier, 0),
                    rate: true,
                    alive: true,
                    shared: false,
                })
                .collect();
            self.blocks.push(source(Some(id), true, (end, to), &terms));
        }
        self.blocks.push(
            Block::new(Some(id), [(from, end)], [(from, end)])
                .choice([], [], Weight::of([Atom::Above(slot), Atom::S]))
                .choice([0], [0], Weight::of([Atom::Below(slot)])),
        );
    }

    fn mutual_slot(&mut self, index: usize) -> usize {
        let wanted = match &self.network.couplings()[index].strength {
            Strength::Mutual(value) => return self.slot(&value.clone()),
            Strength::Factor(_) => Slot::Mutual(index),
        };
        if let Some(found) = self.slots.iter().position(|slot| *slot == wanted) {
            return found;
        }
        self.slots.push(wanted);
        self.slots.len() - 1
    }

    fn is_quiet(&self, id: ElementId) -> bool {
        matches!(self.insertion, Insertion::Quiet(parts) if parts.contains(&id))
    }

    fn source(&mut self, id: ElementId, from: &Source) {
        let is_voltage = from.quantity == Quantity::Voltage;
        let mut terms = Vec::new();
        for control in &from.controls {
            let sensed = match control.sense {
                Sense::Voltage(port) => edge(port),
                Sense::Current(of) => match self.current_node.get(&of) {
                    Some(&carrier) => (carrier, 0),
                    None => continue,
                },
            };
            terms.push(Term {
                factor: control.factor.clone(),
                slot: self.slot(&control.value),
                edge: sensed,
                rate: false,
                alive: !(control.gain && self.is_quiet(id)),
                shared: self.is_coefficient(&control.value),
            });
        }
        for follow in &from.drives {
            let alive = self.frame.drive == Some(follow.drive);
            terms.push(Term {
                factor: follow.factor.clone(),
                slot: self.slot(&follow.value),
                edge: (self.drive_node.unwrap_or(0), 0),
                rate: false,
                alive: alive && self.drive_node.is_some(),
                shared: self.is_coefficient(&follow.value),
            });
        }
        let place = self.behind_meter(id, from.port);
        self.blocks
            .push(source(Some(id), is_voltage, place, &terms));
    }

    /// Whether a value is a coefficient that a source's own relation sets.
    fn is_coefficient(&self, value: &Value) -> bool {
        match value {
            Value::Symbol(symbol) => self
                .network
                .facts(*symbol)
                .is_some_and(|facts| facts.origin == Origin::Coefficient),
            Value::Number(_) => false,
        }
    }

    fn amplifier(
        &mut self,
        id: ElementId,
        input: Port,
        output: Port,
        gain: Option<&Value>,
        rout: Option<&Value>,
    ) {
        use Atom::{Above, Below};
        let Some(gain) = gain else {
            self.blocks
                .push(Block::new(Some(id), [edge(output)], [edge(input)]).choice(
                    [0],
                    [0],
                    Weight::of([]),
                ));
            return;
        };
        let gain = self.slot(gain);
        let rout = rout.map(|value| self.slot(value));
        let clear = rout.map(Below);
        let mut block = Block::new(Some(id), [edge(output)], [edge(output), edge(input)]);
        if let Some(rout) = rout {
            block = block.choice([], [], Weight::of([Below(gain), Above(rout)]));
        }
        block = block.choice([0], [0], Weight::of([Below(gain)].into_iter().chain(clear)));
        if !self.is_quiet(id) {
            let weight = Weight::of([Above(gain)].into_iter().chain(clear)).negated();
            block = block.choice([0], [1], weight);
        }
        self.blocks.push(block);
    }

    /// The drive's row, or a short, as the last block.
    fn insert(&mut self) {
        if let Some(drive) = self.drive_node {
            let Insertion::Response(response) = self.insertion else {
                self.blocks.push(Block::join(None, (drive, 0)));
                return;
            };
            let mut voltage = Vec::new();
            let mut weights = Vec::new();
            for (coefficient, probe) in &response.terms {
                let sensed = match probe {
                    Probe::Voltage(port) => edge(*port),
                    Probe::Current(of) => match self.current_node.get(of) {
                        Some(&carrier) => (carrier, 0),
                        None => continue,
                    },
                };
                self.slots.push(Slot::Polynomial(coefficient.clone()));
                voltage.push(sensed);
                weights.push(Weight::of([Atom::Above(self.slots.len() - 1)]));
            }
            let mut block = Block::new(None, [(drive, 0)], voltage);
            for (index, weight) in weights.into_iter().enumerate() {
                block = block.choice([0], [index], weight);
            }
            self.blocks.push(block);
        } else if let Insertion::Short(port) = self.insertion {
            self.blocks.push(Block::join(None, edge(*port)));
        }
    }

    /// Sub-networks that nothing ties to the reference float freely; one of their nodes is grounded.
    fn tie_islands(&mut self) {
        let mut sets = UnionFind::<u32>::new(self.nodes as usize);
        for block in &self.blocks {
            let quiet = block.element.is_some_and(|id| self.is_quiet(id));
            let used = |index: usize, pick: fn(&Choice) -> &Vec<usize>| {
                quiet
                    || block
                        .choices
                        .iter()
                        .any(|choice| pick(choice).contains(&index))
            };
            let mut ends: Vec<Edge> = Vec::new();
            for (index, &edge) in block.current.iter().enumerate() {
                if used(index, |choice| &choice.current) {
                    ends.push(edge);
                }
            }
            for (index, &edge) in block.voltage.iter().enumerate() {
                if used(index, |choice| &choice.voltage) {
                    ends.push(edge);
                }
            }
            for &(a, b) in &ends {
                sets.union(a, b);
                sets.union(ends[0].0, a);
            }
        }
        for &port in &self.frame.ports {
            let (a, b) = edge(port);
            sets.union(a, b);
        }
        for node in 1..self.nodes {
            if !sets.equiv(node, 0) {
                sets.union(node, 0);
                self.blocks.push(Block::join(None, (node, 0)));
            }
        }
    }
}
