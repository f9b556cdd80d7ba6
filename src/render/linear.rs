//! Spells expressions on one line: in the language's own syntax, or for reading.

use crate::render::math::{Bars, Math, Within};

/// The signs of one way of writing.
#[derive(Clone, Copy, Debug)]
pub struct Style {
    times: &'static str,
    plus: &'static str,
    minus: &'static str,
    sign: &'static str,
    slash: &'static str,
    parallel: &'static str,
    root: &'static str,
    exponent: fn(u32) -> String,
}

/// The syntax of the language's expressions: `3*R1*C1^2`.
pub const MACHINE: Style = Style {
    times: "*",
    plus: " + ",
    minus: " - ",
    sign: "-",
    slash: "/",
    parallel: " || ",
    root: "sqrt",
    exponent: |exponent| format!("^{exponent}"),
};

/// For reading: `3·R1·C1²`.
pub const READING: Style = Style {
    times: "·",
    plus: " + ",
    minus: " − ",
    sign: "−",
    slash: "/",
    parallel: " ∥ ",
    root: "√",
    exponent: superscript,
};

/// Digits raised: `²`.
#[must_use]
pub fn superscript(number: u32) -> String {
    const DIGITS: [char; 10] = ['⁰', '¹', '²', '³', '⁴', '⁵', '⁶', '⁷', '⁸', '⁹'];
    number
        .to_string()
        .bytes()
        .map(|digit| DIGITS[usize::from(digit - b'0')])
        .collect()
}

impl Style {
    /// Spells an expression.
    #[must_use]
    pub fn spell(&self, math: &Math) -> String {
        let mut text = String::new();
        self.write(math, Within::Alone, &mut text);
        text
    }

    /// Spells an expression as it stands in a larger one, with parentheses where they are needed.
    #[must_use]
    pub fn spell_within(&self, math: &Math, within: Within) -> String {
        let mut text = String::new();
        self.write(math, within, &mut text);
        text
    }

    fn write(&self, math: &Math, within: Within, text: &mut String) {
        let grouped = math.is_grouped(within, Bars::Slash);
        if grouped {
            text.push('(');
        }
        self.write_bare(math, text);
        if grouped {
            text.push(')');
        }
    }

    fn write_bare(&self, math: &Math, text: &mut String) {
        match math {
            Math::Number(number) => text.push_str(&number.to_string()),
            Math::Symbol(name) => text.push_str(name),
            Math::Sum(_) => self.write_sum(math, text),
            Math::Product(factors) => self.join(factors, self.times, Within::Product, text),
            Math::Parallel(members) => self.join(members, self.parallel, Within::Parallel, text),
            Math::Quotient(above, below) => {
                self.write(above, Within::Product, text);
                text.push_str(self.slash);
                self.write(below, Within::Divisor, text);
            }
            Math::Power(base, exponent) => {
                self.write(base, Within::Base, text);
                text.push_str(&(self.exponent)(*exponent));
            }
            Math::Root(inner) => {
                text.push_str(self.root);
                let bracketed =
                    self.root.is_ascii() && !inner.is_grouped(Within::Base, Bars::Slash);
                text.push_str(if bracketed { "(" } else { "" });
                self.write(inner, Within::Base, text);
                text.push_str(if bracketed { ")" } else { "" });
            }
            Math::Negative(inner) => {
                text.push_str(self.sign);
                self.write(inner, Within::Sum, text);
            }
        }
    }

    fn write_sum(&self, math: &Math, text: &mut String) {
        for (index, (negative, body)) in math.terms().into_iter().enumerate() {
            text.push_str(match (index, negative) {
                (0, false) => "",
                (0, true) => self.sign,
                (_, false) => self.plus,
                (_, true) => self.minus,
            });
            self.write(body, Within::Sum, text);
        }
    }

    fn join(&self, parts: &[Math], between: &str, within: Within, text: &mut String) {
        for (index, part) in parts.iter().enumerate() {
            if index > 0 {
                text.push_str(between);
            }
            self.write(part, within, text);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::algebra::Integer;

    fn name(text: &str) -> Math {
        Math::name(text)
    }

    #[test]
    fn groups_only_where_precedence_asks_for_it() {
        let sum = Math::sum([name("R1"), name("R2")]);
        let parallel = Math::Parallel(vec![name("R1"), name("R2")]);
        let difference = Math::sum([name("a"), sum.clone().signed(true)]);
        let cases = [
            (Math::product([name("s"), sum.clone()]), "s*(R1 + R2)"),
            (Math::quotient(name("R1"), sum.clone()), "R1/(R1 + R2)"),
            (Math::sum([parallel.clone(), name("R3")]), "R1 || R2 + R3"),
            (Math::product([name("C"), parallel]), "C*(R1 || R2)"),
            (sum.power(2), "(R1 + R2)^2"),
            (difference, "a - (R1 + R2)"),
        ];
        for (math, expected) in cases {
            assert_eq!(MACHINE.spell(&math), expected);
        }
    }

    #[test]
    fn signs_move_to_the_front() {
        let negative = Math::integer(&Integer::from(-1_i64));
        let math = Math::quotient(Math::product([negative, name("R2")]), name("R1"));
        assert_eq!(READING.spell(&math), "−R2/R1");
        assert_eq!(READING.spell(&name("s").power(12)), "s¹²");
    }
}
