//! Devices taken apart into parts, by one table of kinds, terminals and options.

use std::collections::BTreeMap;
use std::rc::Rc;

use crate::algebra::{Fraction, Integer, Rational};
use crate::diagnostic::Diagnostic;
use crate::language::expand::{Scope, has_name, plain};
use crate::language::lower::expression::{Reported, VALUES};
use crate::language::lower::{Lowering, What};
use crate::language::nearest::nearest;
use crate::language::syntax::{Name, OptionValue, Statement, StatementKind, Terminal};
use crate::network::{
    Control, Coupling, Device, DeviceId, Dimension, Element, Kind, NodeId, Origin, Port, Quantity,
    Sense, Source, Strength, Value,
};
use crate::source::Span;

/// What an option is when it is not named.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
enum Unnamed {
    /// A symbol of its own.
    Own,
    /// Left out.
    Absent,
    /// One.
    One,
}

/// A kind of device.
struct KindRow {
    name: &'static str,
    terminals: &'static [&'static str],
    /// Terminals that may be left out; `s` stands for the node of terminal s, empty for ground.
    optional: &'static [(&'static str, &'static str)],
    options: &'static [(&'static str, Unnamed, Option<Dimension>)],
}

use Unnamed::{Absent, One, Own};

const OHM: Option<Dimension> = Some(Dimension::OHM);
const SIEMENS: Option<Dimension> = Some(Dimension::SIEMENS);
const FARAD: Option<Dimension> = Some(Dimension::FARAD);
const NUMBER: Option<Dimension> = Some(Dimension::NUMBER);

const TABLE: [KindRow; 11] = [
    KindRow {
        name: "opamp",
        terminals: &["+", "-", "out"],
        optional: &[("ref", "")],
        options: &[
            ("gain", Absent, NUMBER),
            ("rin", Absent, OHM),
            ("rout", Absent, OHM),
        ],
    },
    KindRow {
        name: "diffamp",
        terminals: &["+", "-", "out+", "out-"],
        optional: &[("cm", "")],
        options: &[("gain", Own, NUMBER)],
    },
    KindRow {
        name: "buffer",
        terminals: &["in", "out"],
        optional: &[("ref", "")],
        options: &[("gain", One, NUMBER)],
    },
    KindRow {
        name: "transconductor",
        terminals: &["+", "-", "out"],
        optional: &[("ref", "")],
        options: &[("gm", Own, SIEMENS)],
    },
    KindRow {
        name: "nullor",
        terminals: &["+", "-", "p", "q"],
        optional: &[],
        options: &[],
    },
    KindRow {
        name: "conveyor",
        terminals: &["x", "y", "z"],
        optional: &[("ref", "")],
        options: &[("polarity", One, NUMBER)],
    },
    KindRow {
        name: "transformer",
        terminals: &["p1", "p2", "s1", "s2"],
        optional: &[],
        options: &[("ratio", Own, NUMBER)],
    },
    KindRow {
        name: "gyrator",
        terminals: &["p1", "p2", "s1", "s2"],
        optional: &[],
        options: &[("g", Own, SIEMENS)],
    },
    KindRow {
        name: "bjt",
        terminals: &["b", "c", "e"],
        optional: &[],
        options: &[
            ("gm", Own, SIEMENS),
            ("rpi", Own, OHM),
            ("beta", Absent, NUMBER),
            ("ro", Absent, OHM),
            ("cpi", Absent, FARAD),
            ("cmu", Absent, FARAD),
            ("rb", Absent, OHM),
        ],
    },
    KindRow {
        name: "fet",
        terminals: &["g", "d", "s"],
        optional: &[("b", "s")],
        options: &[
            ("gm", Own, SIEMENS),
            ("gds", Absent, SIEMENS),
            ("gmb", Absent, SIEMENS),
            ("cgs", Absent, FARAD),
            ("cgd", Absent, FARAD),
            ("cdb", Absent, FARAD),
            ("csb", Absent, FARAD),
        ],
    },
    KindRow {
        name: "triode",
        terminals: &["g", "a", "k"],
        optional: &[],
        options: &[
            ("gm", Own, SIEMENS),
            ("mu", Absent, NUMBER),
            ("ra", Own, OHM),
        ],
    },
];

/// A device line that has been entered and waits for its options.
pub(crate) struct Waiting {
    row: usize,
    id: DeviceId,
    name: String,
    nodes: BTreeMap<&'static str, NodeId>,
    options: Vec<OptionValue>,
    scope: Rc<Scope>,
    place: Span,
}

impl Lowering<'_> {
    /// Enters a device or coupling by name; its options are evaluated later.
    pub(crate) fn declare_device(
        &mut self,
        statement: Statement,
        scope: &Rc<Scope>,
    ) -> Option<Waiting> {
        let place = statement.place;
        let StatementKind::Is {
            names,
            kind,
            terminals,
            options,
            ..
        } = statement.kind
        else {
            return None;
        };
        let word = plain(&kind);
        let Some(row) = TABLE.iter().position(|row| row.name == word) else {
            let known = TABLE.iter().map(|row| row.name);
            let help = nearest(&word, known.clone()).map_or_else(
                || {
                    let list: Vec<&str> = known.collect();
                    format!(
                        "kinds are {}; a module must be written in this file or used",
                        list.join(", ")
                    )
                },
                |near| format!("did you mean {near}?"),
            );
            self.error(
                kind.place,
                format!("{word} is no kind of device and no module"),
                help,
            );
            return None;
        };
        let [name] = names.as_slice() else {
            self.error(
                place,
                "one line makes one device",
                "write one line for each",
            );
            return None;
        };
        self.reserved(&plain(name), name.place);
        let own = scope.own(&plain(name));
        let nodes = self.connect(
            &TABLE[row],
            &own,
            terminals.unwrap_or_default(),
            scope,
            place,
        )?;
        let listed = TABLE[row]
            .terminals
            .iter()
            .copied()
            .chain(TABLE[row].optional.iter().map(|(terminal, _)| *terminal))
            .map(|terminal| (terminal.to_owned(), nodes[terminal]))
            .collect();
        let id = self.builder.device(Device {
            name: own.clone(),
            kind: TABLE[row].name,
            terminals: listed,
            elements: Vec::new(),
            place,
        });
        if !self.enter(&own, What::Device(id), name.place) {
            return None;
        }
        self.check_options(&TABLE[row], &own, &options);
        let waiting = Waiting {
            row,
            id,
            name: own,
            nodes,
            options,
            scope: Rc::clone(scope),
            place,
        };
        self.own_symbols(&waiting);
        Some(waiting)
    }

    fn connect(
        &mut self,
        row: &KindRow,
        device: &str,
        terminals: Vec<Terminal>,
        scope: &Rc<Scope>,
        place: Span,
    ) -> Option<BTreeMap<&'static str, NodeId>> {
        let known: Vec<&'static str> = row
            .terminals
            .iter()
            .copied()
            .chain(row.optional.iter().map(|(terminal, _)| *terminal))
            .collect();
        let mut nodes = BTreeMap::new();
        let mut good = true;
        for terminal in terminals {
            let Some(name) = known.iter().copied().find(|known| *known == terminal.name) else {
                self.error(
                    terminal.place,
                    format!("{} has no terminal {}", row.name, terminal.name),
                    format!(
                        "its terminals are {}; write each with its node: {}",
                        known.join(", "),
                        usage(row)
                    ),
                );
                good = false;
                continue;
            };
            let text = terminal.node.as_ref().map_or(terminal.name.clone(), plain);
            if terminal.node.is_none() && matches!(name, "+" | "-" | "out+" | "out-") {
                self.error(
                    terminal.place,
                    format!("terminal {name} has no node"),
                    format!("write {name} and the node: {}", usage(row)),
                );
                good = false;
                continue;
            }
            let node = if text == "." {
                Some(
                    self.builder
                        .node(format!("({device} {name})"), terminal.place),
                )
            } else {
                self.find_node(&text, scope)
            };
            let Some(node) = node else {
                good = false;
                continue;
            };
            if nodes.insert(name, node).is_some() {
                self.error(
                    terminal.place,
                    format!("terminal {name} is connected twice"),
                    "join the two nodes on a path: a -- b",
                );
                good = false;
            }
        }
        let open: Vec<&str> = row
            .terminals
            .iter()
            .copied()
            .filter(|terminal| !nodes.contains_key(terminal))
            .collect();
        if !open.is_empty() {
            if good {
                self.error(
                    place,
                    format!("terminal {} of {device} is not connected", open.join(", ")),
                    format!("a {} is written {}", row.name, usage(row)),
                );
            }
            return None;
        }
        for &(terminal, default) in row.optional {
            if !nodes.contains_key(terminal) {
                let node = nodes.get(default).copied().unwrap_or(NodeId::GROUND);
                nodes.insert(terminal, node);
            }
        }
        good.then_some(nodes)
    }

    fn check_options(&mut self, row: &KindRow, device: &str, options: &[OptionValue]) {
        let mut seen: Vec<String> = Vec::new();
        for option in options {
            let name = plain(&option.name);
            if !row.options.iter().any(|(known, ..)| *known == name) {
                let known: Vec<&str> = row.options.iter().map(|(known, ..)| *known).collect();
                let help = match nearest(&name, known.iter().copied()) {
                    Some(near) => format!("did you mean {near}?"),
                    None if known.is_empty() => "it has none".to_owned(),
                    None => format!("its options are {}", known.join(", ")),
                };
                self.error(
                    option.name.place,
                    format!("{} has no option {name}", row.name),
                    help,
                );
            } else if seen.contains(&name) {
                self.error(
                    option.name.place,
                    format!("option {name} of {device} is given twice"),
                    "leave one of them out",
                );
            }
            seen.push(name);
        }
    }

    /// Symbols of options that are not given.
    fn own_symbols(&mut self, waiting: &Waiting) {
        let find = |name: &str| {
            waiting
                .options
                .iter()
                .find(|option| plain(&option.name) == name)
        };
        for &(option, default, dimension) in TABLE[waiting.row].options {
            let given = find(option);
            let replaced = (option == "rpi" && find("beta").is_some())
                || (option == "gm" && find("mu").is_some());
            let named = given.is_some_and(|option| option.value.is_none());
            if named || default == Own && given.is_none() && !replaced {
                let name = format!("{option}_{}", waiting.name);
                self.enter(&name, What::Symbol, waiting.place);
                self.new_symbol(&name, Origin::Option, dimension, waiting.place);
            }
        }
    }

    /// The value of an option; `None` where it is left out.
    fn option(&mut self, waiting: &Waiting, option: &str) -> Result<Option<Value>, Reported> {
        let row = &TABLE[waiting.row];
        let Some(&(_, default, dimension)) = row.options.iter().find(|(name, ..)| *name == option)
        else {
            return Ok(None);
        };
        let symbol_name = format!("{option}_{}", waiting.name);
        let given = waiting
            .options
            .iter()
            .find(|given| plain(&given.name) == option)
            .cloned();
        let value = given.as_ref().and_then(|given| given.value.clone());
        let (Some(given), Some(value)) = (given.clone(), value) else {
            if given.is_some() {
                return Ok(self.builder.symbols().find(&symbol_name).map(Value::Symbol));
            }
            return Ok(match default {
                Own => self.builder.symbols().find(&symbol_name).map(Value::Symbol),
                Absent => None,
                One => Some(Value::one()),
            });
        };
        let linear = self.linear(&value, &waiting.scope, VALUES)?;
        if let (Some(found), Some(wanted)) = (linear.dimension, dimension)
            && found != wanted
            && !has_name(&value)
        {
            self.error(
                value.place,
                format!("this unit does not fit {option}"),
                format!("{option} of a {} is {}", row.name, unit_word(wanted)),
            );
            return Err(Reported);
        }
        if let Some(number) = linear.constant.as_rational() {
            return Ok(Some(Value::Number(number)));
        }
        if !has_name(&value) {
            return Err(Reported);
        }
        self.enter(&symbol_name, What::Symbol, given.name.place);
        let symbol = self.new_symbol(&symbol_name, Origin::Option, dimension, given.name.place);
        let right = self.spelled(&value, &waiting.scope);
        let text = format!("{symbol_name} = {right}");
        self.add_relation(vec![(symbol, linear.constant)], text, None, value.place);
        Ok(Some(Value::Symbol(symbol)))
    }

    fn required(&mut self, waiting: &Waiting, option: &str) -> Result<Value, Reported> {
        self.option(waiting, option)?.ok_or(Reported)
    }

    fn part(&mut self, waiting: &Waiting, option: &str, kind: Kind) {
        self.builder.element(Element {
            name: format!("{option}_{}", waiting.name),
            kind,
            device: Some(waiting.id),
            place: waiting.place,
        });
    }

    fn main_part(&mut self, waiting: &Waiting, kind: Kind) {
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

    fn opamp(&mut self, waiting: &Waiting, input: Port, output: Port) -> Result<(), Reported> {
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

    fn bjt(&mut self, waiting: &Waiting) -> Result<(), Reported> {
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

    fn fet(&mut self, waiting: &Waiting) -> Result<(), Reported> {
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

    fn triode(&mut self, waiting: &Waiting) -> Result<(), Reported> {
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
    fn quotient(
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

    /// `T1 is coupling of L1, L2 with k = k12`
    pub(crate) fn coupling(&mut self, statement: &Statement, scope: &Rc<Scope>) {
        let StatementKind::Is {
            names,
            coils,
            options,
            ..
        } = &statement.kind
        else {
            return;
        };
        let (Some(name), [first, second]) = (names.first(), coils.as_slice()) else {
            self.error(
                statement.place,
                "a coupling joins two coils",
                "write T1 is coupling of L1, L2 with k = k12, one line for each pair",
            );
            return;
        };
        let own = scope.own(&plain(name));
        if !self.enter(&own, What::Coupling, name.place) {
            return;
        }
        let (Some(first_id), Some(second_id)) = (self.coil(first, scope), self.coil(second, scope))
        else {
            return;
        };
        if first_id == second_id {
            self.error(
                second.place,
                "a coil cannot couple to itself",
                "name another coil",
            );
            return;
        }
        let Some(strength) = self.strength(&own, options, scope, statement.place) else {
            return;
        };
        self.builder.symbols().intern(&format!("M_{own}"));
        self.builder.coupling(Coupling {
            name: own,
            first: first_id,
            second: second_id,
            strength,
            place: statement.place,
        });
    }

    fn coil(&mut self, name: &Name, scope: &Scope) -> Option<crate::network::ElementId> {
        let own = scope.own(&plain(name));
        match self.names.get(&own).map(|entry| entry.what.clone()) {
            Some(What::Part(id))
                if matches!(self.builder.network().element(id).kind, Kind::Inductor(..)) =>
            {
                Some(id)
            }
            Some(_) => {
                self.error(
                    name.place,
                    format!("{} is no coil", plain(name)),
                    "couplings join inductors",
                );
                None
            }
            None => {
                self.unknown_part(name, scope);
                None
            }
        }
    }

    fn strength(
        &mut self,
        own: &str,
        options: &[OptionValue],
        scope: &Rc<Scope>,
        place: Span,
    ) -> Option<Strength> {
        let option = match options {
            [] => None,
            [option] if matches!(plain(&option.name).as_str(), "k" | "M") => Some(option),
            [option, ..] => {
                self.error(
                    option.name.place,
                    "a coupling has one option, k or M",
                    "write with k = k12 or with M = M12",
                );
                return None;
            }
        };
        let is_mutual = option.is_some_and(|option| plain(&option.name) == "M");
        let (letter, dimension) = if is_mutual {
            ("M", Dimension::HENRY)
        } else {
            ("k", Dimension::NUMBER)
        };
        let symbol_name = format!("{letter}_{own}");
        let value = match option.and_then(|option| option.value.as_ref()) {
            None => {
                self.enter(&symbol_name, What::Symbol, place);
                Value::Symbol(self.new_symbol(&symbol_name, Origin::Option, Some(dimension), place))
            }
            Some(given) => {
                let linear = self.linear(given, scope, VALUES).ok()?;
                match linear.constant.as_rational() {
                    Some(number) => Value::Number(number),
                    None => {
                        self.enter(&symbol_name, What::Symbol, place);
                        let symbol =
                            self.new_symbol(&symbol_name, Origin::Option, Some(dimension), place);
                        let text = format!("{symbol_name} = {}", self.spelled(given, scope));
                        self.add_relation(vec![(symbol, linear.constant)], text, None, given.place);
                        Value::Symbol(symbol)
                    }
                }
            }
        };
        if let Value::Number(number) = &value
            && !is_mutual
            && number.abs() > Rational::one()
        {
            self.messages.push(
                Diagnostic::error(place, "the coupling factor is beyond 1")
                    .help("k lies between -1 and 1"),
            );
            return None;
        }
        Some(if is_mutual {
            Strength::Mutual(value)
        } else {
            Strength::Factor(value)
        })
    }
}

fn unit_word(dimension: Dimension) -> &'static str {
    if dimension == Dimension::OHM {
        "a resistance, in ohms"
    } else if dimension == Dimension::SIEMENS {
        "a conductance, in siemens"
    } else if dimension == Dimension::FARAD {
        "a capacitance, in farads"
    } else if dimension == Dimension::HENRY {
        "an inductance, in henries"
    } else {
        "a plain number"
    }
}

/// How a device is written.
fn usage(row: &KindRow) -> String {
    let list: Vec<String> = row
        .terminals
        .iter()
        .enumerate()
        .map(|(index, terminal)| format!("{terminal} n{}", index + 1))
        .collect();
    format!("U1 is {}({})", row.name, list.join(", "))
}

fn to_ground(node: NodeId) -> Port {
    Port {
        from: node,
        to: NodeId::GROUND,
    }
}

fn control(value: &Value, factor: Rational, port: Port) -> Control {
    Control {
        factor,
        value: value.clone(),
        sense: Sense::Voltage(port),
        gain: true,
    }
}

fn source(quantity: Quantity, port: Port, controls: Vec<Control>) -> Kind {
    Kind::Source(Source {
        quantity,
        port,
        drives: Vec::new(),
        controls,
    })
}
