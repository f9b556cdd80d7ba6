//! Nominal values as they stand beside a symbol: four digits and an SI prefix.

use crate::algebra::{Integer, Rational};
use crate::network::{Dimension, Network, Value};

const PREFIXES: [(&str, i32); 12] = [
    ("a", -18),
    ("f", -15),
    ("p", -12),
    ("n", -9),
    ("µ", -6),
    ("m", -3),
    ("", 0),
    ("k", 3),
    ("M", 6),
    ("G", 9),
    ("T", 12),
    ("P", 15),
];

/// The nominal of a value with its unit; `None` where it has none.
pub(super) fn nominal(network: &Network, value: &Value) -> Option<String> {
    let Value::Symbol(symbol) = value else {
        return None;
    };
    let facts = network.facts(*symbol)?;
    let unit = facts.dimension.map_or("", unit);
    Some(spell(facts.nominal.as_ref()?, unit))
}

fn unit(dimension: Dimension) -> &'static str {
    let known = [
        (Dimension::OHM, "Ω"),
        (Dimension::SIEMENS, "S"),
        (Dimension::FARAD, "F"),
        (Dimension::HENRY, "H"),
        (Dimension::VOLT, "V"),
        (Dimension::AMPERE, "A"),
    ];
    known
        .iter()
        .find(|(it, _)| *it == dimension)
        .map_or("", |(_, unit)| unit)
}

fn spell(value: &Rational, unit: &str) -> String {
    let ten = |exponent: i32| {
        Rational::from(10_i64)
            .pow(exponent)
            .unwrap_or_else(Rational::one)
    };
    let size = value.abs();
    let (prefix, exponent) = PREFIXES
        .into_iter()
        .rev()
        .find(|(_, exponent)| size >= ten(*exponent))
        .unwrap_or(if size.is_zero() { ("", 0) } else { PREFIXES[0] });
    let scaled = &size * &ten(3 - exponent);
    let whole = scaled.numerator().div_floor(scaled.denominator());
    let exact = scaled.is_integer();
    let (above, below) = whole.div_rem(&Integer::from(1000_i64));
    let digits = format!("{:0>3}", below.to_string());
    let digits = digits.trim_end_matches('0');
    let sign = if value.signum() < 0 { "−" } else { "" };
    let about = if exact { "" } else { "≈ " };
    let point = if digits.is_empty() { "" } else { "." };
    format!("{about}{sign}{above}{point}{digits} {prefix}{unit}")
        .trim_end()
        .to_owned()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn values_stand_with_a_prefix() {
        let ratio = |a: i64, b: i64| Rational::new(Integer::from(a), Integer::from(b)).unwrap();
        assert_eq!(spell(&ratio(4700, 1), "Ω"), "4.7 kΩ");
        assert_eq!(spell(&ratio(47, 10_000_000_000), "F"), "4.7 nF");
        assert_eq!(spell(&ratio(1, 3), "V"), "≈ 333.333 mV");
        assert_eq!(spell(&ratio(0, 1), "A"), "0 A");
        assert_eq!(spell(&ratio(-5, 1), ""), "−5");
    }
}
