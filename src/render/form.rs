//! Proven forms as expressions: the order of terms and factors is decided here, nothing else.

use std::cmp::Ordering;

use crate::algebra::Symbol;
use crate::analysis::form::Form;
use crate::render::linear::READING;
use crate::render::math::Math;
use crate::render::names::{Names, natural};

/// A form with its members in the order in which they are written.
///
/// Terms: numbers, single symbols, then longer ones, by name. Factors: numbers, then by their first
/// symbol as [`Names::by_reading`] orders them.
#[must_use]
pub fn math(form: &Form, names: &Names<'_>) -> Math {
    match form {
        Form::Number(number) => Math::integer(number),
        Form::Symbol(symbol) => Math::name(names.name(*symbol)),
        Form::Sum(parts) => {
            let terms = sorted(parts, |left, right| by_length(left, right, names), names);
            Math::sum(terms).positive_first()
        }
        Form::Product(parts) => Math::product(sorted(
            parts,
            |left, right| by_first_symbol(&left.0, &right.0, names),
            names,
        )),
        Form::Parallel(parts) => Math::Parallel(sorted(
            parts,
            |left, right| by_length(left, right, names),
            names,
        )),
        Form::Quotient(above, below) => Math::quotient(math(above, names), math(below, names)),
        Form::Power(base, exponent) => math(base, names).power(*exponent),
        Form::Root(inner) => Math::Root(Box::new(math(inner, names))),
        Form::Negative(inner) => math(inner, names).signed(true),
    }
}

type Part = (Form, Math);

fn sorted(
    parts: &[Form],
    order: impl Fn(&Part, &Part) -> Ordering,
    names: &Names<'_>,
) -> Vec<Math> {
    let mut list: Vec<Part> = parts
        .iter()
        .map(|part| (part.clone(), math(part, names)))
        .collect();
    list.sort_by(order);
    list.into_iter().map(|(_, math)| math).collect()
}

fn by_length(left: &Part, right: &Part, names: &Names<'_>) -> Ordering {
    let rank = |(form, math): &Part| match form {
        Form::Number(_) => 0,
        _ => math.leaves(),
    };
    rank(left)
        .cmp(&rank(right))
        .then_with(|| by_first_symbol(&left.0, &right.0, names))
        .then_with(|| natural(&READING.spell(&left.1), &READING.spell(&right.1)))
}

/// Numbers in front, then by the symbol that is read first.
fn by_first_symbol(left: &Form, right: &Form, names: &Names<'_>) -> Ordering {
    let is_root = |form: &Form| matches!(form, Form::Root(_));
    let is_sum = |form: &Form| matches!(form, Form::Sum(_));
    // A sum that begins with a number stands in front only where it is short: (1 + A0)·Rf.
    let is_long_sum =
        |form: &Form| is_sum(form) && form.length().0 > 3 && first(form, names).is_none();
    match (first(left, names), first(right, names)) {
        _ if is_root(left) != is_root(right) => is_root(left).cmp(&is_root(right)),
        _ if is_long_sum(left) != is_long_sum(right) => is_long_sum(left).cmp(&is_long_sum(right)),
        (None, None) => is_sum(left).cmp(&is_sum(right)),
        (Some(left), Some(right)) => names.by_reading(left, right),
        (left, right) => left.is_some().cmp(&right.is_some()),
    }
}

fn first(form: &Form, names: &Names<'_>) -> Option<Symbol> {
    let firsts = |parts: &[Form]| -> Vec<Option<Symbol>> {
        parts.iter().map(|part| first(part, names)).collect()
    };
    let by_reading = |left: &Symbol, right: &Symbol| names.by_reading(*left, *right);
    match form {
        Form::Number(_) => None,
        Form::Symbol(symbol) => Some(*symbol),
        Form::Product(parts) => firsts(parts).into_iter().flatten().min_by(by_reading),
        Form::Sum(parts) | Form::Parallel(parts) => {
            // The shortest term tells what kind of quantity it is.
            let shortest = parts.iter().map(|part| part.length().0).min();
            let short = parts
                .iter()
                .filter(|part| Some(part.length().0) == shortest);
            let symbols: Vec<_> = short.map(|part| first(part, names)).collect();
            if symbols.contains(&None) {
                return None;
            }
            symbols.into_iter().flatten().min_by(by_reading)
        }
        Form::Quotient(above, below) => first(above, names).or_else(|| first(below, names)),
        Form::Power(inner, _) | Form::Root(inner) | Form::Negative(inner) => first(inner, names),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::algebra::{Fraction, Polynomial};
    use crate::analysis::form::shortest;
    use crate::budget::Budget;
    use crate::network::sketch::Sketch;
    use crate::render::names::FrequencyPlace;

    type Make = fn(&dyn Fn(&str) -> Polynomial) -> [Polynomial; 2];

    fn spelled(make: Make) -> String {
        let names = ["R1", "R2", "R3", "R4", "G1", "L1", "L2", "C1", "C2", "C3"];
        let text: Vec<String> = names.iter().map(|it| format!("{it} a ground")).collect();
        let network = Sketch::of(&text.join("; ")).finish();
        let budget = Budget::unlimited();
        let symbol = |name: &str| match name {
            "1" => Polynomial::one(),
            name => Polynomial::symbol(network.symbols().find(name).expect("known")),
        };
        let [above, below] = make(&symbol);
        let fraction = Fraction::new(above, below, &budget).expect("no budget");
        let fraction = fraction.expect("not by zero");
        let form = shortest(&network, &fraction, &budget).expect("no budget");
        assert_eq!(form.value(&budget), Ok(Some(fraction)));
        READING.spell(&math(&form, &Names::new(&network, FrequencyPlace::First)))
    }

    #[test]
    fn parts_in_parallel_and_in_series_come_out_whole() {
        let cases: [(Make, &str); 9] = [
            (
                |it| [&(&it("R1") * &it("R2")) * &it("C1"), &it("R1") + &it("R2")],
                "(R1 ∥ R2)·C1",
            ),
            (
                |it| {
                    let (r1, r2, r3) = (it("R1"), it("R2"), it("R3"));
                    let pairs = &(&r1 * &r2) + &(&(&r1 * &r3) + &(&r2 * &r3));
                    [&(&r1 * &r2) * &r3, pairs]
                },
                "R1 ∥ R2 ∥ R3",
            ),
            (
                |it| {
                    let (r1, r2, r3) = (it("R1"), it("R2"), it("R3"));
                    let pairs = &(&r1 * &r2) + &(&(&r1 * &r3) + &(&r2 * &r3));
                    [&pairs * &it("C1"), &r1 + &r2]
                },
                "(R3 + R1 ∥ R2)·C1",
            ),
            (|it| [it("R2"), &it("R1") + &it("R2")], "R2/(R1 + R2)"),
            (|it| [&it("R1") + &it("R2"), it("R1")], "1 + R2/R1"),
            (
                |it| [it("R1"), &it("1") + &(&it("G1") * &it("R1"))],
                "R1 ∥ (1/G1)",
            ),
            (
                |it| {
                    let sum = &(&it("C1") + &it("C2")) * &(&it("R1") + &it("R2"));
                    [
                        &(&(&sum + &(&it("R1") * &it("C3"))) * &it("L1")) * &it("L2"),
                        &it("L1") + &it("L2"),
                    ]
                },
                "(R1·C3 + (R1 + R2)·(C1 + C2))·(L1 ∥ L2)",
            ),
            (
                |it| {
                    let first = &(&it("R1") * &it("R2")) * &it("C1");
                    let second = &(&it("R1") + &it("R2")) * &(&it("R3") * &it("C2"));
                    [&first + &second, &it("R1") + &it("R2")]
                },
                "R3·C2 + (R1 ∥ R2)·C1",
            ),
            (
                |it| [&it("C1") * &it("C2"), &it("C1") + &it("C2")],
                "C1·C2/(C1 + C2)",
            ),
        ];
        for (make, expected) in cases {
            assert_eq!(spelled(make), expected);
        }
    }
}
