//! Which unknowns stand in which equation of a network.
//!
//! Full nodal equations; the currents of passive parts are eliminated where nothing senses them.
//! What stands here is never less than what stands in the equations, so unknowns that are too many
//! here are too many there.

use std::collections::{BTreeMap, BTreeSet};

use crate::network::topology::sensed_currents;
use crate::network::{Element, ElementId, Kind, Network, NodeId, Port, Quantity, Sense};

/// An unknown of the nodal equations.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Unknown {
    /// Voltage of a node.
    Voltage(NodeId),
    /// Current of a part.
    Current(ElementId),
    /// Current of the short at a port.
    Short,
}

/// The unknowns, and for each equation the numbers of those that stand in it.
pub(super) struct Pattern<'a> {
    network: &'a Network,
    pub(super) unknowns: Vec<Unknown>,
    pub(super) rows: Vec<Vec<u32>>,
    current: BTreeMap<(ElementId, usize), u32>,
    coupled: BTreeMap<ElementId, Vec<ElementId>>,
}

impl<'a> Pattern<'a> {
    pub(super) fn new(network: &'a Network, without: &[ElementId], short: Option<Port>) -> Self {
        let nodes = network.node_count();
        let mut pattern = Self {
            network,
            unknowns: (1..nodes)
                .map(|node| Unknown::Voltage(NodeId::at(node)))
                .collect(),
            rows: vec![Vec::new(); nodes - 1],
            current: BTreeMap::new(),
            coupled: BTreeMap::new(),
        };
        for coupling in network.couplings() {
            let (first, second) = (coupling.first, coupling.second);
            pattern.coupled.entry(first).or_default().push(second);
            pattern.coupled.entry(second).or_default().push(first);
        }
        let out: BTreeSet<ElementId> = without.iter().copied().collect();
        let parts: Vec<(ElementId, &Element)> = network
            .elements()
            .filter(|(id, _)| !out.contains(id))
            .collect();
        let sensed = sensed_currents(parts.iter().map(|(_, element)| *element));
        let nodal = |id, element: &Element| element.value().is_some() && !sensed.contains(&id);
        for &(id, element) in &parts {
            if !nodal(id, element) {
                pattern.branches(id, element);
            }
        }
        for &(id, element) in &parts {
            if nodal(id, element) {
                pattern.stamp(element);
                pattern.mutual(id);
            } else {
                pattern.law(id, element);
            }
        }
        if let Some(port) = short {
            pattern.shorted(port);
        }
        for row in &mut pattern.rows {
            row.sort_unstable();
            row.dedup();
        }
        pattern
    }

    fn unknown(&mut self, unknown: Unknown) -> u32 {
        self.unknowns.push(unknown);
        u32::try_from(self.unknowns.len() - 1).unwrap_or(u32::MAX)
    }

    /// New unknowns for the currents of a part, entered at its nodes.
    fn branches(&mut self, id: ElementId, element: &Element) {
        for (branch, port) in element.conducting().into_iter().enumerate() {
            let unknown = self.unknown(Unknown::Current(id));
            self.current.insert((id, branch), unknown);
            self.flow(port, unknown);
        }
    }

    fn flow(&mut self, port: Port, unknown: u32) {
        if port.from != port.to {
            for node in [port.from, port.to]
                .into_iter()
                .filter(|&node| node != NodeId::GROUND)
            {
                self.rows[node.index() - 1].push(unknown);
            }
        }
    }

    /// Numbers of the voltages of a node pair.
    fn voltages(port: Port) -> impl Iterator<Item = u32> {
        let ends = [port.from, port.to];
        ends.into_iter()
            .filter(move |&node| port.from != port.to && node != NodeId::GROUND)
            .map(|node| u32::try_from(node.index() - 1).unwrap_or(u32::MAX))
    }

    fn stamp(&mut self, element: &Element) {
        if let Some(port) = element.port() {
            for unknown in Self::voltages(port) {
                self.flow(port, unknown);
            }
        }
    }

    /// The current of a coupled coil depends on the voltages of its partners too; partners of
    /// partners are reached coil by coil, so all coils of a group are entered.
    fn mutual(&mut self, id: ElementId) {
        if !self.coupled.contains_key(&id) {
            return;
        }
        let mut group = BTreeSet::from([id]);
        let mut open = vec![id];
        while let Some(coil) = open.pop() {
            for &partner in self.coupled.get(&coil).into_iter().flatten() {
                if group.insert(partner) {
                    open.push(partner);
                }
            }
        }
        group.remove(&id);
        let port = |coil: ElementId| self.network.element(coil).port();
        let Some(own) = port(id) else { return };
        let others: Vec<Port> = group.iter().filter_map(|&coil| port(coil)).collect();
        let sensed: Vec<u32> = group
            .iter()
            .filter_map(|&coil| self.current.get(&(coil, 0)).copied())
            .collect();
        let voltages = others.into_iter().flat_map(Self::voltages);
        for unknown in voltages.chain(sensed) {
            self.flow(own, unknown);
        }
    }

    fn row(&mut self, ports: &[Port], currents: &[u32]) {
        let mut row: Vec<u32> = ports
            .iter()
            .flat_map(|&port| Self::voltages(port))
            .collect();
        row.extend(currents);
        self.rows.push(row);
    }

    fn law(&mut self, id: ElementId, element: &Element) {
        let [i, j] = [0, 1].map(|branch| self.current.get(&(id, branch)).copied());
        let Some(i) = i else { return };
        match &element.kind {
            Kind::Source(source) => {
                let mut ports = Vec::new();
                let mut currents = Vec::new();
                match source.quantity {
                    Quantity::Voltage => ports.push(source.port),
                    Quantity::Current => currents.push(i),
                }
                for control in source.controls.iter().filter(|control| control.acts()) {
                    match control.sense {
                        Sense::Voltage(port) => ports.push(port),
                        Sense::Current(part) => currents.extend(self.current.get(&(part, 0))),
                    }
                }
                self.row(&ports, &currents);
            }
            Kind::Amplifier {
                input,
                output,
                gain,
                rout,
            } => match gain {
                None => self.row(&[*input], &[]),
                Some(_) => {
                    let current = rout.as_ref().map(|_| i);
                    self.row(&[*input, *output], current.as_slice());
                }
            },
            Kind::Nullor { input, .. } => self.row(&[*input], &[]),
            Kind::Conveyor { x, y, .. } => {
                self.row(&[Port { from: *x, to: *y }], &[]);
                self.row(&[], &[i, j.unwrap_or(i)]);
            }
            Kind::Transformer {
                primary, secondary, ..
            } => {
                self.row(&[*primary, *secondary], &[]);
                self.row(&[], &[i, j.unwrap_or(i)]);
            }
            Kind::Gyrator {
                primary, secondary, ..
            } => {
                self.row(&[*secondary], &[i]);
                self.row(&[*primary], &[j.unwrap_or(i)]);
            }
            Kind::Meter(port) => self.row(&[*port], &[]),
            Kind::Inductor(port, _) => {
                let partners = self.partner_currents(id);
                self.row(&[*port], &[i]);
                if let Some(row) = self.rows.last_mut() {
                    row.extend(partners);
                }
            }
            Kind::Resistor(port, _)
            | Kind::Conductance(port, _)
            | Kind::Capacitor(port, _)
            | Kind::Impedance(port, _)
            | Kind::Admittance(port, _) => self.row(&[*port], &[i]),
        }
    }

    /// What the currents of coupled coils bring into the law of a sensed coil: their voltages.
    fn partner_currents(&self, id: ElementId) -> Vec<u32> {
        let partners = self.coupled.get(&id).into_iter().flatten();
        partners
            .flat_map(|&coil| {
                let own = self.current.get(&(coil, 0)).copied();
                let port = self.network.element(coil).port();
                own.into_iter()
                    .chain(port.into_iter().flat_map(Self::voltages))
            })
            .collect()
    }

    fn shorted(&mut self, port: Port) {
        let unknown = self.unknown(Unknown::Short);
        self.flow(port, unknown);
        self.row(&[port], &[]);
    }
}
