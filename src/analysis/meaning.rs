//! Claims that say nothing: about poles of zero, or cancellations where none are looked for.

use crate::algebra::Symbol;
use crate::analysis::report::FunctionReport;
use crate::diagnostic::Diagnostic;
use crate::network::{Ask, Assertion, Network};

/// An error for each claim without a meaning.
pub(crate) fn meaningless(network: &Network, reports: &[FunctionReport]) -> Vec<Diagnostic> {
    let is_zero = |symbol: Symbol| {
        let index = network.question_of(symbol);
        reports
            .iter()
            .any(|it| Some(it.question) == index && it.zero)
    };
    let question = |symbol: Symbol| {
        let index = network.question_of(symbol)?;
        network.questions().get(index)
    };
    let judge = |assertion: &Assertion| {
        let (symbol, of) = match assertion {
            Assertion::Pole(symbol, _) => (symbol, "poles"),
            Assertion::Zero(symbol, _) => (symbol, "zeros"),
            Assertion::Cancels(symbol, _) => {
                let question = question(*symbol)?;
                let made = match question.ask {
                    Ask::Function(_) => "made of other functions",
                    Ask::Limit { .. } => "a limit",
                    Ask::FirstOrder { .. } => "a first-order term",
                    Ask::Transfer { .. }
                    | Ask::Ratio { .. }
                    | Ask::Impedance(_)
                    | Ask::Admittance(_)
                    | Ask::ReturnRatio(_) => return None,
                };
                let name = &question.name;
                return Some((
                    format!("{name} is {made}: nothing in a network cancels in it"),
                    format!("claim cancels of the functions {name} is made of"),
                ));
            }
            Assertion::Equals(..)
            | Assertion::Same(..)
            | Assertion::Order(..)
            | Assertion::Static(_)
            | Assertion::Dc(..)
            | Assertion::Hf(..)
            | Assertion::Coefficient { .. }
            | Assertion::Stable { .. } => return None,
        };
        if !is_zero(*symbol) {
            return None;
        }
        let name = &question(*symbol)?.name;
        Some((
            format!("{name} is zero for all values: it has no {of}"),
            format!("write claim {name} = 0"),
        ))
    };
    let claims = network.claims().iter();
    claims
        .filter_map(|claim| {
            let (message, help) = judge(&claim.assertion)?;
            Some(Diagnostic::error(claim.place, message).help(help))
        })
        .collect()
}
