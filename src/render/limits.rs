//! Low- and high-frequency limits of a function.

use crate::algebra::{Fraction, Polynomial};
use crate::analysis::report::Expanded;
use crate::budget::Budget;
use crate::render::math::Math;
use crate::render::names::Names;
use crate::render::parallel;

/// Where a function tends.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Limit {
    /// To a value.
    Value(Math),
    /// Beyond all bounds.
    Infinite,
}

/// The value at s = 0.
#[must_use]
pub fn dc(formula: &Expanded, names: &Names<'_>) -> Option<Limit> {
    let lowest = |side: &[Polynomial]| side.iter().position(|it| !it.is_zero());
    limit(
        lowest(&formula.denominator)?,
        lowest(&formula.numerator),
        formula,
        names,
    )
}

/// The limit for s towards infinity.
#[must_use]
pub fn hf(formula: &Expanded, names: &Names<'_>) -> Option<Limit> {
    let highest = |side: &[Polynomial]| side.iter().rposition(|it| !it.is_zero());
    let below = highest(&formula.denominator)?;
    match highest(&formula.numerator) {
        Some(above) if above > below => Some(Limit::Infinite),
        Some(above) if above < below => Some(zero()),
        above => limit(below, above, formula, names),
    }
}

/// The limit where these are the powers that decide; the smaller one wins towards s = 0.
fn limit(
    below: usize,
    above: Option<usize>,
    formula: &Expanded,
    names: &Names<'_>,
) -> Option<Limit> {
    let Some(above) = above else {
        return Some(zero());
    };
    if above > below {
        return Some(zero());
    }
    if above < below {
        return Some(Limit::Infinite);
    }
    let (above, below) = (&formula.numerator[above], &formula.denominator[below]);
    let reduced = Fraction::new(above.clone(), below.clone(), &Budget::default());
    let reduced = reduced.ok().flatten()?;
    Some(Limit::Value(parallel::quotient(
        reduced.numerator(),
        reduced.denominator(),
        names,
    )))
}

fn zero() -> Limit {
    Limit::Value(Math::Number(0_i64.into()))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::network::NetworkBuilder;
    use crate::render::linear::READING;
    use crate::render::names::FrequencyPlace;
    use crate::source::{Sources, Span};

    fn limits(numerator: &[i64], denominator: &[i64]) -> [String; 2] {
        let source = Sources::new().add("test", "");
        let builder = NetworkBuilder::new(Span::new(source, 0, 0));
        let names = Names::new(builder.network(), FrequencyPlace::First);
        let side = |list: &[i64]| list.iter().map(|it| Polynomial::constant(*it)).collect();
        let formula = Expanded {
            numerator: side(numerator),
            denominator: side(denominator),
        };
        [dc(&formula, &names), hf(&formula, &names)].map(|limit| match limit {
            Some(Limit::Value(math)) => READING.spell(&math),
            Some(Limit::Infinite) => "infinite".to_owned(),
            None => "?".to_owned(),
        })
    }

    #[test]
    fn limits_follow_the_lowest_and_the_highest_powers() {
        assert_eq!(limits(&[2], &[4, 1]), ["1/2", "0"]);
        assert_eq!(limits(&[0, 3], &[4, 1]), ["0", "3"]);
        assert_eq!(limits(&[1, 3], &[0, 1]), ["infinite", "3"]);
        assert_eq!(limits(&[1, 0, 3], &[1, 1]), ["1", "infinite"]);
        assert_eq!(limits(&[0], &[1]), ["0", "0"]);
    }
}
