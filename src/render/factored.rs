//! A function as a product of independent sections, where it factors.

use std::time::Duration;

use crate::algebra::factor::factor;
use crate::algebra::{Polynomial, Symbol};
use crate::analysis::report::Expanded;
use crate::budget::{Budget, Exceeded, Limits};
use crate::render::linear::READING;
use crate::render::math::{self, Math};
use crate::render::names::{Names, natural};

/// The quotient of products, if numerator or denominator has several factors that depend on s.
#[must_use]
pub fn factored(formula: &Expanded, names: &Names<'_>) -> Option<Math> {
    let budget = Budget::new(Limits {
        terms: 5_000,
        states: 0,
        time: Duration::from_secs(2),
    });
    let above = Sections::of(&formula.numerator, names, &budget).ok()?;
    let below = Sections::of(&formula.denominator, names, &budget).ok()?;
    if above.dynamic < 2 && below.dynamic < 2 {
        return None;
    }
    Some(Math::quotient(above.product, below.product))
}

/// One side as a product.
struct Sections {
    product: Math,
    /// Number of factors that depend on s, powers of s alone not counted.
    dynamic: usize,
}

impl Sections {
    fn of(side: &[Polynomial], names: &Names<'_>, budget: &Budget) -> Result<Self, Exceeded> {
        let whole = Polynomial::from_coefficients(Symbol::S, side);
        let found = factor(&whole, budget)?;
        let mut dynamic = 0;
        let mut singles = vec![math::polynomial(
            &Polynomial::constant(found.unit.clone()),
            names,
        )];
        let mut sums = Vec::new();
        for (part, multiplicity) in &found.factors {
            let spelled = math::by_powers_of_s(part, names).power(*multiplicity);
            if part.len() == 1 {
                singles.push(spelled);
            } else {
                dynamic += usize::from(part.contains(Symbol::S)) * *multiplicity as usize;
                sums.push(spelled);
            }
        }
        sums.sort_by(|left: &Math, right| natural(&READING.spell(left), &READING.spell(right)));
        Ok(Self {
            product: Math::product(singles.into_iter().chain(sums)),
            dynamic,
        })
    }
}
