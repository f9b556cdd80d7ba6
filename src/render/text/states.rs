//! State equations: what the states are, matrices where they fit, else one equation a line.

use crate::algebra::Fraction;
use crate::analysis::report::states::{Start, StateInput, StateMethod, StateSystem};
use crate::render::answer::Answer;
use crate::render::linear::{READING, superscript};
use crate::render::math::{self, Math};
use crate::render::names::{FrequencyPlace, Names};
use crate::render::sentence::{counted, listed};
use crate::render::states::{self, Manner};
use crate::render::text::Page;
use crate::render::text::block::{Block, columns};
use crate::render::text::fill;
use crate::render::text::paint::Paint;

const INDENT: usize = 2;
/// More states than this stand as equations.
const MOST_STATES: usize = 6;

/// One system.
pub(super) fn system(answer: &Answer<'_>, system: &StateSystem, page: &Page) -> String {
    let names = answer.names(FrequencyPlace::First);
    let writer = Writer {
        answer,
        system,
        names: &names,
        page,
    };
    let mut parts = vec![writer.vector(), writer.equations()];
    if !system.dependent.is_empty() {
        parts.push(writer.dependent());
    }
    if let Some(start) = &system.start {
        parts.push(writer.start(start));
    }
    parts.push(writer.footer());
    format!("{}\n{}", writer.heading(), parts.join("\n"))
}

/// Questions that have no place among the outputs.
pub(super) fn no_output(answer: &Answer<'_>, page: &Page) -> String {
    let Some(states) = &answer.report.states else {
        return String::new();
    };
    let questions = states.no_output.iter();
    let list: Vec<&str> = questions
        .map(|it| answer.network.questions()[*it].name.as_str())
        .collect();
    if list.is_empty() {
        return String::new();
    }
    let sentence = format!("no output of linear state equations: {}", listed(&list));
    format!("{}\n", Paint(page.colour).quiet(&sentence))
}

struct Writer<'a> {
    answer: &'a Answer<'a>,
    system: &'a StateSystem,
    names: &'a Names<'a>,
    page: &'a Page,
}

impl Writer<'_> {
    fn heading(&self) -> String {
        let mut text = "State equations".to_owned();
        if !self.system.without.is_empty() {
            let parts = self.answer.parts(&self.system.without);
            text.push_str(&format!(" without {}", parts.join(", ")));
        }
        if let [input @ StateInput::VoltageAcross(_), ..] = self.system.inputs.as_slice() {
            text.push_str(&format!(
                " with a {}",
                states::input_means(self.answer, input)
            ));
        }
        Paint(self.page.colour).strong(&text)
    }

    fn states(&self) -> Vec<String> {
        let vector = self.system.vector.iter();
        vector
            .map(|it| states::state_name(self.answer, it))
            .collect()
    }

    fn inputs(&self) -> Vec<String> {
        let inputs = self.system.inputs.iter();
        inputs
            .map(|it| states::input_name(self.answer, it))
            .collect()
    }

    fn outputs(&self) -> Vec<String> {
        let outputs = self.system.outputs.iter();
        outputs
            .map(|it| states::output_name(self.answer, *it))
            .collect()
    }

    fn vector(&self) -> String {
        let paint = Paint(self.page.colour);
        if self.system.vector.is_empty() {
            return "  no states: every response follows its source at once\n".to_owned();
        }
        let names = self.states();
        let widest = names.iter().map(|it| columns(it)).max().unwrap_or(0);
        let mut text = String::new();
        for (name, state) in names.iter().zip(&self.system.vector) {
            let means = states::state_means(self.answer, state);
            let gap = " ".repeat(widest - columns(name) + 3);
            text.push_str(&format!("  {name}{gap}{}\n", paint.quiet(&means)));
        }
        text
    }

    /// `  left = ` and an expression broken behind it.
    fn equation(&self, left: &str, value: &Math) -> String {
        let first = format!("  {left} = ");
        let indent = columns(&first) - 2;
        let room = self.page.width.saturating_sub(indent).max(20);
        let mut text = String::new();
        for (index, line) in fill::lines(value, room, 2).into_iter().enumerate() {
            match index {
                0 => text.push_str(&format!("{first}{line}\n")),
                _ => text.push_str(&format!("{}{line}\n", " ".repeat(indent))),
            }
        }
        text
    }

    fn equations(&self) -> String {
        let fits = self.system.vector.len() <= MOST_STATES;
        if let Some(text) = fits.then(|| self.matrices()).flatten() {
            return text;
        }
        let mut text = String::new();
        let value = |states: &[Fraction], inputs: &[Vec<Vec<Fraction>>], index: usize| {
            let row = states::row(states, inputs, index);
            states::affine(self.answer, self.system, &row, self.names, Manner::Reading)
        };
        for (index, (name, states)) in self.states().iter().zip(&self.system.a).enumerate() {
            let value = value(states, &self.system.b, index);
            text.push_str(&self.equation(&format!("d{name}/dt"), &value));
        }
        if !self.system.outputs.is_empty() && !text.is_empty() {
            text.push('\n');
        }
        for (index, (name, states)) in self.outputs().iter().zip(&self.system.c).enumerate() {
            let value = value(states, &self.system.d, index);
            text.push_str(&self.equation(name, &value));
        }
        text
    }

    /// `dx/dt = A·x + B·u` with its matrices; `None` where one is too wide.
    fn matrices(&self) -> Option<String> {
        let system = self.system;
        let mut text = String::new();
        let (has_states, has_outputs) = (!system.vector.is_empty(), !system.outputs.is_empty());
        let right = |letter: &str, matrices: &[Vec<Vec<Fraction>>]| -> Vec<(String, String)> {
            let several = matrices.len() > 1;
            let named = (0_u32..).zip(matrices).filter(|(power, matrix)| {
                *power == 0 && !several || matrix.iter().flatten().any(|it| !it.is_zero())
            });
            named
                .map(|(power, _)| {
                    let name = if several {
                        format!("{letter}{power}")
                    } else {
                        letter.to_owned()
                    };
                    let input = match power {
                        0 => "u".to_owned(),
                        1 => "du/dt".to_owned(),
                        _ => format!("d{0}u/dt{0}", superscript(power)),
                    };
                    let product = format!("{name}·{input}");
                    (name, product)
                })
                .collect()
        };
        let index = |name: &str| name[1..].parse().unwrap_or(0_usize);
        let mut drawn = Vec::new();
        let mut lines = Vec::new();
        if has_states {
            let b = right("B", &system.b);
            let mut sum = vec!["A·x".to_owned()];
            sum.extend(b.iter().map(|(_, product)| product.clone()));
            lines.push(format!("dx/dt = {}", sum.join(" + ")));
            drawn.push(vec![self.matrix("A", &system.a)]);
            for (name, _) in &b {
                if let Some(last) = drawn.last_mut() {
                    last.push(self.matrix(name, &system.b[index(name)]));
                }
            }
        }
        if has_outputs {
            let d = right("D", &system.d);
            let mut sum = Vec::new();
            if has_states {
                sum.push("C·x".to_owned());
            }
            sum.extend(d.iter().map(|(_, product)| product.clone()));
            lines.push(format!("    y = {}", sum.join(" + ")));
            drawn.push(Vec::new());
            if let Some(last) = drawn.last_mut() {
                if has_states {
                    last.push(self.matrix("C", &system.c));
                }
                for (name, _) in &d {
                    last.push(self.matrix(name, &system.d[index(name)]));
                }
            }
        }
        let vectors = [
            ("x", self.states()),
            ("u", self.inputs()),
            ("y", self.outputs()),
        ];
        let vectors: Vec<String> = vectors
            .iter()
            .filter(|(_, list)| !list.is_empty())
            .map(|(name, list)| format!("{name} = ({})", list.join(", ")))
            .collect();
        for line in lines {
            text.push_str(&format!("  {line}\n"));
        }
        for line in fill::words(&vectors, "   ", self.page.width - INDENT) {
            text.push_str(&format!("  {}\n", Paint(self.page.colour).quiet(&line)));
        }
        for group in drawn {
            for line in self.side_by_side(group)? {
                text.push('\n');
                text.push_str(&line.indented(INDENT));
            }
        }
        Some(text)
    }

    /// Matrices beside each other as far as they fit; `None` where one alone does not.
    fn side_by_side(&self, blocks: Vec<Block>) -> Option<Vec<Block>> {
        let room = self.page.width - INDENT;
        let mut lines: Vec<Block> = Vec::new();
        for block in blocks {
            if block.width() > room {
                return None;
            }
            match lines.pop() {
                Some(line) if line.width() + 4 + block.width() <= room => {
                    lines.push(Block::beside(&[line, Block::text("    "), block]));
                }
                Some(line) => lines.extend([line, block]),
                None => lines.push(block),
            }
        }
        Some(lines)
    }

    fn matrix(&self, name: &str, rows: &[Vec<Fraction>]) -> Block {
        let cells: Vec<Vec<String>> = rows
            .iter()
            .map(|row| {
                let cells = row.iter();
                let spell = |it| READING.spell(&states::entry(it, self.names, Manner::Reading));
                cells.map(spell).collect()
            })
            .collect();
        Block::beside(&[Block::text(format!("{name} = ")), Block::matrix(&cells)])
    }

    fn dependent(&self) -> String {
        let mut text = String::new();
        for dependent in &self.system.dependent {
            let name = states::state_name(self.answer, &dependent.quantity);
            let value = states::affine(
                self.answer,
                self.system,
                &dependent.equals,
                self.names,
                Manner::Reading,
            );
            text.push_str(&self.equation(&name, &value));
        }
        let one = self.system.dependent.len() == 1;
        let sentence = if one {
            "keeps no state of its own:"
        } else {
            "keep no states of their own:"
        };
        let parts: Vec<String> = self
            .system
            .dependent
            .iter()
            .map(|it| states::state_name(self.answer, &it.quantity)[1..].to_owned())
            .collect();
        format!("  {} {sentence}\n{text}", listed(&parts))
    }

    fn start(&self, start: &Start) -> String {
        let mut text = "  right after t = 0, sources constant from then on:\n".to_owned();
        for (state, value) in &start.after {
            let name = states::state_name(self.answer, state);
            let value =
                states::affine(self.answer, self.system, value, self.names, Manner::Reading);
            text.push_str(&self.equation(&format!("{name}(0+)"), &value));
        }
        if !start.responses.is_empty() {
            text.push_str("\n  from the starting values alone:\n");
        }
        for (name, value) in self.outputs().iter().zip(&start.responses) {
            let left = format!("{name}  =  ");
            let side = |it| READING.spell(&math::by_powers_of_s(it, self.names));
            let (above, below) = (side(value.numerator()), side(value.denominator()));
            let right = if value.denominator().is_one() {
                Block::text(above.clone())
            } else {
                Block::fraction(&Block::text(above.clone()), &Block::text(below.clone()))
            };
            let block = Block::beside(&[Block::text(left), right]);
            text.push('\n');
            if INDENT + block.width() <= self.page.width {
                text.push_str(&block.indented(INDENT));
            } else {
                text.push_str(
                    &self.equation(name, &states::entry(value, self.names, Manner::Reading)),
                );
            }
        }
        text
    }

    fn footer(&self) -> String {
        let method = match &self.system.method {
            StateMethod::NormalTree(tree) if tree.is_empty() => "normal tree".to_owned(),
            StateMethod::NormalTree(tree) => {
                format!("normal tree {}", self.answer.parts(tree).join(" "))
            }
            StateMethod::Pencil => {
                "states in file order, as far as the equations leave them independent".to_owned()
            }
        };
        let mut words = vec![
            method,
            "proven by putting them into the equations of the network".to_owned(),
        ];
        if self.system.checked_points > 0 {
            let points = counted(self.system.checked_points as usize, "point", "points");
            words.push(format!("agree with the nodal equations at {points}"));
        }
        let mut text = String::new();
        for line in fill::words(&words, " · ", self.page.width - INDENT) {
            text.push_str(&format!("  {}\n", Paint(self.page.colour).quiet(&line)));
        }
        text
    }
}
