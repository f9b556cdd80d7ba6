//! The equations of a network with its values in symbols: Kirchhoff's current law at every node and
//! one equation for every branch, coefficients rational in s.

use std::collections::BTreeMap;

use crate::algebra::gcd::gcd;
use crate::algebra::{Fraction, Polynomial, Rational, Symbol};
use crate::analysis::solve::Setting;
use crate::analysis::states::row::{Column, Row};
use crate::budget::{Budget, Exceeded};
use crate::network::{
    DriveId, ElementId, Kind, NodeId, Port, Quantity, Sense, Source, Strength, Value,
};

/// What acts on a network from outside.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Acts {
    /// An independent source or a drive.
    Drive(DriveId),
    /// A current into the first node of a port and out of the second.
    CurrentInto(Port),
    /// A voltage source across a port.
    VoltageAcross(Port),
    /// The starting value of a capacitor or inductor: index of the `starts` line.
    Start(usize),
}

/// Which network, and what acts on it.
#[derive(Clone, Debug, Default)]
pub(super) struct Frame {
    /// Parts taken out.
    pub(super) without: Vec<ElementId>,
    /// Inputs, in the order of their columns.
    pub(super) acts: Vec<Acts>,
}

/// An equation `Σ s^k · row_k = 0`, lowest power first.
pub(super) type Powers = Vec<Row>;

/// The equations with what is known of their unknowns.
pub(super) struct Tableau {
    /// One equation for each unknown.
    pub(super) equations: Vec<Powers>,
    /// The part an equation belongs to.
    pub(super) owner: Vec<Option<ElementId>>,
    /// Unknown of the current of a part with two ends.
    pub(super) current: BTreeMap<ElementId, usize>,
    /// Unknown of the current of the source across a port.
    pub(super) probe: Option<usize>,
}

/// One equation while it is written: coefficients may hold s.
type Entries = BTreeMap<Column, Fraction>;

struct Writer<'a> {
    setting: &'a Setting<'a>,
    frame: &'a Frame,
    rows: Vec<Entries>,
    owner: Vec<Option<ElementId>>,
    current: BTreeMap<ElementId, usize>,
}

/// Writes the equations of a network down.
pub(super) fn write(setting: &Setting<'_>, frame: &Frame) -> Result<Tableau, Exceeded> {
    let nodes = setting.network.node_count() - 1;
    let mut writer = Writer {
        setting,
        frame,
        rows: vec![Entries::new(); nodes],
        owner: vec![None; nodes],
        current: BTreeMap::new(),
    };
    let parts: Vec<ElementId> = setting
        .network
        .elements()
        .map(|(id, _)| id)
        .filter(|id| !frame.without.contains(id))
        .collect();
    // Parts with two ends come first, so that controls can name their currents.
    for &id in &parts {
        if let Some(port) = setting.network.element(id).port() {
            let branch = writer.branch(port, Some(id))?;
            writer.current.insert(id, branch);
        }
    }
    for &id in &parts {
        writer.part(id)?;
    }
    let probe = writer.outside()?;
    writer.tie_islands(&parts)?;
    let equations = writer
        .rows
        .iter()
        .map(|entries| powers(entries, setting.budget))
        .collect::<Result<_, _>>()?;
    Ok(Tableau {
        equations,
        owner: writer.owner,
        current: writer.current,
        probe,
    })
}

/// The voltage of a port.
pub(super) fn voltage(port: Port) -> Row {
    let mut row = Row::default();
    for (node, sign) in [(port.from, 1_i64), (port.to, -1)] {
        if let Some(index) = node.index().checked_sub(1) {
            let value = Fraction::from(Rational::from(sign));
            // Both ends at one node cancel.
            let column = Column::Unknown(index);
            if row.0.remove(&column).is_none() {
                row.0.insert(column, value);
            }
        }
    }
    row
}

/// Clears denominators that hold s and sorts by powers of s.
fn powers(entries: &Entries, budget: &Budget) -> Result<Powers, Exceeded> {
    let mut common = Polynomial::one();
    for value in entries.values() {
        if value.denominator().contains(Symbol::S) {
            let shared = gcd(&common, value.denominator(), budget)?;
            let rest = value.denominator().div_exact(&shared);
            common = common.product(&rest.unwrap_or_else(Polynomial::one), budget)?;
        }
    }
    let common = Fraction::from(common);
    let mut rows = vec![Row::default()];
    for (&column, value) in entries {
        let cleared = value.mul(&common, budget)?;
        for (power, part) in cleared
            .numerator()
            .coefficients(Symbol::S)
            .into_iter()
            .enumerate()
        {
            let below = cleared.denominator().clone();
            let Some(part) = Fraction::new(part, below, budget)? else {
                continue;
            };
            match column {
                Column::Input { input, .. } => {
                    let power = u32::try_from(power).unwrap_or(u32::MAX);
                    rows[0].add(Column::Input { input, power }, &part, budget)?;
                }
                _ => {
                    while rows.len() <= power {
                        rows.push(Row::default());
                    }
                    rows[power].add(column, &part, budget)?;
                }
            }
        }
    }
    while rows.len() > 1 && rows.last().is_some_and(Row::is_empty) {
        rows.pop();
    }
    Ok(rows)
}

impl Writer<'_> {
    fn value(&self, value: &Value) -> Fraction {
        match value {
            Value::Symbol(symbol) => self.setting.rooted.value(*symbol),
            Value::Number(number) => Fraction::from(number.clone()),
        }
    }

    fn add(&mut self, row: usize, column: Column, value: &Fraction) -> Result<(), Exceeded> {
        let sum = match self.rows[row].get(&column) {
            Some(found) => found.add(value, self.setting.budget)?,
            None => value.clone(),
        };
        if sum.is_zero() {
            self.rows[row].remove(&column);
        } else {
            self.rows[row].insert(column, sum);
        }
        Ok(())
    }

    /// value · v(port)
    fn voltage(&mut self, row: usize, port: Port, value: &Fraction) -> Result<(), Exceeded> {
        for (column, sign) in voltage(port).0 {
            let value = value.mul(&sign, self.setting.budget)?;
            self.add(row, column, &value)?;
        }
        Ok(())
    }

    /// A new branch: its current has the number of its equation.
    fn branch(&mut self, port: Port, owner: Option<ElementId>) -> Result<usize, Exceeded> {
        self.rows.push(Entries::new());
        self.owner.push(owner);
        let index = self.rows.len() - 1;
        for (column, sign) in voltage(port).0 {
            if let Column::Unknown(row) = column {
                self.add(row, Column::Unknown(index), &sign)?;
            }
        }
        Ok(index)
    }

    fn amount(&mut self, row: usize, current: usize, value: &Fraction) -> Result<(), Exceeded> {
        self.add(row, Column::Unknown(current), value)
    }

    fn part(&mut self, id: ElementId) -> Result<(), Exceeded> {
        let budget = self.setting.budget;
        let element = self.setting.network.element(id);
        let s = Fraction::symbol(Symbol::S);
        let (one, minus) = (Fraction::one(), Fraction::one().neg());
        match &element.kind {
            Kind::Resistor(port, value) | Kind::Impedance(port, value) => {
                let row = self.current[&id];
                self.voltage(row, *port, &one)?;
                self.amount(row, row, &self.value(value).neg())
            }
            Kind::Conductance(port, value) | Kind::Admittance(port, value) => {
                let row = self.current[&id];
                self.voltage(row, *port, &self.value(value))?;
                self.amount(row, row, &minus)
            }
            Kind::Capacitor(port, value) => {
                let row = self.current[&id];
                let value = self.value(value);
                self.voltage(row, *port, &value.mul(&s, budget)?)?;
                self.amount(row, row, &minus)?;
                self.start(row, id, &value.neg())
            }
            Kind::Inductor(port, value) => self.inductor(id, *port, value),
            Kind::Meter(port) => {
                let row = self.current[&id];
                self.voltage(row, *port, &one)
            }
            Kind::Source(source) => self.source(id, source),
            Kind::Amplifier {
                input,
                output,
                gain,
                rout,
            } => {
                let row = self.branch(*output, Some(id))?;
                let Some(gain) = gain else {
                    return self.voltage(row, *input, &one);
                };
                self.voltage(row, *output, &one)?;
                self.voltage(row, *input, &self.value(gain).neg())?;
                match rout {
                    Some(rout) => self.amount(row, row, &self.value(rout).neg()),
                    None => Ok(()),
                }
            }
            Kind::Nullor { input, output } => {
                let row = self.branch(*output, Some(id))?;
                self.voltage(row, *input, &one)
            }
            Kind::Conveyor {
                x,
                y,
                z,
                reference,
                polarity,
            } => {
                let into = |node: NodeId| Port {
                    from: node,
                    to: *reference,
                };
                let first = self.branch(into(*x), Some(id))?;
                let second = self.branch(into(*z), Some(id))?;
                self.voltage(first, Port { from: *x, to: *y }, &one)?;
                self.amount(second, second, &one)?;
                self.amount(second, first, &self.value(polarity).neg())
            }
            Kind::Transformer {
                primary,
                secondary,
                ratio,
            } => {
                let ratio = self.value(ratio);
                let first = self.branch(*primary, Some(id))?;
                let second = self.branch(*secondary, Some(id))?;
                self.voltage(first, *primary, &one)?;
                self.voltage(first, *secondary, &ratio.neg())?;
                self.amount(second, second, &one)?;
                self.amount(second, first, &ratio)
            }
            Kind::Gyrator {
                primary,
                secondary,
                g,
            } => {
                let g = self.value(g);
                let first = self.branch(*primary, Some(id))?;
                let second = self.branch(*secondary, Some(id))?;
                self.amount(first, first, &one)?;
                self.voltage(first, *secondary, &g.neg())?;
                self.amount(second, second, &one)?;
                self.voltage(second, *primary, &g)
            }
        }
    }

    /// factor · starting value of a part, where one is stated.
    fn start(&mut self, row: usize, id: ElementId, factor: &Fraction) -> Result<(), Exceeded> {
        let starts = self.setting.network.starts();
        for (input, acts) in self.frame.acts.iter().enumerate() {
            if matches!(acts, Acts::Start(index) if starts[*index].element == id) {
                return self.add(row, Column::Input { input, power: 0 }, factor);
            }
        }
        Ok(())
    }

    fn inductor(&mut self, id: ElementId, port: Port, value: &Value) -> Result<(), Exceeded> {
        let budget = self.setting.budget;
        let s = Fraction::symbol(Symbol::S);
        let row = self.current[&id];
        self.voltage(row, port, &Fraction::one().neg())?;
        let mut linked = vec![(id, self.value(value))];
        for (index, coupling) in self.setting.network.couplings().iter().enumerate() {
            let other = if coupling.first == id {
                coupling.second
            } else if coupling.second == id {
                coupling.first
            } else {
                continue;
            };
            let mutual = match &coupling.strength {
                Strength::Mutual(value) => self.value(value),
                Strength::Factor(_) => self
                    .setting
                    .couplings
                    .mutual(index)
                    .cloned()
                    .unwrap_or_else(Fraction::zero),
            };
            linked.push((other, mutual));
        }
        for (coil, value) in linked {
            let Some(&current) = self.current.get(&coil) else {
                continue;
            };
            self.amount(row, current, &value.mul(&s, budget)?)?;
            self.start(row, coil, &value.neg())?;
        }
        Ok(())
    }

    fn source(&mut self, id: ElementId, source: &Source) -> Result<(), Exceeded> {
        let budget = self.setting.budget;
        let row = self.current[&id];
        match source.quantity {
            Quantity::Voltage => self.voltage(row, source.port, &Fraction::one())?,
            Quantity::Current => self.amount(row, row, &Fraction::one())?,
        }
        for control in &source.controls {
            let factor = Fraction::from(control.factor.clone()).neg();
            let value = self.value(&control.value).mul(&factor, budget)?;
            match control.sense {
                Sense::Voltage(port) => self.voltage(row, port, &value)?,
                Sense::Current(of) => {
                    if let Some(&current) = self.current.get(&of) {
                        self.amount(row, current, &value)?;
                    }
                }
            }
        }
        for follow in &source.drives {
            let drive = Acts::Drive(follow.drive);
            let Some(input) = self.frame.acts.iter().position(|acts| *acts == drive) else {
                continue;
            };
            let factor = Fraction::from(follow.factor.clone()).neg();
            let value = self.value(&follow.value).mul(&factor, budget)?;
            self.add(row, Column::Input { input, power: 0 }, &value)?;
        }
        Ok(())
    }

    /// Currents into ports and the source across one.
    fn outside(&mut self) -> Result<Option<usize>, Exceeded> {
        let mut probe = None;
        for (input, acts) in self.frame.acts.iter().enumerate() {
            let column = Column::Input { input, power: 0 };
            match acts {
                Acts::CurrentInto(port) => {
                    for (node, sign) in voltage(*port).0 {
                        if let Column::Unknown(row) = node {
                            self.add(row, column, &sign.neg())?;
                        }
                    }
                }
                Acts::VoltageAcross(port) => {
                    let row = self.branch(*port, None)?;
                    self.voltage(row, *port, &Fraction::one())?;
                    self.add(row, column, &Fraction::one().neg())?;
                    probe = Some(row);
                }
                Acts::Drive(_) | Acts::Start(_) => {}
            }
        }
        Ok(probe)
    }

    /// A sub-network that no part ties to the reference has one node held at zero, by a branch.
    fn tie_islands(&mut self, parts: &[ElementId]) -> Result<(), Exceeded> {
        let network = self.setting.network;
        let mut group: Vec<usize> = (0..network.node_count()).collect();
        fn root(group: &mut [usize], mut at: usize) -> usize {
            while group[at] != at {
                group[at] = group[group[at]];
                at = group[at];
            }
            at
        }
        let conducting = parts.iter().flat_map(|id| {
            let element = network.element(*id);
            if element.is_current_source() {
                return Vec::new();
            }
            element.conducting().to_vec()
        });
        let across = self.frame.acts.iter().filter_map(|acts| match acts {
            Acts::VoltageAcross(port) => Some(*port),
            _ => None,
        });
        for port in conducting.chain(across) {
            let (a, b) = (
                root(&mut group, port.from.index()),
                root(&mut group, port.to.index()),
            );
            group[a.max(b)] = a.min(b);
        }
        for node in 1..network.node_count() {
            if root(&mut group, node) == node {
                let pin = Port {
                    from: NodeId::at(node),
                    to: NodeId::GROUND,
                };
                let row = self.branch(pin, None)?;
                self.voltage(row, pin, &Fraction::one())?;
            }
        }
        Ok(())
    }
}
