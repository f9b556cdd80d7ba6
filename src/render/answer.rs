//! What a writer is given.

use crate::analysis::report::{FunctionReport, Report};
use crate::diagnostic::Diagnostic;
use crate::network::{ElementId, Network, Question, RelationId};
use crate::numeric::FunctionFigures;
use crate::render::names::{FrequencyPlace, Names};
use crate::source::{SourceId, Sources};

/// Which findings are shown.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Detail {
    /// The fate of claims.
    Claims,
    /// The order ledger and the degrees of each function.
    Order,
    /// Degrees and formulas.
    Formula,
    /// Degrees, formulas and cancellations.
    Audit,
    /// State equations.
    States,
}

/// Which form of a function is shown.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum FormStyle {
    /// Polynomials in s, nothing else.
    Coefficients,
    /// Coefficients divided by the first of the denominator, each as short as it can be.
    Normalised,
    /// Polynomials in s as far as they fit, and the same in gain, time constants and frequencies.
    #[default]
    Designer,
    /// Coefficients with common symbols taken out and shared sums named.
    Nested,
}

/// A network with its report, ready to be written.
#[derive(Clone, Copy, Debug)]
pub struct Answer<'a> {
    /// The text it came from.
    pub source: SourceId,
    /// The texts, for lines and columns.
    pub sources: &'a Sources,
    /// The network.
    pub network: &'a Network,
    /// All findings.
    pub report: &'a Report,
    /// Figures at the nominals, one for each result; empty where they were not asked for.
    pub figures: &'a [FunctionFigures],
    /// Warnings from reading the text, in file order.
    pub warnings: &'a [Diagnostic],
    /// Which findings are shown.
    pub detail: Detail,
    /// Which form of a function is shown.
    pub style: FormStyle,
}

impl<'a> Answer<'a> {
    /// Name of the text it came from.
    #[must_use]
    pub fn file(&self) -> &'a str {
        &self.sources.get(self.source).name
    }

    /// Names of the network's symbols.
    #[must_use]
    pub fn names(&self, frequency: FrequencyPlace) -> Names<'a> {
        Names::new(self.network, frequency)
    }

    /// The figures of a result, where they were asked for.
    #[must_use]
    pub fn figures_of(&self, result: &FunctionReport) -> Option<&'a FunctionFigures> {
        let results = self.report.results.iter();
        let index = results
            .take_while(|it| it.question != result.question)
            .count();
        self.figures.get(index)
    }

    /// The question behind a result.
    #[must_use]
    pub fn question(&self, result: &FunctionReport) -> &'a Question {
        &self.network.questions()[result.question]
    }

    /// Name of a part.
    #[must_use]
    pub fn part(&self, id: ElementId) -> &'a str {
        &self.network.element(id).name
    }

    /// Names of parts, in the order given.
    #[must_use]
    pub fn parts(&self, ids: &[ElementId]) -> Vec<&'a str> {
        ids.iter().map(|id| self.part(*id)).collect()
    }

    /// Texts of relations, in the order given.
    #[must_use]
    pub fn relations(&self, ids: &[RelationId]) -> Vec<&'a str> {
        ids.iter()
            .map(|id| self.network.relation(*id).text.as_str())
            .collect()
    }

    /// Warnings from reading and from answering.
    pub fn all_warnings(&self) -> impl Iterator<Item = &'a Diagnostic> {
        self.warnings.iter().chain(&self.report.warnings)
    }
}
