//! Expressions as LaTeX, whole or broken into lines before a sign.

use crate::render::latex::escape;
use crate::render::math::{Bars, Math, Within};

/// Width of a text line in tenths of an em, as common pages have it.
pub(super) const LINE: usize = 330;

/// A piece that is not broken, with its width and whether a parenthesis is open where it starts.
struct Piece {
    text: String,
    width: usize,
    depth: usize,
}

/// An expression in one piece.
pub(super) fn spell(math: &Math) -> String {
    pieces(math).into_iter().map(|piece| piece.text).collect()
}

/// Estimated width in tenths of an em.
pub(super) fn width(math: &Math) -> usize {
    pieces(math).iter().map(|piece| piece.width).sum()
}

/// Lines for an aligned equation whose left side takes `left` tenths of an em.
pub(super) fn lines(math: &Math, left: usize) -> Vec<String> {
    const INDENT: usize = 20;
    let mut lines = vec![String::new()];
    let mut used = left;
    for piece in pieces(math) {
        let empty = lines.last().is_none_or(String::is_empty);
        if !empty && used + piece.width > LINE {
            let blank = if piece.depth > 0 { "\\qquad" } else { "\\quad" };
            lines.push(format!("{blank}{{}}"));
            used = left + INDENT * (1 + piece.depth.min(1));
        }
        used += piece.width;
        if let Some(line) = lines.last_mut() {
            line.push_str(&piece.text);
        }
    }
    lines
}

fn pieces(math: &Math) -> Vec<Piece> {
    let mut writer = Writer {
        done: Vec::new(),
        text: String::new(),
        width: 0,
        start: 0,
        depth: 0,
    };
    writer.part(math, Within::Alone);
    writer.cut();
    writer.done
}

struct Writer {
    done: Vec<Piece>,
    text: String,
    width: usize,
    start: usize,
    depth: usize,
}

impl Writer {
    fn push(&mut self, text: &str, width: usize) {
        self.text.push_str(text);
        self.width += width;
    }

    fn cut(&mut self) {
        self.done.push(Piece {
            text: std::mem::take(&mut self.text),
            width: std::mem::take(&mut self.width),
            depth: self.start,
        });
        self.start = self.depth;
    }

    fn part(&mut self, math: &Math, within: Within) {
        let grouped = math.is_grouped(within, Bars::Drawn);
        if grouped {
            self.push("(", 4);
            self.depth += 1;
        }
        self.bare(math);
        if grouped {
            self.push(")", 4);
            self.depth -= 1;
        }
    }

    fn bare(&mut self, math: &Math) {
        match math {
            Math::Number(number) => {
                let digits = number.to_string();
                self.push(&digits, 5 * digits.len());
            }
            Math::Symbol(name) => {
                let index = name.chars().count() - 1;
                self.push(&escape::name(name), 7 + 4 * index);
            }
            Math::Sum(_) => self.sum(math),
            Math::Product(factors) => self.joined(factors, " ", 1, Within::Product),
            Math::Parallel(members) => {
                self.joined(members, " \\parallel ", 15, Within::Parallel);
            }
            Math::Quotient(above, below) => {
                let inner = width(above).max(width(below));
                let text = format!("\\frac{{{}}}{{{}}}", spell(above), spell(below));
                self.push(&text, inner + 3);
            }
            Math::Power(base, exponent) => {
                self.part(base, Within::Base);
                self.push(&format!("^{{{exponent}}}"), 4);
            }
            Math::Root(inner) => {
                self.push(&format!("\\sqrt{{{}}}", spell(inner)), width(inner) + 8);
            }
            Math::Negative(inner) => {
                self.push("-", 10);
                self.part(inner, Within::Sum);
            }
        }
    }

    fn sum(&mut self, math: &Math) {
        for (index, (negative, body)) in math.terms().into_iter().enumerate() {
            if index > 0 {
                self.cut();
            }
            match (index, negative) {
                (0, false) => {}
                (0, true) => self.push("-", 10),
                (_, false) => self.push(" + ", 13),
                (_, true) => self.push(" - ", 13),
            }
            self.part(body, Within::Sum);
        }
    }

    fn joined(&mut self, parts: &[Math], between: &str, gap: usize, within: Within) {
        for (index, part) in parts.iter().enumerate() {
            if index > 0 {
                self.push(between, gap);
            }
            self.part(part, within);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn spells_fractions_powers_and_parallels() {
        let below = Math::sum([
            Math::Number(1_i64.into()),
            Math::product([Math::name("s").power(2), Math::name("R1")]),
        ]);
        let above = Math::Parallel(vec![Math::name("R1"), Math::name("R2")]);
        let math = Math::quotient(Math::product([Math::name("gm"), above]), below);
        assert_eq!(
            spell(&math),
            "\\frac{g_{\\mathrm{m}} (R_{1} \\parallel R_{2})}{1 + s^{2} R_{1}}"
        );
    }

    #[test]
    fn long_sums_are_broken_before_a_sign() {
        let math = Math::sum((1..=20).map(|index| Math::name(&format!("R{index}"))));
        let lines = lines(&math, 40);
        assert_eq!(lines.len(), 2);
        assert!(lines[1].starts_with("\\quad{} + R_{"), "{}", lines[1]);
    }
}
