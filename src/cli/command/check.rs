//! `check`: read, lint, prove or refute every claim of any number of files.

use serde_json::Value;

use crate::analysis::report::{ClaimReport, Verdict};
use crate::cli::args::{Check, Format};
use crate::cli::case::Case;
use crate::cli::command::{explain_all, in_words, json, question, shown, wanted};
use crate::cli::exit::Exit;
use crate::cli::input::Origin;
use crate::cli::output::Streams;
use crate::cli::progress::Progress;
use crate::render::Detail;
use crate::render::sentence::counted;

pub(super) fn run(arguments: &Check, streams: &mut Streams<'_>) -> Exit {
    let options = &arguments.options;
    let origins: Vec<Origin> = match &options.text {
        Some(text) => vec![Origin::CommandLine(text.clone())],
        None => arguments.files.iter().cloned().map(Origin::File).collect(),
    };
    let wanted = wanted(Detail::Claims, options.format, &options.of);
    let several = origins.len() > 1;
    let mut tally = Tally::default();
    let mut values = Vec::new();
    let mut exit = Exit::Answered;
    for origin in &origins {
        let progress = Progress::begin(origin.name(), streams.terminal.progress);
        let case = Case::new(
            origin,
            options,
            &wanted,
            question(Detail::Claims),
            streams.input,
        );
        drop(progress);
        explain_all(&case, streams);
        tally.add(&case);
        exit = exit.max(case.exit(&wanted));
        match options.format {
            Format::Json => values.push(json::of_case(&case, Detail::Claims, several)),
            format => {
                let text = in_words(&case, shown(Detail::Claims), format, streams.terminal);
                exit = streams.answer(&under_heading(&case.name, &text, several), exit);
            }
        }
    }
    if options.format == Format::Json {
        let value = match (several, values.pop()) {
            (false, Some(only)) => only,
            (_, last) => Value::Array(values.into_iter().chain(last).collect()),
        };
        exit = streams.answer(&json::pretty(&value), exit);
    }
    if !arguments.quiet {
        streams.explain(&format!("{}\n", tally.sentence()));
    }
    exit
}

/// The name of the file above its claims, where there are several files.
fn under_heading(name: &str, text: &str, several: bool) -> String {
    match (several, text) {
        (_, "") => String::new(),
        (false, text) => text.to_owned(),
        (true, text) => format!("{name}\n{text}\n"),
    }
}

/// What was found over all files.
#[derive(Default)]
struct Tally {
    files: usize,
    unusable: usize,
    unanswered: usize,
    hold: usize,
    refuted: usize,
    undecided: usize,
}

impl Tally {
    fn add(&mut self, case: &Case) {
        self.files += 1;
        match &case.outcome {
            Ok(solved) => solved.report.claims.iter().for_each(|it| self.claim(it)),
            Err(unsolved) if unsolved.exit == Exit::Unusable => self.unusable += 1,
            Err(_) => self.unanswered += 1,
        }
    }

    fn claim(&mut self, claim: &ClaimReport) {
        match claim.holds {
            Verdict::Yes => self.hold += 1,
            Verdict::No => self.refuted += 1,
            Verdict::Undecided => self.undecided += 1,
        }
    }

    /// `3 files, 12 claims: 11 hold, 1 refuted; 1 file cannot be used`.
    fn sentence(&self) -> String {
        let lost = [
            (self.unusable, "cannot be used"),
            (self.unanswered, "without an answer"),
        ];
        let lost = lost.iter().filter(|(count, _)| *count > 0);
        let mut parts: Vec<String> = lost
            .map(|(count, fate)| format!("{} {fate}", counted(*count, "file", "files")))
            .collect();
        if self.unusable + self.unanswered < self.files {
            let files = match self.files {
                1 => String::new(),
                files => format!("{files} files, "),
            };
            parts.insert(0, format!("{files}{}", self.claims()));
        }
        parts.join("; ")
    }

    fn claims(&self) -> String {
        let holding = |count: usize| if count == 1 { "holds" } else { "hold" };
        let all = self.hold + self.refuted + self.undecided;
        if all == 0 {
            return "no claims".to_owned();
        }
        let claims = counted(all, "claim", "claims");
        let counts = [
            (self.hold, holding(self.hold)),
            (self.refuted, "refuted"),
            (self.undecided, "not decided"),
        ];
        let counts = counts.iter().filter(|(count, _)| *count > 0);
        let counts: Vec<_> = counts.collect();
        if let [(_, fate)] = counts.as_slice() {
            return format!("{claims} {fate}");
        }
        let counts: Vec<String> = counts
            .iter()
            .map(|(count, fate)| format!("{count} {fate}"))
            .collect();
        format!("{claims}: {}", counts.join(", "))
    }
}
