//! The formulas of evidence: quotients, their sides as products of their factors where that is asked.

use std::time::Duration;

use crate::algebra::Polynomial;
use crate::algebra::factor::factor;
use crate::analysis::normal::leading_sign;
use crate::analysis::report::Finding;
use crate::budget::{Budget, Exceeded, Limits};
use crate::render::linear::READING;
use crate::render::math::{self, Math};
use crate::render::names::{Names, natural};

/// What factors of one line of evidence may cost.
const LIMITS: Limits = Limits {
    terms: 5_000,
    states: 0,
    time: Duration::from_secs(1),
};

/// The formula of a line of evidence.
#[must_use]
pub fn finding(finding: &Finding, names: &Names<'_>) -> Option<Math> {
    let (above, below) = finding.formula.as_ref()?;
    if !finding.as_product || above.is_zero() {
        return Some(math::ratio(above, below, names));
    }
    let budget = Budget::new(LIMITS);
    let side = |polynomial: &Polynomial| {
        product(polynomial, names, &budget).unwrap_or_else(|_| math::polynomial(polynomial, names))
    };
    Some(Math::quotient(side(above), side(below)))
}

/// A polynomial as the product of its factors, each with a positive leading term.
fn product(polynomial: &Polynomial, names: &Names<'_>, budget: &Budget) -> Result<Math, Exceeded> {
    let found = factor(polynomial, budget)?;
    let mut single = Polynomial::constant(found.unit.clone());
    let mut sums = Vec::new();
    for (part, multiplicity) in &found.factors {
        if part.len() == 1 {
            single = &single * &part.pow(*multiplicity);
            continue;
        }
        let negative = leading_sign(part, names.table()) < 0;
        if negative && multiplicity % 2 == 1 {
            single = -single;
        }
        let part = if negative {
            -part.clone()
        } else {
            part.clone()
        };
        sums.push(math::by_powers_of_s(&part, names).power(*multiplicity));
    }
    sums.sort_by(|left: &Math, right| natural(&READING.spell(left), &READING.spell(right)));
    let single = math::polynomial(&single, names);
    Ok(Math::product(std::iter::once(single).chain(sums)))
}
