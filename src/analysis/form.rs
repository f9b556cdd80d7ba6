//! Functions as a designer writes them: R1 ∥ R2, (R1 + R2)·C1, 1 + R2/R1; time constants, ω0 and Q.
//!
//! Each form is an expression tree whose value has been computed back and compared with the function
//! it stands for; among the forms found, the one with fewest leaves is taken, then with fewest
//! operations, then the first in the order of names.

mod character;
mod constants;
mod gradient;
mod merge;
mod response;
mod root;
mod tree;
mod write;

use std::time::Duration;

pub use character::{Character, Inequality, Kind, Step};
pub use constants::{Constant, Pair, Reactive, Sums, TimeConstants};
pub use response::{Designer, Section, Shape};
pub use tree::Form;

pub(crate) use constants::time_constants;

use crate::algebra::{Fraction, Polynomial};
use crate::analysis::report::Expanded;
use crate::budget::{Budget, Exceeded, Limits};
use crate::network::Network;
use write::Writer;

/// Formulas with more terms are given by their coefficients alone.
const MOST_TERMS: usize = 300;

/// What a designer reads off a function.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Forms {
    /// Gain, time constants, frequencies; for a function without s its shortest form.
    pub designer: Option<Designer>,
    /// The coefficients divided by the first of the denominator.
    pub normalised: Option<Normalised>,
    /// The value at s = 0.
    pub dc: Option<Limit>,
    /// The limit for s towards infinity.
    pub hf: Option<Limit>,
    /// Denominator coefficients as sums of time constants, where that was asked for.
    pub time_constants: Option<TimeConstants>,
    /// What a function of first or second order does.
    pub character: Option<Character>,
}

/// Coefficients of s^0, s^1, …; the first of the denominator that is not zero is one.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Normalised {
    /// Of the numerator.
    pub numerator: Vec<Form>,
    /// Of the denominator.
    pub denominator: Vec<Form>,
}

/// Where a function tends.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Limit {
    /// To a value.
    Value(Form),
    /// Beyond all bounds.
    Infinite,
}

/// The shortest form found for a function without s, proven equal to it.
///
/// # Errors
/// When the budget is reached.
pub fn shortest(network: &Network, fraction: &Fraction, budget: &Budget) -> Result<Form, Exceeded> {
    Writer::new(network, budget).write(fraction)
}

/// The forms of a function; those that would take too long are left out.
#[must_use]
pub fn forms(network: &Network, formula: &Expanded) -> Forms {
    let budget = Budget::new(Limits {
        terms: 5_000,
        states: 0,
        time: Duration::from_secs(2),
    });
    let writer = Writer::new(network, &budget);
    let all = formula.numerator.iter().chain(&formula.denominator);
    let short = all.map(Polynomial::len).sum::<usize>() <= MOST_TERMS;
    let designer = short
        .then(|| {
            response::designer(network, formula, &writer, &budget)
                .ok()
                .flatten()
        })
        .flatten();
    let first = |section: &Section| matches!(section.shape, Shape::First { .. });
    let factored = designer.iter().any(|it| it.below.iter().all(first));
    Forms {
        designer,
        normalised: short
            .then(|| normalised(formula, &writer).ok().flatten())
            .flatten(),
        dc: dc(formula, &writer).ok().flatten(),
        hf: hf(formula, &writer).ok().flatten(),
        time_constants: None,
        character: short
            .then(|| {
                character::character(network, formula, factored, &writer, &budget)
                    .ok()
                    .flatten()
            })
            .flatten(),
    }
}

fn normalised(formula: &Expanded, writer: &Writer<'_>) -> Result<Option<Normalised>, Exceeded> {
    let Some(first) = formula.denominator.iter().find(|it| !it.is_zero()) else {
        return Ok(None);
    };
    let side = |list: &[Polynomial]| -> Result<Vec<Form>, Exceeded> {
        list.iter().map(|it| writer.ratio(it, first)).collect()
    };
    Ok(Some(Normalised {
        numerator: side(&formula.numerator)?,
        denominator: side(&formula.denominator)?,
    }))
}

fn dc(formula: &Expanded, writer: &Writer<'_>) -> Result<Option<Limit>, Exceeded> {
    let lowest = |side: &[Polynomial]| side.iter().position(|it| !it.is_zero());
    let Some(below) = lowest(&formula.denominator) else {
        return Ok(None);
    };
    match lowest(&formula.numerator) {
        Some(above) if above < below => Ok(Some(Limit::Infinite)),
        above => limit(below, above, formula, writer),
    }
}

fn hf(formula: &Expanded, writer: &Writer<'_>) -> Result<Option<Limit>, Exceeded> {
    let highest = |side: &[Polynomial]| side.iter().rposition(|it| !it.is_zero());
    let Some(below) = highest(&formula.denominator) else {
        return Ok(None);
    };
    match highest(&formula.numerator) {
        Some(above) if above > below => Ok(Some(Limit::Infinite)),
        above => limit(below, above, formula, writer),
    }
}

/// The limit where these are the powers that decide; zero where they differ.
fn limit(
    below: usize,
    above: Option<usize>,
    formula: &Expanded,
    writer: &Writer<'_>,
) -> Result<Option<Limit>, Exceeded> {
    let value = match above {
        Some(above) if above == below => {
            writer.ratio(&formula.numerator[above], &formula.denominator[below])?
        }
        _ => Form::Number(0_i64.into()),
    };
    Ok(Some(Limit::Value(value)))
}
