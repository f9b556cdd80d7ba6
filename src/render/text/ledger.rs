//! Accounts in columns: sign, number, what it is, and its evidence.

use crate::render::text::Page;
use crate::render::text::block::columns;
use crate::render::text::fill;
use crate::render::text::paint::Paint;

/// One line of an account.
#[derive(Clone, Debug)]
pub(super) enum Line {
    /// A number that is added (`taken` false) or taken away.
    Entry {
        taken: bool,
        number: usize,
        label: String,
        evidence: Vec<Evidence>,
    },
    /// The rule above a sum.
    Rule,
    /// Words without a number.
    Note {
        label: String,
        evidence: Vec<Evidence>,
    },
}

/// Words beside a number.
#[derive(Clone, Debug)]
pub(super) enum Evidence {
    /// Names or clauses that may be broken between them.
    Items(Vec<String>, &'static str),
    /// One clause.
    Clause(String),
}

impl Evidence {
    pub(super) fn clause(text: impl Into<String>) -> Self {
        Self::Clause(text.into())
    }

    fn lines(&self, width: usize) -> Vec<String> {
        match self {
            Self::Items(items, between) => fill::words(items, between, width),
            Self::Clause(text) => {
                let words: Vec<String> = text.split(' ').map(str::to_owned).collect();
                fill::words(&words, " ", width)
            }
        }
    }
}

/// Columns before the label: sign and number.
const FIGURES: usize = 7;

/// Draws an account; evidence stands in a column of its own where labels are short.
pub(super) fn draw(lines: &[Line], page: &Page) -> String {
    let widest = lines.iter().map(label_width).max().unwrap_or(0);
    let column = FIGURES + widest.clamp(28, 44) + 2;
    let mut text = String::new();
    for line in lines {
        match line {
            Line::Rule => text.push_str(" ───\n"),
            Line::Entry {
                taken,
                number,
                label,
                evidence,
            } => {
                let sign = if *taken { " −" } else { "  " };
                let figures = format!("{sign}{number:>3}  ");
                push_line(&mut text, &figures, label, evidence, column, page);
            }
            Line::Note { label, evidence } => {
                push_line(
                    &mut text,
                    &" ".repeat(FIGURES),
                    label,
                    evidence,
                    column,
                    page,
                );
            }
        }
    }
    text
}

fn label_width(line: &Line) -> usize {
    match line {
        Line::Rule => 0,
        Line::Entry { label, .. } | Line::Note { label, .. } => columns(label),
    }
}

fn push_line(
    text: &mut String,
    figures: &str,
    label: &str,
    evidence: &[Evidence],
    column: usize,
    page: &Page,
) {
    let paint = Paint(page.colour);
    let room = page.width.saturating_sub(column).max(24);
    let mut evidence = evidence.iter().flat_map(|it| it.lines(room));
    let first = evidence.next().unwrap_or_default();
    let used = columns(figures) + columns(label);
    if first.is_empty() {
        text.push_str(format!("{figures}{label}").trim_end());
    } else {
        let gap = " ".repeat(column.saturating_sub(used).max(2));
        text.push_str(&format!("{figures}{label}{gap}{}", paint.quiet(&first)));
    }
    text.push('\n');
    for line in evidence {
        text.push_str(&format!("{}{}\n", " ".repeat(column), paint.quiet(&line)));
    }
}
