//! Parts that are no edges: sources, amplifiers, two-ports, couplings, and parts that are kept.

use crate::algebra::{Fraction, Rational};
use crate::analysis::equivalent::Class;
use crate::budget::Budget;
use crate::network::{
    Control, ElementId, Kind, NodeId, Port, Quantity, Sense, Source, Strength, Value,
};
use crate::render::netlist::Writer;

impl Writer<'_> {
    /// Every part that is no edge, in file order.
    pub(super) fn others(&mut self) {
        for (id, element) in self.network.elements() {
            let name = self.elements[&id].clone();
            if let (Some(class), Some(port)) = (class(&element.kind), element.port()) {
                if self.circuit.is_kept(id) {
                    self.path(id, port);
                    self.kind(&name, class);
                    if let Some(value) = element.value() {
                        self.own_value(&name, value);
                    }
                }
                continue;
            }
            match &element.kind {
                Kind::Source(source) => self.source(id, &name, source),
                Kind::Meter(port) => {
                    self.path(id, *port);
                    self.kinds.push(format!("{name} is meter"));
                }
                other => self.device(id, &name, other),
            }
        }
    }

    fn path(&mut self, id: ElementId, port: Port) {
        let name = self.elements[&id].clone();
        let (from, to) = (self.terminal(id, port.from), self.terminal(id, port.to));
        self.wiring.push(format!("{from} -{name}- {to}"));
    }

    fn terminal(&mut self, id: ElementId, node: NodeId) -> String {
        let node = self.circuit.terminal(id, node);
        self.node(node)
    }

    fn source(&mut self, id: ElementId, name: &str, source: &Source) {
        self.path(id, source.port);
        let (letter, word) = match source.quantity {
            Quantity::Voltage => ('V', "voltage"),
            Quantity::Current => ('I', "current"),
        };
        if !name.starts_with(letter) {
            self.kinds.push(format!("{name} is {word}"));
        }
        let mut terms = Vec::new();
        for control in &source.controls {
            let coefficient = self.coefficient(&control.factor, &control.value);
            let sensed = self.sensed(control);
            terms.push((coefficient, sensed));
        }
        for follow in &source.drives {
            let drive = self.network.drive(follow.drive).name.clone();
            let own = drive == self.network.element(id).name;
            if own && source.drives.len() == 1 && follow.factor == Rational::one() {
                continue;
            }
            let coefficient = self.coefficient(&follow.factor, &follow.value);
            let drive = self.name(&drive);
            let line = format!("drive {drive}");
            if !self.kinds.contains(&line) {
                self.kinds.push(line);
            }
            terms.push((coefficient, drive));
        }
        if !terms.is_empty() {
            self.values
                .lines
                .push(format!("{name} = {}", linear(&terms)));
        }
    }

    /// `factor · value`, with the relation of a coefficient put in.
    fn coefficient(&mut self, factor: &Rational, value: &Value) -> String {
        let fraction = self.fraction_of(value);
        let factor = Fraction::from(factor.clone());
        let product = factor.mul(&fraction, &Budget::default());
        self.fraction(&product.unwrap_or(fraction))
    }

    /// A value; coefficients and options that a relation sets by what it says.
    fn fraction_of(&self, value: &Value) -> Fraction {
        match value {
            Value::Number(number) => Fraction::from(number.clone()),
            Value::Symbol(symbol) => self
                .network
                .set_by(*symbol)
                .map(|id| self.network.relation(id))
                .and_then(|relation| relation.sets.iter().find(|(set, _)| set == symbol))
                .map_or_else(|| Fraction::symbol(*symbol), |(_, value)| value.clone()),
        }
    }

    fn sensed(&mut self, control: &Control) -> String {
        match control.sense {
            Sense::Voltage(port) => self.voltage(port),
            Sense::Current(part) => format!("current({})", self.elements[&part]),
        }
    }

    pub(super) fn voltage(&mut self, port: Port) -> String {
        let (from, to) = (self.node(port.from), self.node(port.to));
        if port.to == NodeId::GROUND {
            format!("voltage({from})")
        } else {
            format!("voltage({from}, {to})")
        }
    }

    fn device(&mut self, id: ElementId, name: &str, kind: &Kind) {
        let mut options = Vec::new();
        let (word, terminals): (&str, Vec<(&str, NodeId)>) = match kind {
            Kind::Amplifier {
                input,
                output,
                gain,
                rout,
            } => {
                options.extend(gain.as_ref().map(|gain| ("gain", gain)));
                options.extend(rout.as_ref().map(|rout| ("rout", rout)));
                let ends = [("+", input.from), ("-", input.to), ("out", output.from)];
                let mut ends = ends.to_vec();
                if output.to != NodeId::GROUND {
                    ends.push(("ref", output.to));
                }
                ("opamp", ends)
            }
            Kind::Nullor { input, output } => (
                "nullor",
                vec![
                    ("+", input.from),
                    ("-", input.to),
                    ("p", output.from),
                    ("q", output.to),
                ],
            ),
            Kind::Conveyor {
                x,
                y,
                z,
                reference,
                polarity,
            } => {
                options.push(("polarity", polarity));
                let mut ends = vec![("x", *x), ("y", *y), ("z", *z)];
                if *reference != NodeId::GROUND {
                    ends.push(("ref", *reference));
                }
                ("conveyor", ends)
            }
            Kind::Transformer {
                primary,
                secondary,
                ratio,
            } => {
                options.push(("ratio", ratio));
                ("transformer", two_ports(*primary, *secondary))
            }
            Kind::Gyrator {
                primary,
                secondary,
                g,
            } => {
                options.push(("g", g));
                ("gyrator", two_ports(*primary, *secondary))
            }
            _ => return,
        };
        let ends: Vec<String> = terminals
            .into_iter()
            .map(|(terminal, node)| format!("{terminal} {}", self.terminal(id, node)))
            .collect();
        let options: Vec<String> = options
            .into_iter()
            .map(|(option, value)| self.option(option, name, value))
            .collect();
        self.devices.push(format!(
            "{name} is {word}({}){}",
            ends.join(", "),
            with(&options)
        ));
    }

    /// `gain = A0`; the bare word where the device makes the symbol itself.
    fn option(&mut self, option: &str, device: &str, value: &Value) -> String {
        if let Value::Symbol(symbol) = value
            && self.network.set_by(*symbol).is_none()
            && self.names.name(*symbol) == format!("{option}_{device}")
        {
            return option.to_owned();
        }
        let fraction = self.fraction_of(value);
        format!("{option} = {}", self.fraction(&fraction))
    }

    /// The couplings; their coils are kept.
    pub(super) fn couplings(&mut self) {
        for coupling in self.network.couplings() {
            let name = self.name(&coupling.name);
            let (option, value) = match &coupling.strength {
                Strength::Factor(value) => ("k", value),
                Strength::Mutual(value) => ("M", value),
            };
            let option = self.option(option, &name, value);
            let (first, second) = (
                &self.elements[&coupling.first],
                &self.elements[&coupling.second],
            );
            let line = format!("{name} is coupling of {first}, {second} with {option}");
            self.devices.push(line);
        }
    }
}

/// Coefficients times quantities, added up.
pub(super) fn linear(terms: &[(String, String)]) -> String {
    let mut text = String::new();
    for (index, (coefficient, quantity)) in terms.iter().enumerate() {
        let whole = coefficient.contains(' ');
        let (minus, size) = match coefficient.strip_prefix('-') {
            Some(rest) if !whole => (true, rest),
            _ => (false, coefficient.as_str()),
        };
        text.push_str(match (index, minus) {
            (0, false) => "",
            (0, true) => "-",
            (_, false) => " + ",
            (_, true) => " - ",
        });
        text.push_str(&match (size, whole) {
            ("1", _) => quantity.clone(),
            (_, true) => format!("({size})*{quantity}"),
            (_, false) => format!("{size}*{quantity}"),
        });
    }
    text
}

fn with(options: &[String]) -> String {
    match options {
        [] => String::new(),
        some => format!(" with {}", some.join(", ")),
    }
}

fn two_ports(first: Port, second: Port) -> Vec<(&'static str, NodeId)> {
    vec![
        ("p1", first.from),
        ("p2", first.to),
        ("s1", second.from),
        ("s2", second.to),
    ]
}

fn class(kind: &Kind) -> Option<Class> {
    match kind {
        Kind::Resistor(..) => Some(Class::Resistor),
        Kind::Conductance(..) => Some(Class::Conductance),
        Kind::Capacitor(..) => Some(Class::Capacitor),
        Kind::Inductor(..) => Some(Class::Inductor),
        Kind::Impedance(..) => Some(Class::Impedance),
        Kind::Admittance(..) => Some(Class::Admittance),
        _ => None,
    }
}
