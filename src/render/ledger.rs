//! The order ledger as data: from the parts to the degree, each line with its evidence. Writers draw it.

mod function;
mod network;

pub use function::{cause, degrees, function};
pub use network::network;

use crate::render::math::Math;
use crate::render::sentence::runs;

/// One line of an account.
#[derive(Clone, Debug)]
pub enum Line {
    /// A number that is added, or taken away.
    Entry {
        /// Whether it is taken away.
        taken: bool,
        /// How many.
        number: usize,
        /// What is counted.
        label: String,
        /// Why, or which.
        evidence: Vec<Evidence>,
    },
    /// The rule above a sum.
    Rule,
    /// Words without a number.
    Note {
        /// What they are about.
        label: String,
        /// The words.
        evidence: Vec<Evidence>,
    },
}

/// What stands between the members of a list.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Between {
    /// A list of parts.
    Blank,
    /// A loop.
    Dash,
    /// A cut-set.
    Bar,
    /// A list of relations.
    Comma,
}

/// Words beside a number.
#[derive(Clone, Debug)]
pub enum Evidence {
    /// Names or short texts.
    Items(Vec<String>, Between),
    /// A clause.
    Clause(String),
    /// A formula.
    Formula(Math),
    /// An equation, with words before it.
    Equation(String, Math, Math),
}

impl Evidence {
    /// A clause.
    #[must_use]
    pub fn clause(text: impl Into<String>) -> Self {
        Self::Clause(text.into())
    }

    /// A list of parts, long runs drawn together, what is beyond any use counted.
    #[must_use]
    pub fn parts(names: &[&str]) -> Self {
        const MOST: usize = 60;
        let mut items = runs(names);
        if items.len() > MOST {
            let more = items.len() - MOST;
            items.truncate(MOST);
            items.push(format!("and {more} more"));
        }
        Self::Items(items, Between::Blank)
    }
}

fn entry(taken: bool, number: usize, label: impl Into<String>, evidence: Vec<Evidence>) -> Line {
    Line::Entry {
        taken,
        number,
        label: label.into(),
        evidence,
    }
}

fn note(label: impl Into<String>, evidence: Vec<Evidence>) -> Line {
    Line::Note {
        label: label.into(),
        evidence,
    }
}

fn noun<'a>(count: usize, singular: &'a str, plural: &'a str) -> &'a str {
    if count == 1 { singular } else { plural }
}
