//! One text from reading to report.

use std::io::Read;

use crate::analysis;
use crate::analysis::report::{Failure, Report, Wanted};
use crate::budget::Budget;
use crate::cli::args::Options;
use crate::cli::exit::Exit;
use crate::cli::input::{Origin, used};
use crate::diagnostic::{Diagnostic, Severity};
use crate::language::{self, ReadOptions};
use crate::network::Network;
use crate::numeric::{self, FunctionFigures};
use crate::render::{Answer, Detail, FormStyle};
use crate::source::{SourceId, Sources};

/// A text with all that was found about it.
pub(super) struct Case {
    /// The texts.
    pub(super) sources: Sources,
    /// The text itself, where it could be read.
    pub(super) source: Option<SourceId>,
    /// The name it is reported under.
    pub(super) name: String,
    /// Messages from reading it.
    pub(super) read: Vec<Diagnostic>,
    /// The answer.
    pub(super) outcome: Result<Solved, Unsolved>,
}

/// An answered case.
pub(super) struct Solved {
    /// The network.
    pub(super) network: Network,
    /// The findings.
    pub(super) report: Report,
    /// Figures at the nominals, where they were asked for.
    pub(super) figures: Vec<FunctionFigures>,
    /// They were not finished within the budget.
    pub(super) figures_cut: bool,
}

/// A case without an answer.
pub(super) struct Unsolved {
    /// Why, beside what reading said.
    pub(super) diagnostics: Vec<Diagnostic>,
    /// How the run ends.
    pub(super) exit: Exit,
}

impl Case {
    /// Reads and answers.
    pub(super) fn new(
        origin: &Origin,
        options: &Options,
        wanted: &Wanted,
        question: Question,
        input: &mut dyn Read,
    ) -> Self {
        let mut case = Self {
            sources: Sources::new(),
            source: None,
            name: origin.name().to_owned(),
            read: Vec::new(),
            outcome: Err(Unsolved::unusable(Vec::new())),
        };
        match origin.read(input) {
            Ok(text) => case.solve(text, options, wanted, question),
            Err(trouble) => case.read.push(trouble),
        }
        case
    }

    fn solve(&mut self, text: String, options: &Options, wanted: &Wanted, question: Question) {
        let source = self.sources.add(self.name.as_str(), text);
        self.source = Some(source);
        let budget = Budget::new(options.budget.unwrap_or_default());
        let read_options = ReadOptions {
            set: &options.set,
            load: &used,
        };
        let reading = language::read(&mut self.sources, source, &read_options);
        self.read = reading.diagnostics;
        let Some(network) = reading.network else {
            return;
        };
        self.outcome = match question.judge(&network, &options.of) {
            Err(missing) => Err(Unsolved::unusable(vec![missing])),
            Ok(remark) => {
                self.read.extend(remark);
                analysis::answer(&network, wanted, &budget)
                    .map(|report| Solved::new(network, report, wanted, &budget))
                    .map_err(|failure| Unsolved::new(&failure))
            }
        };
    }

    /// What a writer needs, where there is an answer.
    pub(super) fn answer(&self, detail: Detail) -> Option<Answer<'_>> {
        let (Some(source), Ok(solved)) = (self.source, &self.outcome) else {
            return None;
        };
        Some(Answer {
            source,
            sources: &self.sources,
            network: &solved.network,
            report: &solved.report,
            figures: &solved.figures,
            warnings: &self.read,
            detail,
            style: FormStyle::default(),
        })
    }

    /// All messages: from reading, then from answering.
    pub(super) fn diagnostics(&self) -> Vec<&Diagnostic> {
        let later = match &self.outcome {
            Ok(solved) => &solved.report.warnings,
            Err(unsolved) => &unsolved.diagnostics,
        };
        self.read.iter().chain(later).collect()
    }

    /// How the run ends as far as this text is concerned.
    pub(super) fn exit(&self, wanted: &Wanted) -> Exit {
        match &self.outcome {
            Ok(solved) if solved.figures_cut => {
                Exit::of_report(&solved.report, wanted).max(Exit::Undecided)
            }
            Ok(solved) => Exit::of_report(&solved.report, wanted),
            Err(unsolved) => unsolved.exit,
        }
    }
}

impl Solved {
    /// Adds the figures where they are wanted; where the budget ends before them a warning says so.
    fn new(network: Network, mut report: Report, wanted: &Wanted, budget: &Budget) -> Self {
        let figures = if wanted.figures {
            numeric::figures(&network, &report, budget)
        } else {
            Ok(Vec::new())
        };
        let figures_cut = figures.is_err();
        if let Err(exceeded) = &figures {
            let warning = Diagnostic {
                severity: Severity::Warning,
                ..Diagnostic::whole(format!("figures are missing: {exceeded}"))
                    .help("allow more, for example --budget seconds=60")
            };
            report.warnings.push(warning);
        }
        Self {
            network,
            report,
            figures: figures.unwrap_or_default(),
            figures_cut,
        }
    }
}

impl Unsolved {
    fn unusable(diagnostics: Vec<Diagnostic>) -> Self {
        Self {
            diagnostics,
            exit: Exit::Unusable,
        }
    }

    fn new(failure: &Failure) -> Self {
        let diagnostics = match failure {
            Failure::Unusable(list) => list.clone(),
            Failure::Budget(exceeded) => vec![
                Diagnostic::whole(format!("{exceeded}, nothing is answered"))
                    .help(format!("allow more: {}", exceeded.further())),
            ],
            Failure::Witness(text) => vec![
                Diagnostic::whole(format!("the independent check disagreed: {text}"))
                    .help("this is a bug of ours and nothing is answered; please report the file"),
            ],
        };
        Self {
            diagnostics,
            exit: Exit::of_failure(failure),
        }
    }
}

/// A failure in one sentence.
pub(super) fn told(failure: &Failure) -> String {
    match failure {
        Failure::Unusable(list) => list
            .first()
            .map_or(String::new(), |first| first.message.clone()),
        Failure::Budget(exceeded) => exceeded.to_string(),
        Failure::Witness(text) => text.clone(),
    }
}

/// Whether a command can do without a `derive` line.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Question {
    /// It has something to say without one.
    Optional,
    /// It has nothing to say without one.
    Needed,
}

impl Question {
    /// A remark, or the reason why there is nothing to answer.
    fn judge(self, network: &Network, of: &[String]) -> Result<Option<Diagnostic>, Diagnostic> {
        let questions = network.questions();
        let known = |name: &&String| questions.iter().any(|it| &it.name == *name);
        if let Some(unknown) = of.iter().find(|name| !known(name)) {
            let names: Vec<&str> = questions.iter().map(|it| it.name.as_str()).collect();
            let message = format!("there is no derived function `{unknown}`");
            return Err(Diagnostic::whole(message).help(if names.is_empty() {
                "the file derives nothing".to_owned()
            } else {
                format!("the file derives {}", names.join(", "))
            }));
        }
        if !questions.is_empty() {
            return Ok(None);
        }
        let help = "add a line such as `derive H = voltage(out) / Vs`";
        match self {
            Self::Needed => Err(Diagnostic::whole("nothing asked").help(help)),
            Self::Optional => Ok(Some(Diagnostic {
                severity: Severity::Warning,
                ..Diagnostic::whole("the file asks for no function").help(help)
            })),
        }
    }
}
