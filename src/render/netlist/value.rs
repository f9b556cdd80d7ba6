//! Values: relations, nominals, free symbols, definitions of made parts.

use std::collections::BTreeSet;

use crate::algebra::{Integer, Rational, Symbol};
use crate::analysis::equivalent::{Class, Definition, PartId};
use crate::network::{Origin, Range, Sign, Value};
use crate::render::linear::MACHINE;
use crate::render::math::Math;
use crate::render::names::natural;
use crate::render::netlist::Writer;

/// What has to be said of symbols.
#[derive(Default)]
pub(super) struct Values {
    /// Lines of the text.
    pub(super) lines: Vec<String>,
    free: Vec<String>,
    needed: Vec<Symbol>,
    seen: BTreeSet<Symbol>,
    /// Symbols that are the value of a part that stands in the text.
    own: BTreeSet<Symbol>,
    made: BTreeSet<PartId>,
}

impl Values {
    pub(super) fn need(&mut self, symbol: Symbol) {
        if symbol != Symbol::S && symbol != Symbol::PI && self.seen.insert(symbol) {
            self.needed.push(symbol);
        }
    }
}

impl Writer<'_> {
    /// States the class of a part where its first letter does not.
    pub(super) fn kind(&mut self, name: &str, class: Class) {
        let word = match class {
            Class::Conductance => "conductance",
            Class::Resistor => "resistor",
            Class::Capacitor => "capacitor",
            Class::Inductor => "inductor",
            Class::Impedance => "impedance",
            Class::Admittance => "admittance",
        };
        if class == Class::Conductance || !name.starts_with(class.letter()) {
            self.kinds.push(format!("{name} is {word}"));
        }
    }

    /// The value of a part on a path.
    pub(super) fn part_value(&mut self, id: PartId, name: &str) {
        match self.circuit.parts[id].definition.clone() {
            Definition::Given(_, value) => self.own_value(name, &value),
            Definition::Sum(_) | Definition::Parallel(_) | Definition::Side(_) => self.made(id),
        }
    }

    /// The value of a part that bears a name.
    pub(super) fn own_value(&mut self, name: &str, value: &Value) {
        match value {
            Value::Symbol(symbol) if self.names.name(*symbol) == name => {
                self.values.own.insert(*symbol);
                self.values.need(*symbol);
            }
            Value::Symbol(symbol) => {
                self.values.need(*symbol);
                let line = format!("{name} = {}", self.names.name(*symbol));
                self.values.lines.push(line);
            }
            Value::Number(number) => {
                let line = format!("{name} = exactly {number}");
                self.values.lines.push(line);
            }
        }
    }

    fn made(&mut self, id: PartId) {
        let mut waiting = vec![(id, false)];
        while let Some((id, ready)) = waiting.pop() {
            let part = &self.circuit.parts[id];
            if ready {
                let math = definition(&part.definition, part.class, &mut |member| {
                    self.operand(member)
                });
                let line = format!("{} = {}", self.name(&part.name), MACHINE.spell(&math));
                self.values.lines.push(line);
            } else if !matches!(part.definition, Definition::Given(..))
                && self.values.made.insert(id)
            {
                waiting.push((id, true));
                let members = part.definition.members();
                waiting.extend(members.iter().rev().map(|&it| (it, false)));
            }
        }
    }

    fn operand(&mut self, id: PartId) -> Math {
        let part = &self.circuit.parts[id];
        match &part.definition {
            Definition::Given(_, Value::Symbol(symbol)) => {
                self.values.need(*symbol);
                Math::name(self.names.name(*symbol))
            }
            Definition::Given(_, Value::Number(number)) => number_math(number),
            _ => Math::name(&self.name(&part.name)),
        }
    }

    /// Says what is left to say of every symbol that stands somewhere.
    pub(super) fn define(&mut self) {
        let mut next = 0;
        while let Some(&symbol) = self.values.needed.get(next) {
            next += 1;
            let facts = self.network.facts(symbol);
            if facts.is_some_and(|facts| facts.origin == Origin::Derived) {
                continue;
            }
            let name = self.names.name(symbol).to_owned();
            let own = self.values.own.contains(&symbol);
            if let Some(id) = self.network.set_by(symbol) {
                let value = self.network.relation(id).sets.iter();
                let value = value.clone().find(|(set, _)| *set == symbol);
                if let Some((_, value)) = value {
                    let number = value.as_rational().is_some();
                    let word = if number { "exactly " } else { "" };
                    let line = format!("{name} = {word}{}", self.fraction(&value.clone()));
                    self.values.lines.push(line);
                }
                continue;
            }
            let nominal = facts
                .and_then(|facts| facts.nominal.as_ref())
                .and_then(decimal);
            let sign = facts.map_or(String::new(), |facts| match &facts.sign {
                Sign::Positive => String::new(),
                Sign::Real => " real".to_owned(),
                Sign::Within(range) => within(range),
            });
            match (own, nominal) {
                (true, Some(nominal)) => self.values.lines.push(format!("{name} : {nominal}")),
                (true, None) => {}
                (false, nominal) => {
                    if sign.is_empty() {
                        self.values.free.push(name.clone());
                    } else {
                        self.values.lines.push(format!("free {name}{sign}"));
                    }
                    if let Some(nominal) = nominal {
                        self.values.lines.push(format!("{name} : {nominal}"));
                    }
                }
            }
        }
        let mut free = std::mem::take(&mut self.values.free);
        free.sort_by(|left, right| natural(left, right));
        for names in free.chunks(10) {
            let line = format!("free {}", names.join(", "));
            self.values.lines.push(line);
        }
    }
}

fn within(range: &Range) -> String {
    let end = |end: &Option<Rational>| end.as_ref().and_then(decimal);
    match (end(&range.low), end(&range.high)) {
        (Some(low), Some(high)) => format!(" in {low} .. {high}"),
        _ => " real".to_owned(),
    }
}

/// A number in the tree of expressions.
pub(in crate::render) fn number_math(number: &Rational) -> Math {
    Math::quotient(
        Math::integer(number.numerator()),
        Math::integer(number.denominator()),
    )
}

/// A value over its members.
pub(in crate::render) fn definition(
    definition: &Definition,
    class: Class,
    operand: &mut dyn FnMut(PartId) -> Math,
) -> Math {
    let mut all = |members: &[PartId]| -> Vec<Math> {
        members.iter().map(|&member| operand(member)).collect()
    };
    match definition {
        Definition::Given(..) => Math::Number(Integer::one()),
        Definition::Sum(members) => Math::sum(all(members)),
        Definition::Parallel(members) => Math::Parallel(all(members)),
        Definition::Side(members) => {
            let list = all(members);
            let [x, y, z] = list.as_slice() else {
                return Math::Number(Integer::one());
            };
            let product = Math::product([x.clone(), y.clone()]);
            if class.adds_in_series() {
                let through = Math::quotient(product, z.clone());
                Math::sum([x.clone(), y.clone(), through])
            } else {
                Math::quotient(product, Math::sum(list))
            }
        }
    }
}

/// A decimal number with an exponent that is a multiple of three, where it terminates within reason.
fn decimal(number: &Rational) -> Option<String> {
    let mut value = number.clone();
    for places in 0..40_i32 {
        if value.is_integer() {
            return Some(engineering(&value.numerator().to_string(), -places));
        }
        value = &value * &Rational::from(Integer::from(10));
    }
    None
}

/// `digits · 10^exponent`, one to three digits before the point.
fn engineering(digits: &str, exponent: i32) -> String {
    let (sign, all) = digits
        .strip_prefix('-')
        .map_or(("", digits), |rest| ("-", rest));
    let short = all.trim_end_matches('0');
    if short.is_empty() {
        return "0".to_owned();
    }
    let length = i32::try_from(all.len()).unwrap_or(i32::MAX);
    let highest = length + exponent - 1;
    let thousands = highest.div_euclid(3) * 3;
    let before = usize::try_from(highest - thousands + 1).unwrap_or(1);
    let mut text = format!("{sign}{short:0<before$}");
    if short.len() > before {
        text.insert(sign.len() + before, '.');
    }
    if thousands != 0 {
        text.push_str(&format!("e{thousands}"));
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn numbers_have_exponents_in_threes() {
        let of = |above: i64, below: i64| {
            decimal(&Rational::new(Integer::from(above), Integer::from(below)).unwrap())
        };
        assert_eq!(of(10_000, 1).as_deref(), Some("10e3"));
        assert_eq!(of(470_000, 1).as_deref(), Some("470e3"));
        assert_eq!(of(117, 100).as_deref(), Some("1.17"));
        assert_eq!(of(-22, 10_000_000_000).as_deref(), Some("-2.2e-9"));
        assert_eq!(of(600, 1).as_deref(), Some("600"));
        assert_eq!(of(0, 1).as_deref(), Some("0"));
        assert_eq!(of(1, 3), None);
    }
}
