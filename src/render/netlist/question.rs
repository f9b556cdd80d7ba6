//! The questions of a network, asked again.

use crate::algebra::Fraction;
use crate::network::{Ask, Combination, Kind, LimitPoint, NodeId, Port, Probe};
use crate::render::netlist::Writer;
use crate::render::netlist::device::linear;

impl Writer<'_> {
    /// Asks one question again.
    pub(super) fn question(&mut self, index: usize) {
        let question = &self.network.questions()[index];
        let name = self.name(&question.name);
        let mut with = String::new();
        let asks = match &question.ask {
            Ask::Transfer { response, drive } => {
                let drive = self.name(&self.network.drive(*drive).name);
                let plain = matches!(response.terms.as_slice(), [(factor, _)] if *factor == Fraction::one());
                let response = self.combination(response);
                if plain {
                    format!("{response} / {drive}")
                } else {
                    format!("({response}) / {drive}")
                }
            }
            Ask::Impedance(port) => format!("impedance({})", self.port(*port)),
            Ask::Admittance(port) => format!("admittance({})", self.port(*port)),
            Ask::Ratio {
                upper,
                lower,
                drive,
            } => {
                let drive = self.name(&self.network.drive(*drive).name);
                with = format!(" with {drive}");
                let (upper, lower) = (self.combination(upper), self.combination(lower));
                format!("ratio({upper}, {lower})")
            }
            Ask::ReturnRatio(parts) => match parts.as_slice() {
                [only] => format!("return_ratio({})", self.elements[only]),
                _ => {
                    let text = format!("{name} asks for the loop gain of a whole device");
                    self.missing.push(text);
                    return;
                }
            },
            Ask::Function(value) => self.fraction(value),
            Ask::Limit { function, steps } => {
                let steps: Vec<String> = steps
                    .iter()
                    .map(|(symbol, to)| {
                        self.values.need(*symbol);
                        let to = match to {
                            LimitPoint::Infinite => "infinite".to_owned(),
                            LimitPoint::Value(value) => self.fraction(value),
                        };
                        format!("{} -> {to}", self.names.name(*symbol))
                    })
                    .collect();
                with = format!(" with {}", steps.join(", "));
                self.names.name(*function).to_owned()
            }
            Ask::FirstOrder { function, small } => {
                let small = self.fraction(small);
                format!("first_order({}, {small})", self.names.name(*function))
            }
        };
        let without: Vec<&str> = question
            .without
            .iter()
            .map(|id| self.elements[id].as_str())
            .collect();
        let without = match without.as_slice() {
            [] => String::new(),
            some => format!(" without {}", some.join(", ")),
        };
        self.questions
            .push(format!("derive {name} = {asks}{with}{without}"));
    }

    fn port(&mut self, port: Port) -> String {
        let (from, to) = (self.node(port.from), self.node(port.to));
        if port.to == NodeId::GROUND {
            from
        } else {
            format!("{from}, {to}")
        }
    }

    fn combination(&mut self, combination: &Combination) -> String {
        let mut terms = Vec::new();
        for (factor, probe) in &combination.terms {
            let response = match probe {
                Probe::Voltage(port) => self.voltage(*port),
                Probe::Current(part) => format!("current({})", self.elements[part]),
            };
            terms.push((self.fraction(factor), response));
        }
        linear(&terms)
    }

    /// The initial values; their parts are kept.
    pub(super) fn starts(&mut self) {
        for start in self.network.starts() {
            let name = self.elements[&start.element].clone();
            let element = self.network.element(start.element);
            let word = match element.kind {
                Kind::Inductor(..) => "current",
                _ => "voltage",
            };
            let value = self.fraction(&start.value);
            self.questions
                .push(format!("starts {word}({name}) = {value}"));
        }
    }
}
