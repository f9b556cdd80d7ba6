//! Pieces of text with a baseline: fractions with a drawn bar, pieces side by side. Fractions within
//! a fraction have slashes.

use crate::render::linear::READING;
use crate::render::math::{Bars, Math, Within};

/// Number of columns a text takes.
pub(super) fn columns(text: &str) -> usize {
    text.chars().count()
}

/// Lines of equal rank with the line on which the piece stands.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(super) struct Block {
    lines: Vec<String>,
    baseline: usize,
}

impl Block {
    /// One line.
    pub(super) fn text(text: impl Into<String>) -> Self {
        Self {
            lines: vec![text.into()],
            baseline: 0,
        }
    }

    /// Several lines, standing on the first.
    pub(super) fn lines(lines: Vec<String>) -> Self {
        Self { lines, baseline: 0 }
    }

    /// Columns of the widest line.
    pub(super) fn width(&self) -> usize {
        self.lines
            .iter()
            .map(|line| columns(line))
            .max()
            .unwrap_or(0)
    }

    /// One above the other with a bar between; single lines are centred.
    pub(super) fn fraction(above: &Self, below: &Self) -> Self {
        let inner = above.width().max(below.width());
        let mut lines = above.placed(inner);
        let baseline = lines.len();
        lines.push("─".repeat(inner + 2));
        lines.extend(below.placed(inner));
        Self { lines, baseline }
    }

    fn placed(&self, inner: usize) -> Vec<String> {
        let shift = (inner - self.width()) / 2;
        let indent = " ".repeat(shift + 1);
        self.lines
            .iter()
            .map(|line| format!("{indent}{line}"))
            .collect()
    }

    /// Cells in columns between brackets; a matrix without cells is `( )`.
    pub(super) fn matrix(cells: &[Vec<String>]) -> Self {
        let across = cells.first().map_or(0, Vec::len);
        if across == 0 {
            return Self::text("( )");
        }
        let widths: Vec<usize> = (0..across)
            .map(|at| cells.iter().map(|row| columns(&row[at])).max().unwrap_or(0))
            .collect();
        let last = cells.len() - 1;
        let lines = cells.iter().enumerate().map(|(index, row)| {
            let (open, close) = match index {
                _ if last == 0 => ('(', ')'),
                0 => ('⎛', '⎞'),
                _ if index == last => ('⎝', '⎠'),
                _ => ('⎜', '⎟'),
            };
            let row: Vec<String> = row
                .iter()
                .zip(&widths)
                .map(|(cell, width)| {
                    let gap = width - columns(cell);
                    let (left, right) = (" ".repeat(gap / 2), " ".repeat(gap - gap / 2));
                    format!("{left}{cell}{right}")
                })
                .collect();
            format!("{open} {} {close}", row.join("   "))
        });
        Self {
            lines: lines.collect(),
            baseline: last / 2,
        }
    }

    /// Side by side on a common baseline.
    pub(super) fn beside(blocks: &[Self]) -> Self {
        let baseline = blocks.iter().map(|it| it.baseline).max().unwrap_or(0);
        let under = blocks.iter().map(|it| it.lines.len() - it.baseline).max();
        let height = baseline + under.unwrap_or(0);
        let mut lines = vec![String::new(); height];
        let mut column = 0;
        for block in blocks {
            let top = baseline - block.baseline;
            for (line, text) in lines[top..].iter_mut().zip(&block.lines) {
                let gap = column - columns(line);
                line.push_str(&" ".repeat(gap));
                line.push_str(text);
            }
            column += block.width();
        }
        Self { lines, baseline }
    }

    /// The lines, each indented and without blanks at its end.
    pub(super) fn indented(&self, indent: usize) -> String {
        let blank = " ".repeat(indent);
        self.lines
            .iter()
            .map(|line| format!("{}\n", format!("{blank}{line}").trim_end()))
            .collect()
    }

    /// An expression with drawn bars.
    pub(super) fn math(math: &Math) -> Self {
        Self::within(math, Within::Alone)
    }

    /// An expression with drawn bars as it stands in a larger one.
    pub(super) fn within(math: &Math, within: Within) -> Self {
        if !has_quotient(math) {
            return Self::text(READING.spell_within(math, within));
        }
        match math {
            Math::Quotient(above, below) => Self::fraction(
                &Self::text(READING.spell(above)),
                &Self::text(READING.spell(below)),
            ),
            Math::Negative(inner) => {
                Self::beside(&[Self::text("− "), Self::within(inner, Within::Sum)])
            }
            Math::Product(factors) => {
                let factors = factors.iter().map(|it| Self::within(it, Within::Product));
                Self::beside(&separated(factors, " · "))
            }
            Math::Sum(_) if !math.is_grouped(within, Bars::Drawn) => Self::sum(math),
            _ => Self::text(READING.spell_within(math, within)),
        }
    }

    fn sum(math: &Math) -> Self {
        let mut blocks = Vec::new();
        for (index, (negative, body)) in math.terms().into_iter().enumerate() {
            let sign = match (index, negative) {
                (0, false) => "",
                (0, true) => "− ",
                (_, false) => " + ",
                (_, true) => " − ",
            };
            blocks.push(Self::text(sign));
            blocks.push(Self::within(body, Within::Sum));
        }
        Self::beside(&blocks)
    }
}

fn separated(blocks: impl Iterator<Item = Block>, between: &str) -> Vec<Block> {
    let mut list = Vec::new();
    for (index, block) in blocks.enumerate() {
        if index > 0 {
            list.push(Block::text(between));
        }
        list.push(block);
    }
    list
}

fn has_quotient(math: &Math) -> bool {
    match math {
        Math::Quotient(..) => true,
        Math::Number(_) | Math::Symbol(_) | Math::Parallel(_) | Math::Power(..) | Math::Root(_) => {
            false
        }
        Math::Sum(terms) => terms.iter().any(|term| has_quotient(&term.body)),
        Math::Product(parts) => parts.iter().any(has_quotient),
        Math::Negative(inner) => has_quotient(inner),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn fractions_stand_on_their_bar() {
        let sum = Math::sum([Math::name("R1"), Math::name("R2")]);
        let quotient = Math::quotient(Math::name("R2"), sum);
        let block = Block::beside(&[Block::text("H = "), Block::math(&quotient)]);
        assert_eq!(
            block.indented(2),
            "         R2\n  H = ─────────\n       R1 + R2\n"
        );
    }
}
