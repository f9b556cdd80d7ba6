//! Networks for tests, drawn part by part without the language.

use std::collections::BTreeMap;

use crate::algebra::{Fraction, Rational, Symbol};
use crate::network::builder::NetworkBuilder;
use crate::network::element::{
    Control, Coupling, Element, Kind, Port, Quantity, Sense, Source, Strength,
};
use crate::network::graph::Network;
use crate::network::id::{ElementId, NodeId};
use crate::network::question::{Ask, Question};
use crate::network::relation::Relation;
use crate::network::value::{Origin, Sign, SymbolFacts, Value};
use crate::source::{Sources, Span};

/// A network being drawn; each part's value is a symbol of its name.
pub(crate) struct Sketch {
    builder: NetworkBuilder,
    nodes: BTreeMap<String, NodeId>,
    parts: BTreeMap<String, ElementId>,
    place: Span,
}

impl Sketch {
    /// Draws `R1 in out`, `Vs in ground`, …, separated by `;`: R, G, C, L, Z, Y, M (meter), V and I.
    pub(crate) fn of(parts: &str) -> Self {
        let mut sources = Sources::new();
        let place = Span::new(sources.add("sketch", ""), 0, 0);
        let mut sketch = Self {
            builder: NetworkBuilder::new(place),
            nodes: BTreeMap::from([("ground".to_owned(), NodeId::GROUND)]),
            parts: BTreeMap::new(),
            place,
        };
        for part in parts
            .split(';')
            .map(str::trim)
            .filter(|part| !part.is_empty())
        {
            let words: Vec<&str> = part.split_whitespace().collect();
            sketch.two_ends(words[0], words[1], words[2]);
        }
        sketch
    }

    /// Ties the symbols of names (`k_V2` for the coefficient of V2) to fractions, in one relation.
    pub(crate) fn relation(mut self, sets: &[(&str, Fraction)], origin: Origin) -> Self {
        let place = self.place;
        let sets: Vec<(Symbol, Fraction)> = sets
            .iter()
            .map(|(name, value)| (self.builder.symbols().intern(name), value.clone()))
            .collect();
        for (symbol, _) in &sets {
            self.builder.facts(SymbolFacts {
                symbol: *symbol,
                origin,
                dimension: None,
                sign: Sign::Real,
                nominal: None,
                tolerance: None,
                range: None,
                in_hertz: false,
                place,
            });
        }
        self.builder.relation(Relation {
            sets,
            text: "relation".to_owned(),
            tolerance: None,
            device_states: 0,
            place,
        });
        self
    }

    /// A question for a driving-point impedance.
    pub(crate) fn ask_impedance(&mut self, name: &str, at: [&str; 2], without: &[&str]) {
        let port = self.port(at[0], at[1]);
        let symbol = self.builder.symbols().intern(name);
        self.builder.question(Question {
            name: name.to_owned(),
            symbol,
            ask: Ask::Impedance(port),
            without: without.iter().map(|part| self.parts[*part]).collect(),
            text: String::new(),
            place: self.place,
        });
    }

    /// A symbol as a fraction.
    pub(crate) fn fraction(&mut self, name: &str) -> Fraction {
        Fraction::symbol(self.builder.symbols().intern(name))
    }

    /// One more voltage that a controlled source senses, with a coefficient of its own.
    pub(crate) fn also(mut self, name: &str, of: [&str; 2]) -> Self {
        let sense = Sense::Voltage(self.port(of[0], of[1]));
        let more = self.control(&format!("{name}_2"), sense);
        let id = self.parts[name];
        if let Kind::Source(source) = &mut self.builder.element_mut(id).kind {
            source.controls.extend(more);
        }
        self
    }

    pub(crate) fn finish(self) -> Network {
        self.builder.finish()
    }

    pub(crate) fn id(&self, name: &str) -> ElementId {
        self.parts[name]
    }

    fn node(&mut self, name: &str) -> NodeId {
        if let Some(&node) = self.nodes.get(name) {
            return node;
        }
        let node = self.builder.node(name, self.place);
        self.nodes.insert(name.to_owned(), node);
        node
    }

    fn port(&mut self, from: &str, to: &str) -> Port {
        Port {
            from: self.node(from),
            to: self.node(to),
        }
    }

    fn symbol(&mut self, name: &str) -> Value {
        Value::Symbol(self.builder.symbols().intern(name))
    }

    pub(crate) fn add(&mut self, name: &str, kind: Kind) -> ElementId {
        let id = self.builder.element(Element {
            name: name.to_owned(),
            kind,
            device: None,
            place: self.place,
        });
        self.parts.insert(name.to_owned(), id);
        id
    }

    fn two_ends(&mut self, name: &str, from: &str, to: &str) {
        let port = self.port(from, to);
        let value = self.symbol(name);
        let kind = match name.as_bytes()[0] {
            b'R' => Kind::Resistor(port, value),
            b'G' => Kind::Conductance(port, value),
            b'C' => Kind::Capacitor(port, value),
            b'L' => Kind::Inductor(port, value),
            b'Z' => Kind::Impedance(port, value),
            b'Y' => Kind::Admittance(port, value),
            b'M' => Kind::Meter(port),
            b'V' => self.source(Quantity::Voltage, port, Vec::new()),
            b'I' => self.source(Quantity::Current, port, Vec::new()),
            other => panic!("no part begins with {}", char::from(other)),
        };
        self.add(name, kind);
    }

    fn source(&mut self, quantity: Quantity, port: Port, controls: Vec<Control>) -> Kind {
        Kind::Source(Source {
            quantity,
            port,
            drives: Vec::new(),
            controls,
        })
    }

    fn control(&mut self, name: &str, sense: Sense) -> Vec<Control> {
        vec![Control {
            factor: Rational::from(1_i64),
            value: self.symbol(&format!("k_{name}")),
            sense,
            gain: false,
        }]
    }

    /// A source (first letter V or I) controlled by the voltage of a node pair.
    pub(crate) fn by_voltage(mut self, name: &str, at: [&str; 2], of: [&str; 2]) -> Self {
        let port = self.port(at[0], at[1]);
        let sense = Sense::Voltage(self.port(of[0], of[1]));
        self.controlled(name, port, sense)
    }

    /// A source (first letter V or I) controlled by the current of a part.
    pub(crate) fn by_current(mut self, name: &str, at: [&str; 2], of: &str) -> Self {
        let port = self.port(at[0], at[1]);
        let sense = Sense::Current(self.parts[of]);
        self.controlled(name, port, sense)
    }

    fn controlled(mut self, name: &str, port: Port, sense: Sense) -> Self {
        let controls = self.control(name, sense);
        let quantity = if name.starts_with('V') {
            Quantity::Voltage
        } else {
            Quantity::Current
        };
        let kind = self.source(quantity, port, controls);
        self.add(name, kind);
        self
    }

    /// A voltage source against ground that follows a node with gain 1.
    pub(crate) fn follower(self, name: &str, input: &str, output: &str) -> Self {
        let mut sketch = self.by_voltage(name, [output, "ground"], [input, "ground"]);
        let id = sketch.parts[name];
        if let Kind::Source(source) = &mut sketch.builder.element_mut(id).kind {
            source.controls[0].value = Value::one();
        }
        sketch
    }

    /// An ideal operational amplifier against ground.
    pub(crate) fn opamp(mut self, name: &str, plus: &str, minus: &str, out: &str) -> Self {
        let input = self.port(plus, minus);
        let output = self.port(out, "ground");
        self.add(
            name,
            Kind::Amplifier {
                input,
                output,
                gain: None,
                rout: None,
            },
        );
        self
    }

    /// A transformer with a symbol for its ratio.
    pub(crate) fn transformer(mut self, name: &str, p: [&str; 2], s: [&str; 2]) -> Self {
        let primary = self.port(p[0], p[1]);
        let secondary = self.port(s[0], s[1]);
        let ratio = self.symbol(name);
        self.add(
            name,
            Kind::Transformer {
                primary,
                secondary,
                ratio,
            },
        );
        self
    }

    /// A coupling with a symbol or with k = 1.
    pub(crate) fn coupling(mut self, name: &str, coils: [&str; 2], tight: bool) -> Self {
        let strength = if tight {
            Value::one()
        } else {
            self.symbol(name)
        };
        let (first, second) = (self.id(coils[0]), self.id(coils[1]));
        self.builder.coupling(Coupling {
            name: name.to_owned(),
            first,
            second,
            strength: Strength::Factor(strength),
            place: self.place,
        });
        self
    }

    /// A conveyor with terminals x, y, z and its return.
    pub(crate) fn conveyor(mut self, name: &str, at: [&str; 4]) -> Self {
        let [x, y, z, reference] = at.map(|node| self.node(node));
        let polarity = self.symbol(name);
        self.add(
            name,
            Kind::Conveyor {
                x,
                y,
                z,
                reference,
                polarity,
            },
        );
        self
    }

    /// The name of a part by its number.
    pub(crate) fn any(&self, index: usize) -> String {
        let (_, element) = self.builder.network().elements().nth(index).unwrap();
        element.name.clone()
    }

    /// Names of the inductors.
    pub(crate) fn coils(&self) -> Vec<String> {
        let parts = self.builder.network().elements();
        parts
            .filter(|(_, element)| matches!(element.kind, Kind::Inductor(..)))
            .map(|(_, element)| element.name.clone())
            .collect()
    }
}
