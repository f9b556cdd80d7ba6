//! Messages to the user: what is wrong, where, and the way out. Data only; `cli` draws them.

use crate::source::Span;

/// How much a message weighs.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Severity {
    /// The input cannot be used.
    Error,
    /// The input is used, but may not say what its writer meant.
    Warning,
}

/// A second place that explains the first.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Label {
    /// Where.
    pub place: Span,
    /// A few words, such as `first placed here`.
    pub text: String,
}

/// One message with its place and its way out.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Diagnostic {
    /// Error or warning.
    pub severity: Severity,
    /// A plain sentence, no full stop at the end.
    pub message: String,
    /// The place it is about; `None` only for whole-file matters such as a missing file.
    pub place: Option<Span>,
    /// Further places.
    pub labels: Vec<Label>,
    /// What to write instead, or where to look.
    pub help: Option<String>,
}

impl Diagnostic {
    /// An error at a place.
    pub fn error(place: Span, message: impl Into<String>) -> Self {
        Self {
            severity: Severity::Error,
            message: message.into(),
            place: Some(place),
            labels: Vec::new(),
            help: None,
        }
    }

    /// A warning at a place.
    pub fn warning(place: Span, message: impl Into<String>) -> Self {
        Self {
            severity: Severity::Warning,
            ..Self::error(place, message)
        }
    }

    /// An error about the input as a whole.
    pub fn whole(message: impl Into<String>) -> Self {
        Self {
            severity: Severity::Error,
            message: message.into(),
            place: None,
            labels: Vec::new(),
            help: None,
        }
    }

    /// Adds the way out.
    #[must_use]
    pub fn help(mut self, help: impl Into<String>) -> Self {
        self.help = Some(help.into());
        self
    }

    /// Adds a second place.
    #[must_use]
    pub fn label(mut self, place: Span, text: impl Into<String>) -> Self {
        self.labels.push(Label {
            place,
            text: text.into(),
        });
        self
    }

    /// Whether it stops the run.
    #[must_use]
    pub fn is_error(&self) -> bool {
        self.severity == Severity::Error
    }
}
