//! Parts and equations of each kind of device.

use super::*;

impl Lowering<'_> {
    pub(super) fn part(&mut self, waiting: &Waiting, option: &str, kind: Kind) {
        self.builder.element(Element {
            name: format!("{option}_{}", waiting.name),
            kind,
            device: Some(waiting.id),
            place: waiting.place,
        });
    }

    pub(super) fn main_part(&mut self, waiting: &Waiting, kind: Kind) {
        self.builder.element(Element {
            name: waiting.name.clone(),
            kind,
            device: Some(waiting.id),
            place: waiting.place,
        });
    }

    /// Makes the parts of a device.
    pub(crate) fn build_device(&mut self, waiting: &Waiting) -> Result<(), Reported> {
        let node = |terminal: &str| waiting.nodes[terminal];
        let port = |from: &str, to: &str| Port {
            from: node(from),
            to: node(to),
        };
        match TABLE[waiting.row].name {
            "opamp" => self.opamp(waiting, port("+", "-"), port("out", "ref")),
            "diffamp" => {
                // The gain stands in one source only, so its states count once; the second output
                // mirrors the first at cm.
                let gain = self.required(waiting, "gain")?;
                let half =
                    Rational::new(Integer::one(), Integer::from(2)).unwrap_or_else(Rational::one);
                let fixed = |factor: Rational, sensed: NodeId| Control {
                    gain: false,
                    ..control(&Value::one(), factor, to_ground(sensed))
                };
                let (middle, first) = (node("cm"), node("out+"));
                let mut controls = vec![control(&gain, half, port("+", "-"))];
                let mut mirror = vec![fixed(-Rational::one(), first)];
                if middle != NodeId::GROUND {
                    controls.push(fixed(Rational::one(), middle));
                    mirror.push(fixed(Rational::from(Integer::from(2)), middle));
                }
                for (output, controls) in [(first, controls), (node("out-"), mirror)] {
                    let kind = source(Quantity::Voltage, to_ground(output), controls);
                    self.main_part(waiting, kind);
                }
                Ok(())
            }
            "buffer" => {
                let gain = self.required(waiting, "gain")?;
                let controls = vec![control(&gain, Rational::one(), port("in", "ref"))];
                self.main_part(
                    waiting,
                    source(Quantity::Voltage, port("out", "ref"), controls),
                );
                Ok(())
            }
            "transconductor" => {
                let gm = self.required(waiting, "gm")?;
                let controls = vec![control(&gm, Rational::one(), port("+", "-"))];
                // The current flows out of `out`: inside the part from ref to out.
                self.main_part(
                    waiting,
                    source(Quantity::Current, port("ref", "out"), controls),
                );
                Ok(())
            }
            "nullor" => {
                let kind = Kind::Nullor {
                    input: port("+", "-"),
                    output: port("p", "q"),
                };
                self.main_part(waiting, kind);
                Ok(())
            }
            "conveyor" => {
                let polarity = self.required(waiting, "polarity")?;
                let kind = Kind::Conveyor {
                    x: node("x"),
                    y: node("y"),
                    z: node("z"),
                    reference: node("ref"),
                    polarity,
                };
                self.main_part(waiting, kind);
                Ok(())
            }
            "transformer" => {
                let ratio = self.required(waiting, "ratio")?;
                let kind = Kind::Transformer {
                    primary: port("p1", "p2"),
                    secondary: port("s1", "s2"),
                    ratio,
                };
                self.main_part(waiting, kind);
                Ok(())
            }
            "gyrator" => {
                let g = self.required(waiting, "g")?;
                let kind = Kind::Gyrator {
                    primary: port("p1", "p2"),
                    secondary: port("s1", "s2"),
                    g,
                };
                self.main_part(waiting, kind);
                Ok(())
            }
            "bjt" => self.bjt(waiting),
            "fet" => self.fet(waiting),
            _ => self.triode(waiting),
        }
    }

    pub(super) fn opamp(
        &mut self,
        waiting: &Waiting,
        input: Port,
        output: Port,
    ) -> Result<(), Reported> {
        if let Some(rin) = self.option(waiting, "rin")? {
            self.part(waiting, "rin", Kind::Resistor(input, rin));
        }
        let gain = self.option(waiting, "gain")?;
        let rout = self.option(waiting, "rout")?;
        let mut output = output;
        let rout = match (&gain, rout) {
            (None, Some(rout)) => {
                let inner = self
                    .builder
                    .node(format!("({} inside)", waiting.name), waiting.place);
                let inside = Port {
                    from: inner,
                    to: output.from,
                };
                self.part(waiting, "rout", Kind::Resistor(inside, rout));
                output.from = inner;
                None
            }
            (_, rout) => rout,
        };
        let kind = Kind::Amplifier {
            input,
            output,
            gain,
            rout,
        };
        self.main_part(waiting, kind);
        Ok(())
    }

    pub(super) fn bjt(&mut self, waiting: &Waiting) -> Result<(), Reported> {
        let (b, c, e) = (waiting.nodes["b"], waiting.nodes["c"], waiting.nodes["e"]);
        let mut inner = b;
        if let Some(rb) = self.option(waiting, "rb")? {
            inner = self
                .builder
                .node(format!("({} b′)", waiting.name), waiting.place);
            self.part(
                waiting,
                "rb",
                Kind::Resistor(Port { from: b, to: inner }, rb),
            );
        }
        let gm = self.required(waiting, "gm")?;
        let beta = self.option(waiting, "beta")?;
        let rpi = match beta {
            Some(beta) => self.quotient(waiting, "rpi", &beta, &gm, Dimension::OHM)?,
            None => self.required(waiting, "rpi")?,
        };
        let base = Port { from: inner, to: e };
        let controls = vec![control(&gm, Rational::one(), base)];
        self.main_part(
            waiting,
            source(Quantity::Current, Port { from: c, to: e }, controls),
        );
        self.part(waiting, "rpi", Kind::Resistor(base, rpi));
        if let Some(ro) = self.option(waiting, "ro")? {
            self.part(waiting, "ro", Kind::Resistor(Port { from: c, to: e }, ro));
        }
        if let Some(cpi) = self.option(waiting, "cpi")? {
            self.part(waiting, "cpi", Kind::Capacitor(base, cpi));
        }
        if let Some(cmu) = self.option(waiting, "cmu")? {
            self.part(
                waiting,
                "cmu",
                Kind::Capacitor(Port { from: inner, to: c }, cmu),
            );
        }
        Ok(())
    }

    pub(super) fn fet(&mut self, waiting: &Waiting) -> Result<(), Reported> {
        let [g, d, s, b] = ["g", "d", "s", "b"].map(|terminal| waiting.nodes[terminal]);
        let between = |from, to| Port { from, to };
        let gm = self.required(waiting, "gm")?;
        let mut controls = vec![control(&gm, Rational::one(), between(g, s))];
        if let Some(gmb) = self.option(waiting, "gmb")? {
            controls.push(control(&gmb, Rational::one(), between(b, s)));
        }
        self.main_part(waiting, source(Quantity::Current, between(d, s), controls));
        if let Some(gds) = self.option(waiting, "gds")? {
            self.part(waiting, "gds", Kind::Conductance(between(d, s), gds));
        }
        for (option, port) in [
            ("cgs", between(g, s)),
            ("cgd", between(g, d)),
            ("cdb", between(d, b)),
            ("csb", between(s, b)),
        ] {
            if let Some(value) = self.option(waiting, option)? {
                self.part(waiting, option, Kind::Capacitor(port, value));
            }
        }
        Ok(())
    }

    pub(super) fn triode(&mut self, waiting: &Waiting) -> Result<(), Reported> {
        let [g, a, k] = ["g", "a", "k"].map(|terminal| waiting.nodes[terminal]);
        let ra = self.required(waiting, "ra")?;
        let gm = match self.option(waiting, "mu")? {
            Some(mu) => self.quotient(waiting, "gm", &mu, &ra, Dimension::SIEMENS)?,
            None => self.required(waiting, "gm")?,
        };
        let controls = vec![control(&gm, Rational::one(), Port { from: g, to: k })];
        let anode = Port { from: a, to: k };
        self.main_part(waiting, source(Quantity::Current, anode, controls));
        self.part(waiting, "ra", Kind::Resistor(anode, ra));
        Ok(())
    }

    /// rpi = beta/gm, gm = mu/ra: an internal tie of the device.
    pub(super) fn quotient(
        &mut self,
        waiting: &Waiting,
        name: &str,
        above: &Value,
        below: &Value,
        dimension: Dimension,
    ) -> Result<Value, Reported> {
        let as_fraction = |value: &Value| match value {
            Value::Symbol(symbol) => Fraction::symbol(*symbol),
            Value::Number(number) => Fraction::from(number.clone()),
        };
        let quotient = as_fraction(above)
            .div(&as_fraction(below), &self.budget)
            .ok()
            .flatten()
            .ok_or(Reported)?;
        if let Some(number) = quotient.as_rational() {
            return Ok(Value::Number(number));
        }
        let symbol_name = format!("{name}_{}", waiting.name);
        self.enter(&symbol_name, What::Symbol, waiting.place);
        let symbol = self.new_symbol(&symbol_name, Origin::Option, Some(dimension), waiting.place);
        let spell = |value: &Value| match value {
            Value::Symbol(symbol) => self.builder.network().symbols().name(*symbol).to_owned(),
            Value::Number(number) => number.to_string(),
        };
        let text = format!("{symbol_name} = {}/{}", spell(above), spell(below));
        self.add_relation(vec![(symbol, quotient)], text, None, waiting.place);
        Ok(Value::Symbol(symbol))
    }
}

pub(super) fn control(value: &Value, factor: Rational, port: Port) -> Control {
    Control {
        factor,
        value: value.clone(),
        sense: Sense::Voltage(port),
        gain: true,
    }
}

pub(super) fn source(quantity: Quantity, port: Port, controls: Vec<Control>) -> Kind {
    Kind::Source(Source {
        quantity,
        port,
        drives: Vec::new(),
        controls,
    })
}

pub(super) fn to_ground(node: NodeId) -> Port {
    Port {
        from: node,
        to: NodeId::GROUND,
    }
}
