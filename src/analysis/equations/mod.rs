//! The untouched equations of a network at one point: every branch with its own current, Kirchhoff's
//! current law at every node, one equation for every branch. Shares nothing with the determinants.
//!
//! Unknowns: node voltages (reference left out), then one current for each branch. All arithmetic is
//! modulo the prime 2^61 − 1.

mod elimination;
pub(crate) mod point;
mod residue;

pub(crate) use elimination::solve;
pub(crate) use residue::Residue;

use std::collections::BTreeMap;

use crate::algebra::Rational;
use crate::network::{
    Combination, DriveId, ElementId, Kind, Network, NodeId, Port, Probe, Quantity, Sense, Source,
    Strength, Value,
};

/// What the equations need to know of a point.
pub(crate) trait At {
    /// Numerator and denominator of a value.
    fn value(&self, value: &Value) -> (Residue, Residue);
    /// Mutual inductance of a coupling that is given by its factor.
    fn mutual(&self, coupling: usize) -> Residue;
    /// The complex frequency.
    fn s(&self) -> Residue;
    /// Coefficients of a source over one common denominator: the values, and it.
    fn row(&self, values: &[Value]) -> (Vec<Residue>, Residue);
}

/// Which network the equations are of.
#[derive(Clone, Debug, Default)]
pub(crate) struct Shape {
    /// Parts taken out.
    pub(crate) without: Vec<ElementId>,
    /// A voltage source of value 1 across a port, as the last branch.
    pub(crate) probe_source: Option<Port>,
    /// Parts whose gain is zero.
    pub(crate) quiet: Vec<ElementId>,
    /// Node pairs that tie islands together.
    pub(crate) ports: Vec<Port>,
}

/// Sparse rows over the unknowns.
pub(crate) type Rows = Vec<BTreeMap<usize, Residue>>;

/// The equations at a point: `rows · x = 0`, excitations apart.
pub(crate) struct Equations<'a> {
    network: &'a Network,
    /// Rows: current law of nodes 1 …, then branches.
    pub(crate) rows: Rows,
    /// Row and factor of each source's own equation, for excitations.
    source_rows: BTreeMap<ElementId, (usize, Residue)>,
    /// Unknown of the current of a part with two ends.
    current: BTreeMap<ElementId, usize>,
    probe_current: Option<usize>,
    probe_row: Option<usize>,
}

impl<'a> Equations<'a> {
    /// Writes the equations down.
    pub(crate) fn new(network: &'a Network, shape: &Shape, at: &dyn At) -> Self {
        let nodes = network.node_count() - 1;
        let mut equations = Self {
            network,
            rows: vec![BTreeMap::new(); nodes],
            source_rows: BTreeMap::new(),
            current: BTreeMap::new(),
            probe_current: None,
            probe_row: None,
        };
        equations.reserve_currents(shape);
        for (id, _) in network.elements() {
            if shape.without.contains(&id) {
                continue;
            }
            equations.element(id, shape, at);
        }
        if let Some(port) = shape.probe_source {
            let (current, row) = equations.branch(port);
            equations.voltage(row, port, Residue::ONE);
            equations.probe_current = Some(current);
            equations.probe_row = Some(row);
        }
        equations.tie_islands(shape);
        equations
    }

    fn voltage_index(node: NodeId) -> Option<usize> {
        node.index().checked_sub(1)
    }

    fn add(&mut self, row: usize, column: usize, value: Residue) {
        if value.is_zero() {
            return;
        }
        let entry = self.rows[row].entry(column).or_insert(Residue::ZERO);
        *entry = entry.add(value);
        if entry.is_zero() {
            self.rows[row].remove(&column);
        }
    }

    /// value · v(port) into a row.
    fn voltage(&mut self, row: usize, port: Port, value: Residue) {
        if let Some(column) = Self::voltage_index(port.from) {
            self.add(row, column, value);
        }
        if let Some(column) = Self::voltage_index(port.to) {
            self.add(row, column, value.neg());
        }
    }

    /// The current of a branch enters the current laws of its ends.
    fn inject(&mut self, port: Port, column: usize) {
        if let Some(row) = Self::voltage_index(port.from) {
            self.add(row, column, Residue::ONE);
        }
        if let Some(row) = Self::voltage_index(port.to) {
            self.add(row, column, Residue::ONE.neg());
        }
    }

    /// A new branch: its current and its row, which have one number.
    fn branch(&mut self, port: Port) -> (usize, usize) {
        self.rows.push(BTreeMap::new());
        let index = self.rows.len() - 1;
        self.inject(port, index);
        (index, index)
    }

    /// Branches of parts with two ends come first, so that controls can name them.
    fn reserve_currents(&mut self, shape: &Shape) {
        for (id, element) in self.network.elements() {
            if shape.without.contains(&id) {
                continue;
            }
            if let Some(port) = element.port() {
                let (current, _) = self.branch(port);
                self.current.insert(id, current);
            }
        }
    }

    fn element(&mut self, id: ElementId, shape: &Shape, at: &dyn At) {
        let element = self.network.element(id);
        let quiet = shape.quiet.contains(&id);
        match &element.kind {
            Kind::Resistor(port, value) | Kind::Impedance(port, value) => {
                let (above, below) = at.value(value);
                self.passive(id, *port, below, above);
            }
            Kind::Conductance(port, value) | Kind::Admittance(port, value) => {
                let (above, below) = at.value(value);
                self.passive(id, *port, above, below);
            }
            Kind::Capacitor(port, value) => {
                let (above, below) = at.value(value);
                self.passive(id, *port, above.mul(at.s()), below);
            }
            Kind::Inductor(port, value) => self.inductor(id, *port, value, at),
            Kind::Meter(port) => {
                let row = self.current[&id];
                self.voltage(row, *port, Residue::ONE);
            }
            Kind::Source(source) => self.source(id, source, quiet, at),
            Kind::Amplifier {
                input,
                output,
                gain,
                rout,
            } => {
                let (current, row) = self.branch(*output);
                let Some(gain) = gain else {
                    self.voltage(row, *input, Residue::ONE);
                    return;
                };
                let (above, below) = at.value(gain);
                let (r, r_below) = rout
                    .as_ref()
                    .map_or((Residue::ZERO, Residue::ONE), |value| at.value(value));
                self.voltage(row, *output, below.mul(r_below));
                if !quiet {
                    self.voltage(row, *input, above.mul(r_below).neg());
                }
                self.add(row, current, below.mul(r).neg());
            }
            Kind::Nullor { input, output } => {
                let (_, row) = self.branch(*output);
                self.voltage(row, *input, Residue::ONE);
            }
            Kind::Conveyor {
                x,
                y,
                z,
                reference,
                polarity,
            } => {
                let into = |node| Port {
                    from: node,
                    to: *reference,
                };
                let (current_x, row_x) = self.branch(into(*x));
                let (current_z, row_z) = self.branch(into(*z));
                self.voltage(row_x, Port { from: *x, to: *y }, Residue::ONE);
                let (above, below) = at.value(polarity);
                self.add(row_z, current_z, below);
                if !quiet {
                    self.add(row_z, current_x, above.neg());
                }
            }
            Kind::Transformer {
                primary,
                secondary,
                ratio,
            } => {
                let (above, below) = at.value(ratio);
                let (current_p, row_p) = self.branch(*primary);
                let (current_s, row_s) = self.branch(*secondary);
                self.voltage(row_p, *primary, below);
                self.voltage(row_p, *secondary, above.neg());
                self.add(row_s, current_s, below);
                self.add(row_s, current_p, above);
            }
            Kind::Gyrator {
                primary,
                secondary,
                g,
            } => {
                let (above, below) = at.value(g);
                let (current_p, row_p) = self.branch(*primary);
                let (current_s, row_s) = self.branch(*secondary);
                self.add(row_p, current_p, below);
                self.voltage(row_p, *secondary, above.neg());
                self.add(row_s, current_s, below);
                self.voltage(row_s, *primary, above);
            }
        }
    }

    /// y·v = z·i
    fn passive(&mut self, id: ElementId, port: Port, y: Residue, z: Residue) {
        let index = self.current[&id];
        self.voltage(index, port, y);
        self.add(index, index, z.neg());
    }

    fn inductor(&mut self, id: ElementId, port: Port, value: &Value, at: &dyn At) {
        let index = self.current[&id];
        let (above, below) = at.value(value);
        let mut terms = Vec::new();
        let mut clear = below;
        for (number, coupling) in self.network.couplings().iter().enumerate() {
            let other = if coupling.first == id {
                coupling.second
            } else if coupling.second == id {
                coupling.first
            } else {
                continue;
            };
            let Some(&current) = self.current.get(&other) else {
                continue;
            };
            let (m, m_below) = match &coupling.strength {
                Strength::Mutual(value) => at.value(value),
                Strength::Factor(_) => (at.mutual(number), Residue::ONE),
            };
            terms.push((current, m, m_below));
            clear = clear.mul(m_below);
        }
        // The row is multiplied by all denominators; each term by all but its own.
        self.voltage(index, port, clear);
        let without = |own: Residue| clear.mul(own.inverse().unwrap_or(Residue::ZERO));
        self.add(index, index, at.s().mul(above).mul(without(below)).neg());
        for (current, m, m_below) in terms {
            self.add(index, current, at.s().mul(m).mul(without(m_below)).neg());
        }
    }

    fn source(&mut self, id: ElementId, source: &Source, quiet: bool, at: &dyn At) {
        let row = self.current[&id];
        let values: Vec<Value> = source
            .controls
            .iter()
            .map(|control| control.value.clone())
            .chain(source.drives.iter().map(|follow| follow.value.clone()))
            .collect();
        let (coefficients, common) = at.row(&values);
        match source.quantity {
            Quantity::Voltage => self.voltage(row, source.port, common),
            Quantity::Current => self.add(row, row, common),
        }
        for (control, coefficient) in source.controls.iter().zip(coefficients) {
            if quiet && control.gain {
                continue;
            }
            let value = Residue::rational(&control.factor).mul(coefficient).neg();
            match control.sense {
                Sense::Voltage(port) => self.voltage(row, port, value),
                Sense::Current(of) => {
                    if let Some(&current) = self.current.get(&of) {
                        self.add(row, current, value);
                    }
                }
            }
        }
        self.source_rows.insert(id, (row, common));
    }

    /// The transposed equations.
    pub(crate) fn transposed(&self) -> Rows {
        let mut rows: Rows = vec![BTreeMap::new(); self.rows.len()];
        for (row, entries) in self.rows.iter().enumerate() {
            for (&column, &value) in entries {
                rows[column].insert(row, value);
            }
        }
        rows
    }

    /// The number of a part's row and current, and its voltage in a solution.
    pub(crate) fn branch_of(
        &self,
        id: ElementId,
        solution: &[Residue],
    ) -> Option<(usize, Residue)> {
        let port = self.network.element(id).port()?;
        let at =
            |node: NodeId| Self::voltage_index(node).map_or(Residue::ZERO, |index| solution[index]);
        Some((*self.current.get(&id)?, at(port.from).sub(at(port.to))))
    }

    /// The right side for a drive of value 1.
    pub(crate) fn drive(&self, drive: DriveId, at: &dyn At) -> Vec<Residue> {
        let mut right = vec![Residue::ZERO; self.rows.len()];
        for (id, &(row, _)) in &self.source_rows {
            let Kind::Source(source) = &self.network.element(*id).kind else {
                continue;
            };
            let values: Vec<Value> = source
                .controls
                .iter()
                .map(|control| control.value.clone())
                .chain(source.drives.iter().map(|follow| follow.value.clone()))
                .collect();
            let (coefficients, _) = at.row(&values);
            for (index, follow) in source.drives.iter().enumerate() {
                if follow.drive == drive {
                    let coefficient = coefficients[source.controls.len() + index];
                    let value = Residue::rational(&follow.factor).mul(coefficient);
                    right[row] = right[row].add(value);
                }
            }
        }
        right
    }

    /// The right side for a current of 1 into the first node of a port and out of the second.
    pub(crate) fn current_into(&self, port: Port) -> Vec<Residue> {
        let mut right = vec![Residue::ZERO; self.rows.len()];
        if let Some(row) = Self::voltage_index(port.from) {
            right[row] = Residue::ONE;
        }
        if let Some(row) = Self::voltage_index(port.to) {
            right[row] = Residue::ONE.neg();
        }
        right
    }

    /// The right side for the source of value 1 across the port, and the current it delivers.
    pub(crate) fn probe(&self) -> Option<(Vec<Residue>, usize)> {
        let mut right = vec![Residue::ZERO; self.rows.len()];
        right[self.probe_row?] = Residue::ONE;
        Some((right, self.probe_current?))
    }

    /// The coefficients of a response over the unknowns.
    pub(crate) fn response(
        &self,
        combination: &Combination,
        value: &dyn Fn(&crate::algebra::Fraction) -> Option<Residue>,
    ) -> Option<Vec<Residue>> {
        let mut row = vec![Residue::ZERO; self.rows.len()];
        for (coefficient, probe) in &combination.terms {
            let weight = value(coefficient)?;
            match probe {
                Probe::Voltage(port) => {
                    if let Some(column) = Self::voltage_index(port.from) {
                        row[column] = row[column].add(weight);
                    }
                    if let Some(column) = Self::voltage_index(port.to) {
                        row[column] = row[column].sub(weight);
                    }
                }
                Probe::Current(of) => {
                    if let Some(&column) = self.current.get(of) {
                        row[column] = row[column].add(weight);
                    }
                }
            }
        }
        Some(row)
    }

    /// Sub-networks that nothing ties to the reference have one node held at zero.
    fn tie_islands(&mut self, shape: &Shape) {
        let count = self.rows.len();
        let nodes = self.network.node_count() - 1;
        // Node and branch unknowns that meet in an entry belong together; node 0 is `count`.
        let mut parent: Vec<usize> = (0..=count).collect();
        fn find(parent: &mut [usize], mut at: usize) -> usize {
            while parent[at] != at {
                parent[at] = parent[parent[at]];
                at = parent[at];
            }
            at
        }
        let index = |node: NodeId| Self::voltage_index(node).unwrap_or(count);
        let mut pairs: Vec<(usize, usize)> = Vec::new();
        for (id, element) in self.network.elements() {
            if shape.without.contains(&id) {
                continue;
            }
            let mut ends = Vec::new();
            let mut both = |port: Port| ends.extend([index(port.from), index(port.to)]);
            match &element.kind {
                Kind::Source(source) => {
                    let driven = source.quantity == Quantity::Voltage
                        || !source.controls.is_empty()
                        || shape.quiet.contains(&id);
                    if driven {
                        both(source.port);
                        for control in &source.controls {
                            match control.sense {
                                Sense::Voltage(port) => both(port),
                                Sense::Current(of) => {
                                    if let Some(port) = self.network.element(of).port() {
                                        both(port);
                                    }
                                }
                            }
                        }
                    }
                }
                Kind::Amplifier { input, output, .. } | Kind::Nullor { input, output } => {
                    both(*input);
                    both(*output);
                }
                Kind::Conveyor {
                    x, y, z, reference, ..
                } => {
                    both(Port { from: *x, to: *y });
                    both(Port {
                        from: *z,
                        to: *reference,
                    });
                    both(Port { from: *x, to: *z });
                }
                Kind::Transformer {
                    primary, secondary, ..
                }
                | Kind::Gyrator {
                    primary, secondary, ..
                } => {
                    both(*primary);
                    both(*secondary);
                }
                Kind::Resistor(port, _)
                | Kind::Conductance(port, _)
                | Kind::Capacitor(port, _)
                | Kind::Inductor(port, _)
                | Kind::Impedance(port, _)
                | Kind::Admittance(port, _)
                | Kind::Meter(port) => both(*port),
            }
            pairs.extend(ends.iter().skip(1).map(|&end| (ends[0], end)));
        }
        for coupling in self.network.couplings() {
            let ports = [coupling.first, coupling.second].map(|id| self.network.element(id).port());
            if let [Some(a), Some(b)] = ports {
                pairs.push((index(a.from), index(b.from)));
            }
        }
        pairs.extend(
            shape
                .ports
                .iter()
                .map(|port| (index(port.from), index(port.to))),
        );
        for (a, b) in pairs {
            let (a, b) = (find(&mut parent, a), find(&mut parent, b));
            parent[a] = b;
        }
        for node in 0..nodes {
            let (own, reference) = (find(&mut parent, node), find(&mut parent, count));
            if own != reference {
                parent[own] = reference;
                self.rows.push(BTreeMap::new());
                let extra = self.rows.len() - 1;
                self.add(node, extra, Residue::ONE);
                self.add(extra, node, Residue::ONE);
            }
        }
    }
}

/// A rational number as a residue.
pub(crate) fn residue(value: &Rational) -> Residue {
    Residue::rational(value)
}
