//! Cases as JSON: answers and errors.

use serde_json::Value;

use crate::cli::case::Case;
use crate::diagnostic::Diagnostic;
use crate::render::{Detail, json};

/// The answer, or what stands against it; the file is named in the latter where there are several.
pub(super) fn of_case(case: &Case, detail: Detail, several: bool) -> Value {
    match case.answer(detail) {
        Some(answer) => json::answer(&answer),
        None => {
            let diagnostics: Vec<Diagnostic> = case.diagnostics().into_iter().cloned().collect();
            let file = several.then_some(case.name.as_str());
            json::errors(&diagnostics, &case.sources, case.source, file)
        }
    }
}

/// Indented, with a newline at its end.
pub(super) fn pretty(value: &Value) -> String {
    format!("{value:#}\n")
}
