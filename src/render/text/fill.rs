//! Breaks long sums into lines, before a sign, aligned inside the parenthesis that is open.

use crate::render::linear::READING;
use crate::render::math::{Bars, Math, Within};
use crate::render::text::block::columns;

/// Lines of an expression, none wider than `width` as far as single terms allow. Lines after the
/// first start `hang` columns further left or right as their sign needs: a sign at the outermost
/// level stands at column 0, the first term at column `lead`.
pub(super) fn lines(math: &Math, width: usize, lead: usize) -> Vec<String> {
    let mut filler = Filler::new(width, lead);
    filler.sum(math);
    filler.finish()
}

/// Words or formulas separated by `between`, broken between them.
pub(super) fn words(items: &[String], between: &str, width: usize) -> Vec<String> {
    let mut lines: Vec<String> = Vec::new();
    for item in items {
        match lines.last_mut() {
            Some(line) if columns(line) + columns(between) + columns(item) <= width => {
                line.push_str(between);
                line.push_str(item);
            }
            Some(line) => {
                if between.starts_with([',', ';']) {
                    line.push_str(between.trim_end());
                }
                lines.push(item.clone());
            }
            None => lines.push(item.clone()),
        }
    }
    for line in &mut lines {
        line.truncate(line.trim_end().len());
    }
    lines
}

/// Column at which a line inside a parenthesis starts.
#[derive(Clone, Copy)]
enum Start {
    Known(usize),
    InPending(usize),
}

struct Filler {
    width: usize,
    lines: Vec<String>,
    line: String,
    column: usize,
    empty: bool,
    pending: String,
    pending_indent: usize,
    pending_depth: usize,
    starts: Vec<Start>,
    /// Deepest parenthesis inside which a line was broken.
    broken: usize,
    /// Whether the next piece goes on a new line.
    force: bool,
}

impl Filler {
    fn new(width: usize, lead: usize) -> Self {
        Self {
            width,
            lines: Vec::new(),
            line: String::new(),
            column: lead,
            empty: true,
            pending: String::new(),
            pending_indent: 0,
            pending_depth: 0,
            starts: Vec::new(),
            broken: 0,
            force: false,
        }
    }

    fn sum(&mut self, math: &Math) {
        for (index, (negative, body)) in math.terms().into_iter().enumerate() {
            if index > 0 {
                self.flush();
                self.end_group(self.starts.len());
                self.keep_whole(body);
            }
            self.pending.push_str(match (index, negative) {
                (0, false) => "",
                (0, true) => "−",
                (_, false) => " + ",
                (_, true) => " − ",
            });
            self.part(body, Within::Sum);
        }
    }

    /// A term that was broken inside a parenthesis ends its line.
    fn end_group(&mut self, depth: usize) {
        if self.broken > depth {
            self.force = true;
            self.broken = depth;
        }
    }

    /// Starts a new line before a term that would be broken here but not there, or far to the right.
    fn keep_whole(&mut self, term: &Math) {
        let wide = columns(&READING.spell_within(term, Within::Sum));
        let indent = self.pending_indent.min(self.width / 2);
        let here = self.column + 3 + wide <= self.width;
        let fits_there = indent + 2 + wide <= self.width;
        let far_right = self.column > indent + self.width / 4;
        self.force |= !here && (fits_there || far_right);
    }

    fn part(&mut self, math: &Math, within: Within) {
        let grouped = math.is_grouped(within, Bars::Slash);
        if grouped {
            self.pending.push('(');
            self.starts.push(Start::InPending(columns(&self.pending)));
        }
        match math {
            Math::Sum(_) => self.sum(math),
            Math::Product(factors) => self.product(factors),
            Math::Quotient(above, below) => {
                self.part(above, Within::Product);
                self.pending.push('/');
                self.part(below, Within::Divisor);
            }
            other => self.pending.push_str(&READING.spell(other)),
        }
        if grouped {
            self.pending.push(')');
            self.starts.pop();
        }
    }

    fn product(&mut self, factors: &[Math]) {
        for (index, factor) in factors.iter().enumerate() {
            if index > 0 {
                self.pending.push('·');
            }
            if index > 0 && matches!(factor, Math::Sum(_)) {
                self.make_room(columns(&READING.spell_within(factor, Within::Product)));
            }
            self.part(factor, Within::Product);
        }
    }

    /// Starts a new line where a sum in parentheses would be broken here but not on a line of its own:
    /// before its whole term if that fits, else before its parenthesis.
    fn make_room(&mut self, wide: usize) {
        let front = columns(&self.pending);
        if !self.force && self.column + front + wide <= self.width {
            return;
        }
        let trimmed = columns(self.pending.trim_start());
        let whole_term = !self.empty && !self.pending.contains(')');
        if whole_term && self.pending_indent + trimmed + wide <= self.width {
            self.flush_to(true);
        } else if self.pending_indent + 2 + wide <= self.width
            && self.pending_indent < self.width / 2
        {
            self.flush();
            self.new_line(self.pending_indent + 2);
        }
    }

    fn new_line(&mut self, indent: usize) {
        self.lines.push(std::mem::take(&mut self.line));
        self.line = " ".repeat(indent);
        self.column = indent;
    }

    /// Puts the pending piece on the line, or on a new one where it does not fit.
    fn flush(&mut self) {
        let fits = self.column + columns(&self.pending) <= self.width;
        self.flush_to(self.force || (!self.empty && !fits));
    }

    fn flush_to(&mut self, new_line: bool) {
        let mut piece = std::mem::take(&mut self.pending);
        self.force = false;
        if new_line {
            self.broken = self.broken.max(self.pending_depth);
            let indent = self.pending_indent.min(self.width / 2);
            self.new_line(indent);
            let trimmed = piece.trim_start().to_owned();
            self.settle_starts(indent, columns(&piece) - columns(&trimmed));
            piece = trimmed;
        } else {
            self.settle_starts(self.column, 0);
        }
        self.empty = false;
        self.pending_depth = self.starts.len();
        self.column += columns(&piece);
        self.line.push_str(&piece);
        self.pending_indent = match self.starts.last() {
            Some(Start::Known(column)) => *column,
            _ => 0,
        };
    }

    fn settle_starts(&mut self, column: usize, dropped: usize) {
        for start in &mut self.starts {
            if let Start::InPending(offset) = *start {
                *start = Start::Known(column + offset - dropped);
            }
        }
    }

    fn finish(mut self) -> Vec<String> {
        self.flush();
        self.lines.push(self.line);
        self.lines
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn sum(names: &[&str]) -> Math {
        Math::sum(names.iter().map(|name| Math::name(name)))
    }

    #[test]
    fn breaks_before_signs() {
        let math = sum(&["aaaa", "bbbb", "cccc", "dddd"]);
        assert_eq!(lines(&math, 14, 2), ["aaaa + bbbb", "+ cccc + dddd"]);
    }

    #[test]
    fn aligns_inside_an_open_parenthesis() {
        let inner = sum(&["aaaa", "bbbb", "cccc"]);
        let math = Math::sum([Math::name("x"), Math::product([Math::name("s"), inner])]);
        assert_eq!(
            lines(&math, 18, 2),
            ["x + s·(aaaa", "         + bbbb", "         + cccc)"]
        );
    }

    #[test]
    fn words_fill_lines() {
        let items = ["C1", "C2", "C3"].map(str::to_owned);
        assert_eq!(words(&items, "  ", 6), ["C1  C2", "C3"]);
    }
}
