//! Figures at the nominal values: the only floats of the crate.
//!
//! Every figure starts from exact coefficients. Roots come with discs that are proven to hold them;
//! nothing here goes back into an exact answer.

pub mod big;
pub mod drift;
mod layer;
pub mod near;
pub mod nominal;
pub mod quotient;
pub mod roots;

use crate::analysis::report::{Formula, FunctionReport, Report};
use crate::budget::{Budget, Exceeded};
use crate::network::Network;
use drift::{Cancelled, cancelled};
use near::{Near, near};
use nominal::Nominals;
use quotient::Quotient;

/// What the nominals make of one function.
#[derive(Clone, Debug, Default)]
pub struct FunctionFigures {
    /// The function in numbers; `None` where a nominal or the formula is missing.
    pub quotient: Option<Quotient>,
    /// Names of symbols without a nominal.
    pub missing: Vec<String>,
    /// Pairs that almost cancel.
    pub near: Vec<Near>,
    /// One for each cancellation of the report, in its order.
    pub cancelled: Vec<Cancelled>,
}

/// The figures of each result of a report, in its order.
///
/// # Errors
/// When the budget is reached.
pub fn figures(
    network: &Network,
    report: &Report,
    budget: &Budget,
) -> Result<Vec<FunctionFigures>, Exceeded> {
    let nominals = Nominals::new(network, budget)?;
    let of = |result| of_function(result, &nominals, budget);
    report.results.iter().map(of).collect()
}

fn of_function(
    result: &FunctionReport,
    nominals: &Nominals<'_>,
    budget: &Budget,
) -> Result<FunctionFigures, Exceeded> {
    let mut figures = FunctionFigures::default();
    let expanded = match &result.formula {
        Formula::Expanded(expanded) => Some(expanded),
        Formula::Nested(_) | Formula::OverBudget(_) => None,
    };
    if let Some(expanded) = expanded.filter(|_| !result.zero) {
        match Quotient::at_nominals(expanded, nominals, budget)? {
            Ok(quotient) => {
                figures.near = near(expanded, &quotient, nominals, budget)?;
                figures.quotient = Some(quotient);
            }
            Err(missing) => figures.missing = missing,
        }
    }
    for it in result.cancellations.iter().flatten() {
        let quotient = figures.quotient.as_ref();
        let found = cancelled(it, result, expanded, quotient, nominals, budget)?;
        figures.cancelled.push(found);
    }
    Ok(figures)
}
