//! Devices taken apart into parts, by one table of kinds, terminals and options.

mod build;
mod coupling;

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
