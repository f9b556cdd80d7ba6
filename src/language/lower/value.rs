//! Free symbols, nominals, tolerances, ranges, assumptions.

use std::rc::Rc;

use crate::algebra::{Fraction, Rational};
use crate::language::expand::{Scope, plain};
use crate::language::lower::expression::{Reported, VALUES};
use crate::language::lower::{Lowering, Nominal, What};
use crate::language::nearest::nearest;
use crate::language::parser::value as parse_value;
use crate::language::syntax::{
    Compare, Deviation, Expression, Listed, Literal, Name, PartValue, Statement, StatementKind,
};
use crate::network::{
    Assumption, Comparison, Dimension, Drive, Origin, Range, Sign, SymbolFacts, Tolerance,
};
use crate::source::Span;

impl Lowering<'_> {
    /// Enters free symbols, drives and the names that relations set.
    pub(crate) fn introduce(&mut self, statements: &[(Statement, Rc<Scope>)]) {
        for (statement, scope) in statements {
            match &statement.kind {
                StatementKind::Free {
                    names,
                    real,
                    within,
                    ..
                } => {
                    for name in names {
                        self.free(name, *real, within.as_ref(), scope);
                    }
                }
                StatementKind::Drive(names) => {
                    for name in names {
                        self.reserved(&plain(name), name.place);
                        let own = scope.own(&plain(name));
                        let drive = self.builder.drive(Drive {
                            name: own.clone(),
                            quantity: None,
                            place: name.place,
                        });
                        self.drive_ids.insert(own.clone(), drive);
                        self.enter(&own, What::Drive(drive), name.place);
                    }
                }
                _ => {}
            }
        }
        self.introduce_listed(statements);
        self.introduce_sets();
    }

    fn free(
        &mut self,
        name: &Name,
        real: bool,
        within: Option<&(Literal, Literal)>,
        scope: &Scope,
    ) {
        let text = plain(name);
        self.reserved(&text, name.place);
        if matches!(text.as_str(), "s" | "pi") {
            self.error(
                name.place,
                format!("{text} has a meaning of its own in expressions"),
                "choose another name",
            );
            return;
        }
        let own = scope.own(&text);
        if !self.enter(&own, What::Symbol, name.place) {
            return;
        }
        let symbol = self.new_symbol(&own, Origin::Free, None, name.place);
        let Some(facts) = self.builder.facts_mut(symbol) else {
            return;
        };
        if real {
            facts.sign = Sign::Real;
        }
        if let Some((low, high)) = within {
            facts.sign = Sign::Within(Range {
                low: Some(low.value.clone()),
                high: Some(high.value.clone()),
            });
            facts.dimension = low.dimension.or(high.dimension);
            if low.value >= high.value {
                self.error(
                    high.place,
                    "this range is empty",
                    "write the lower end first",
                );
            }
        }
    }

    /// Names of the parts list that are nothing else yet are symbols for relations.
    fn introduce_listed(&mut self, statements: &[(Statement, Rc<Scope>)]) {
        for (statement, scope) in statements {
            let StatementKind::Parts(listed, _) = &statement.kind else {
                continue;
            };
            for item in listed {
                let Listed::One(name) = item else {
                    continue;
                };
                let own = scope.own(&plain(name));
                self.reserved(&plain(name), name.place);
                let is_parameter = scope.parameters.contains_key(&plain(name));
                let is_inner = own
                    .rsplit_once('.')
                    .and_then(|(instance, parameter)| {
                        let inner = self.instances.get(instance)?;
                        Some(inner.parameters.contains_key(parameter))
                    })
                    .unwrap_or(false);
                if self.names.contains_key(&own) || is_parameter || is_inner {
                    continue;
                }
                self.enter(&own, What::Symbol, name.place);
                self.new_symbol(&own, Origin::Free, None, name.place);
            }
        }
    }

    fn introduce_sets(&mut self) {
        let sets: Vec<(String, Span)> = self
            .relations
            .iter()
            .map(|relation| (relation.left.clone(), relation.left_place))
            .collect();
        for (name, place) in sets {
            if !self.names.contains_key(&name) {
                self.reserved(&name, place);
                self.names.insert(
                    name.clone(),
                    crate::language::lower::Entry {
                        what: What::Set,
                        place,
                    },
                );
                self.new_symbol(&name, Origin::Free, None, place);
            }
        }
    }

    /// Nominals from paths, from the parts list, from `free a : 1` and from `--set`.
    pub(crate) fn set_nominals(&mut self, statements: &[(Statement, Rc<Scope>)]) {
        let mut list: Vec<Nominal> = Vec::new();
        for raw in &self.raw_parts {
            if let Some(value) = &raw.value {
                list.push(Nominal {
                    name: raw.name.clone(),
                    value: value.clone(),
                    place: raw.place,
                    scope: Rc::clone(&raw.scope),
                });
            }
        }
        for (statement, scope) in statements {
            match &statement.kind {
                StatementKind::Parts(listed, value) => {
                    for item in listed {
                        for (name, place) in self.listed(item, scope) {
                            list.push(Nominal {
                                name,
                                value: value.clone(),
                                place,
                                scope: Rc::clone(scope),
                            });
                        }
                    }
                }
                StatementKind::Free {
                    names,
                    value: Some(value),
                    ..
                } => {
                    for name in names {
                        list.push(Nominal {
                            name: scope.own(&plain(name)),
                            value: value.clone(),
                            place: name.place,
                            scope: Rc::clone(scope),
                        });
                    }
                }
                _ => {}
            }
        }
        for nominal in list {
            self.nominal(&nominal, false);
        }
        self.override_nominals();
    }

    fn override_nominals(&mut self) {
        let set = self.set;
        for (name, text) in set {
            if self.set_done.contains(name) {
                continue;
            }
            let place = self
                .builder
                .network()
                .node(crate::network::NodeId::GROUND)
                .place;
            match parse_value(place, text) {
                Ok(value) if self.names.contains_key(name) => {
                    let nominal = Nominal {
                        name: name.clone(),
                        value,
                        place,
                        scope: Rc::new(Scope::default()),
                    };
                    self.nominal(&nominal, true);
                }
                Ok(_) => {
                    let near = nearest(name, self.names.keys().map(String::as_str));
                    let help = near.map_or_else(
                        || "names of parts, free symbols and let can be set".to_owned(),
                        |near| format!("did you mean {near}?"),
                    );
                    let message = format!("--set {name}={text}: there is no {name}");
                    self.messages
                        .push(crate::diagnostic::Diagnostic::whole(message).help(help));
                }
                Err(_) => {
                    let message = format!("--set {name}={text}: {text} is not a value");
                    self.messages.push(
                        crate::diagnostic::Diagnostic::whole(message)
                            .help("write a number with its unit, such as --set R1=4k7"),
                    );
                }
            }
        }
    }

    /// The names of one item of a parts list: `R1 .. R8` counts.
    fn listed(&mut self, item: &Listed, scope: &Scope) -> Vec<(String, Span)> {
        match item {
            Listed::One(name) => vec![(scope.own(&plain(name)), name.place)],
            Listed::Span(first, last) => {
                let split = |text: &str| -> Option<(String, u64)> {
                    let head = text.trim_end_matches(|c: char| c.is_ascii_digit());
                    Some((head.to_owned(), text[head.len()..].parse().ok()?))
                };
                let (a, b) = (plain(first), plain(last));
                let place = first.place.to(last.place);
                let (Some((head, from)), Some((other, to))) = (split(&a), split(&b)) else {
                    self.error(place, "these names do not count up", "write R1 .. R8");
                    return Vec::new();
                };
                if head != other || from > to || to - from > 10_000_000 {
                    self.error(place, "these names do not count up", "write R1 .. R8");
                    return Vec::new();
                }
                (from..=to)
                    .map(|number| (scope.own(&format!("{head}{number}")), place))
                    .collect()
            }
        }
    }

    fn nominal(&mut self, nominal: &Nominal, replace: bool) {
        let name = &nominal.name;
        if !self.names.contains_key(name) {
            // The parameter of an instance gets its symbol when it is first used.
            if let Some((instance, parameter)) = name.rsplit_once('.')
                && let Some(inner) = self.instances.get(instance).cloned()
                && inner.parameters.contains_key(parameter)
            {
                let own = Name {
                    parts: vec![crate::language::syntax::NamePart::Text(
                        parameter.to_owned(),
                    )],
                    place: nominal.place,
                };
                let expression = Expression {
                    node: crate::language::syntax::ExpressionNode::Name(own),
                    place: nominal.place,
                };
                let _ = self.linear(&expression, &inner, VALUES);
            }
        }
        if self.drive_ids.contains_key(name)
            && matches!(
                self.names.get(name).map(|entry| &entry.what),
                Some(What::Drive(_))
            )
        {
            return;
        }
        let Some(symbol) = self.builder.symbols().find(name) else {
            let near = nearest(name, self.names.keys().map(String::as_str));
            let help = near.map_or_else(
                || format!("place it on a path: a -{name}- b"),
                |near| format!("did you mean {near}?"),
            );
            self.warning(nominal.place, format!("{name} stands nowhere else"), help);
            return;
        };
        let Some(facts) = self.builder.network().facts(symbol).cloned() else {
            self.error(
                nominal.place,
                format!("{name} has no value"),
                "nominal values belong to parts and symbols",
            );
            return;
        };
        if facts.nominal.is_some() && !replace && facts.origin != Origin::Parameter {
            self.error(
                nominal.place,
                format!("{name} has two nominal values"),
                "leave one of them out",
            );
            return;
        }
        let before = self.messages.len();
        self.check_unit(&nominal.value, &facts, name);
        self.check_sign(&nominal.value, &facts, name);
        if self.messages.len() > before {
            self.through(&nominal.scope);
        }
        let tolerance = self.tolerance(&nominal.value);
        let range = nominal.value.range.as_ref().map(|(low, high)| Range {
            low: Some(low.value.clone()),
            high: Some(high.value.clone()),
        });
        let Some(target) = self.builder.facts_mut(symbol) else {
            return;
        };
        if let Some(literal) = &nominal.value.nominal {
            target.nominal = Some(literal.value.clone());
            target.in_hertz = literal.in_hertz;
            target.dimension = target.dimension.or(literal.dimension);
        } else if let Some((low, _)) = &nominal.value.range {
            target.dimension = target.dimension.or(low.dimension);
        }
        if tolerance.is_some() {
            target.tolerance = tolerance;
        }
        if range.is_some() {
            target.range = range;
        }
    }

    fn check_unit(&mut self, value: &PartValue, facts: &SymbolFacts, name: &str) {
        let Some(wanted) = facts.dimension else {
            return;
        };
        let literals = value
            .nominal
            .iter()
            .chain(value.range.iter().flat_map(|(low, high)| [low, high]));
        for literal in literals.cloned().collect::<Vec<_>>() {
            if let Some(found) = literal.dimension
                && found != wanted
            {
                self.error(
                    literal.place,
                    format!("this unit does not fit {name}"),
                    format!("{name} is {}", unit_of(wanted)),
                );
                return;
            }
        }
    }

    fn check_sign(&mut self, value: &PartValue, facts: &SymbolFacts, name: &str) {
        let passive = facts.origin == Origin::Part && facts.sign == Sign::Positive;
        let Some(literal) = &value.nominal else {
            return;
        };
        if passive && literal.value.signum() <= 0 {
            let what = if literal.value.is_zero() {
                "zero"
            } else {
                "negative"
            };
            self.error(
                literal.place,
                format!("the nominal of {name} is {what}"),
                format!(
                    "join the nodes by a -- b, leave the part out, or use a free … real symbol or a relation such as {name} = -Rn"
                ),
            );
        }
        if let Some((low, high)) = &value.range
            && low.value > high.value
        {
            self.error(
                high.place,
                "this range is empty",
                "write the lower end first",
            );
        }
    }

    fn tolerance(&mut self, value: &PartValue) -> Option<Tolerance> {
        let Deviation { up, down } = value.deviation.as_ref()?;
        let nominal = value.nominal.as_ref()?;
        let mut relative = |literal: &Literal| -> Option<Rational> {
            let size = literal.value.abs();
            if literal.percent {
                return Some(size);
            }
            let inverse = nominal.value.abs().recip();
            if inverse.is_none() {
                self.error(
                    literal.place,
                    "a tolerance in units needs a nominal",
                    "write ± 1 %",
                );
            }
            Some(&size * &inverse?)
        };
        Some(Tolerance {
            up: relative(up)?,
            down: relative(down)?,
        })
    }

    pub(crate) fn relative_tolerance(&mut self, deviation: &Deviation) -> Option<Tolerance> {
        if deviation.up.percent && deviation.down.percent {
            return Some(Tolerance {
                up: deviation.up.value.abs(),
                down: deviation.down.value.abs(),
            });
        }
        self.error(
            deviation.up.place,
            "the tolerance of a relation is stated in per cent",
            "write R2 = R1 ± 0.1 %",
        );
        None
    }

    pub(crate) fn assume(
        &mut self,
        first: &Expression,
        chain: Vec<(Compare, Expression)>,
        scope: &Rc<Scope>,
        place: Span,
    ) {
        let Ok(mut left) = self.fraction(first, scope) else {
            return;
        };
        let mut left_text = self.spelled(first, scope);
        for (sign, expression) in chain {
            let Ok(right) = self.fraction(&expression, scope) else {
                return;
            };
            let right_text = self.spelled(&expression, scope);
            let (word, larger_left, strict) = match sign {
                Compare::Less => ("<", false, true),
                Compare::LessOrEqual => ("<=", false, false),
                Compare::Greater => (">", true, true),
                Compare::GreaterOrEqual => (">=", true, false),
            };
            let difference: Result<Fraction, Reported> = {
                let (a, b) = if larger_left {
                    (&left, &right)
                } else {
                    (&right, &left)
                };
                a.sub(b, &self.budget).map_err(|_| Reported)
            };
            if let Ok(difference) = difference {
                self.builder.assumption(Assumption {
                    difference,
                    comparison: if strict {
                        Comparison::Positive
                    } else {
                        Comparison::NonNegative
                    },
                    text: format!("{left_text} {word} {right_text}"),
                    place,
                });
            }
            left = right;
            left_text = right_text;
        }
    }

    pub(crate) fn warn_unused(&mut self) {
        let unused: Vec<(String, Span, Origin)> = self
            .names
            .iter()
            .filter(|(name, entry)| {
                matches!(entry.what, What::Symbol) && !self.used.contains(*name)
            })
            .filter_map(|(name, entry)| {
                let network = self.builder.network();
                let symbol = network.symbols().find(name)?;
                let origin = network.facts(symbol)?.origin;
                (origin == Origin::Free).then(|| (name.clone(), entry.place, origin))
            })
            .collect();
        for (name, place, _) in unused {
            let known: Vec<String> = self
                .names
                .iter()
                .filter(|(other, entry)| **other != name && matches!(entry.what, What::Part(_)))
                .map(|(other, _)| other.clone())
                .collect();
            let near = nearest(&name, known.iter().map(String::as_str));
            let help = near.map_or_else(
                || "take it out, or use it in a relation".to_owned(),
                |near| format!("did you mean {near}?"),
            );
            self.warning(place, format!("{name} stands nowhere else"), help);
        }
    }
}

/// The unit of a part in words.
pub(crate) fn unit_of(dimension: Dimension) -> &'static str {
    if dimension == Dimension::OHM {
        "a resistance: use Ω or ohm"
    } else if dimension == Dimension::FARAD {
        "a capacitance: use F"
    } else if dimension == Dimension::HENRY {
        "an inductance: use H"
    } else if dimension == Dimension::SIEMENS {
        "a conductance: use S"
    } else if dimension == Dimension::VOLT {
        "a voltage: use V"
    } else if dimension == Dimension::AMPERE {
        "a current: use A"
    } else {
        "of another dimension"
    }
}
