//! Exit statuses.

use std::process::ExitCode;

use crate::analysis::report::{Failure, Formula, Report, Verdict, Wanted};

/// How a run ended. The order is by weight: of several files the heaviest decides.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum Exit {
    /// 0: answered; where claims were looked at, all hold.
    Answered,
    /// 3: a budget was reached, or a claim is not decided.
    Undecided,
    /// 1: a claim is refuted.
    Refuted,
    /// 2: the input cannot be used.
    Unusable,
    /// 4: the system failed.
    System,
    /// 5: the independent check disagreed: our bug, nothing is answered.
    Disagreed,
}

impl Exit {
    /// The number the process ends with.
    #[must_use]
    pub fn code(self) -> u8 {
        match self {
            Self::Answered => 0,
            Self::Refuted => 1,
            Self::Unusable => 2,
            Self::Undecided => 3,
            Self::System => 4,
            Self::Disagreed => 5,
        }
    }

    /// What a report amounts to. Formulas count where they were asked for, and so do cancellations.
    #[must_use]
    pub fn of_report(report: &Report, wanted: &Wanted) -> Self {
        let claims = report.claims.iter().map(|claim| match claim.holds {
            Verdict::Yes => Self::Answered,
            Verdict::No => Self::Refuted,
            Verdict::Undecided => Self::Undecided,
        });
        let audited = wanted.formulas && wanted.cancellations;
        let results = report.results.iter().map(|result| match result.formula {
            Formula::OverBudget(_) if wanted.formulas || !result.degrees_known() => Self::Undecided,
            _ if audited && result.unaudited.is_some() => Self::Undecided,
            _ => Self::Answered,
        });
        claims.chain(results).max().unwrap_or(Self::Answered)
    }

    /// What a failure amounts to.
    #[must_use]
    pub fn of_failure(failure: &Failure) -> Self {
        match failure {
            Failure::Unusable(_) => Self::Unusable,
            Failure::Budget(_) => Self::Undecided,
            Failure::Witness(_) => Self::Disagreed,
        }
    }
}

impl From<Exit> for ExitCode {
    fn from(exit: Exit) -> Self {
        Self::from(exit.code())
    }
}
