//! A function over its gain, time constants, frequencies and qualities.

use std::cmp::Ordering;

use crate::algebra::Symbol;
use crate::analysis::form::{Designer, Form, Section, Shape};
use crate::analysis::report::Expanded;
use crate::render::coefficients::Definition;
use crate::render::form;
use crate::render::linear::READING;
use crate::render::math::{self, Math};
use crate::render::names::{Names, natural};

/// Time constants with more names and numbers than this get a name beside other sections.
const IN_PLACE: usize = 3;

/// Letters of the coefficients of numerator and denominator.
const ABOVE: [&str; 4] = ["a", "n", "p", "α"];
const BELOW: [&str; 4] = ["b", "d", "q", "β"];

/// A function over names, and what they stand for.
#[derive(Clone, Debug)]
pub struct StandardForm {
    /// Whether a minus stands in front.
    pub negative: bool,
    /// What stands in front, where it is not one.
    pub gain: Option<Math>,
    /// The fraction, where there is one.
    pub fraction: Option<Math>,
    /// What its names stand for.
    pub definitions: Vec<Definition>,
}

/// The function as it is written.
#[must_use]
pub fn standard(designer: &Designer, names: &Names<'_>) -> StandardForm {
    let mut writer = Writer::new(designer, names);
    let below = writer.side(&designer.below, false);
    let above = writer.side(&designer.above, true);
    let power = designer.power.unsigned_abs();
    let frequency = Math::name("s").power(power);
    let (above, below) = match designer.power {
        0 => (above, below),
        1.. => (Math::product([frequency, above]), below),
        _ => (above, Math::product([frequency, below])),
    };
    let fraction = Math::quotient(above, below);
    let (negative, gain) = form::math(&designer.gain, names).split_sign();
    let one = Math::Number(1_i64.into());
    StandardForm {
        negative,
        fraction: (fraction != one).then_some(fraction),
        gain: (gain != one).then_some(gain),
        definitions: writer.definitions,
    }
}

/// Whether it says more than the quotient of polynomials: sections, or a shorter form.
#[must_use]
pub fn says_more(formula: &Expanded, designer: &Designer, names: &Names<'_>) -> bool {
    if !designer.above.is_empty() || !designer.below.is_empty() {
        return true;
    }
    if designer.power != 0 {
        return false;
    }
    let gain = form::math(&designer.gain, names);
    let above = math::factored_series(&formula.numerator, names);
    let quotient = Math::quotient(above, math::factored_series(&formula.denominator, names));
    gain.leaves() <= quotient.leaves() && gain != quotient
}

struct Writer<'a> {
    names: &'a Names<'a>,
    /// Whether there is one section in all, powers of s and terms in its own names aside.
    alone: bool,
    /// Sections with names so far, below and above.
    firsts: [usize; 2],
    seconds: [usize; 2],
    /// Sections of second order below.
    resonances: usize,
    /// Free letters for coefficients, above and below.
    letters: [Vec<&'static str>; 2],
    omega: String,
    damping: String,
    tau: String,
    definitions: Vec<Definition>,
}

impl<'a> Writer<'a> {
    fn new(designer: &Designer, names: &'a Names<'a>) -> Self {
        let own = |section: &&Section| {
            !matches!(section.shape, Shape::Rise | Shape::Damping | Shape::Square)
        };
        let all = designer.above.iter().chain(&designer.below);
        let resonances = designer.below.iter();
        let resonances = resonances.filter(|it| matches!(it.shape, Shape::Second { .. }));
        Self {
            names,
            alone: all.filter(own).count() == 1 || is_first_over_first(designer),
            firsts: [0, 0],
            seconds: [0, 0],
            resonances: resonances.count(),
            letters: [BELOW, ABOVE].map(|list| {
                let free =
                    |letter: &&str| (1..=12).all(|it| !names.is_taken(&format!("{letter}{it}")));
                list.into_iter().rev().filter(free).collect()
            }),
            omega: String::new(),
            damping: String::new(),
            tau: String::new(),
            definitions: Vec::new(),
        }
    }

    fn side(&mut self, sections: &[Section], above: bool) -> Math {
        let several = sections.len() > 1;
        let mut sections: Vec<&Section> = sections.iter().collect();
        sections.sort_by_cached_key(|it| Place::of(&it.shape, self.names));
        let sections = sections.into_iter().map(|section| {
            self.section(&section.shape, above, several)
                .power(section.power)
        });
        Math::product(sections.collect::<Vec<_>>())
    }

    fn section(&mut self, shape: &Shape, above: bool, several: bool) -> Math {
        let side = usize::from(above);
        let z = if above { "z" } else { "" };
        match shape {
            Shape::First { tau } => {
                let value = form::math(tau, self.names);
                if !self.alone && value.leaves() <= IN_PLACE {
                    let term = Form::product([Form::Symbol(Symbol::S), tau.clone()]);
                    return one_plus([form::math(&term, self.names)]);
                }
                let turned = value.clone().signed(true);
                for known in &self.definitions {
                    if known.value == value || known.value == turned {
                        let negative = known.value == turned;
                        return one_plus([times_s(&known.name).signed(negative)]);
                    }
                }
                self.firsts[side] += 1;
                let number = if several {
                    self.firsts[side].to_string()
                } else {
                    String::new()
                };
                let name = self.define(&format!("τ{z}{number}"), value);
                self.tau.clone_from(&name);
                one_plus([times_s(&name)])
            }
            Shape::Second { omega, quality } => {
                self.seconds[side] += 1;
                let many = if above { several } else { self.resonances > 1 };
                let number = if many {
                    self.seconds[side].to_string()
                } else {
                    String::new()
                };
                let zero = if many || above { "" } else { "0" };
                let omega = form::math(omega, self.names);
                let known = self.definitions.iter().find(|it| it.value == omega);
                self.omega = match known {
                    Some(known) => known.name.clone(),
                    None => self.define(&format!("ω{z}{zero}{number}"), omega),
                };
                let square = relative_square(&self.omega);
                let Some(quality) = quality else {
                    return one_plus([square]);
                };
                let quality = form::math(quality, self.names);
                let quality = self.define(&format!("Q{z}{number}"), quality);
                self.damping = quality;
                one_plus([self.damping(), square])
            }
            Shape::Series(coefficients) => self.series(coefficients, above),
            Shape::Rise => times_s(&self.tau),
            Shape::Damping => self.damping(),
            Shape::Square => relative_square(&self.omega),
        }
    }

    fn series(&mut self, coefficients: &[Form], above: bool) -> Math {
        let values: Vec<Math> = coefficients
            .iter()
            .map(|it| form::math(it, self.names))
            .collect();
        let letter = self.letters[usize::from(above)].pop().unwrap_or("c_");
        let mut terms = vec![one()];
        for (power, value) in (1..).zip(values) {
            if matches!(&value, Math::Number(number) if number.is_zero()) {
                continue;
            }
            let frequency = Math::name("s").power(power);
            let factor = match value {
                number @ Math::Number(_) => number,
                value => Math::name(&self.define(&format!("{letter}{power}"), value)),
            };
            terms.push(Math::product([factor, frequency]));
        }
        Math::sum(terms)
    }

    /// s/(Q·ω0)
    fn damping(&self) -> Math {
        let below = [Math::name(&self.damping), Math::name(&self.omega)];
        Math::quotient(Math::name("s"), Math::product(below))
    }

    /// Gives a value a name that nothing else bears.
    fn define(&mut self, wish: &str, value: Math) -> String {
        let mut name = wish.to_owned();
        while self.names.is_taken(&name) || self.definitions.iter().any(|it| it.name == name) {
            name.push('_');
        }
        self.definitions.push(Definition {
            name: name.clone(),
            value,
            terms: 0,
        });
        name
    }
}

/// Whether one section of first order stands above one of first order.
fn is_first_over_first(designer: &Designer) -> bool {
    let first = |list: &[Section]| matches!(list, [only] if only.power == 1 && matches!(only.shape, Shape::First { .. }));
    first(&designer.above) && first(&designer.below)
}

/// Place of a section among its like: by kind, then as its first value is spelled.
#[derive(PartialEq, Eq)]
struct Place(usize, usize, String);

impl Place {
    fn of(shape: &Shape, names: &Names<'_>) -> Self {
        let (kind, value) = match shape {
            Shape::First { tau } => (0, Some(tau)),
            Shape::Second { omega, .. } => (1, Some(omega)),
            Shape::Series(list) => (2, list.first()),
            Shape::Rise | Shape::Damping | Shape::Square => (3, None),
        };
        let value = value.map(|it| form::math(it, names));
        let length = value.as_ref().map_or(0, Math::leaves);
        Self(
            kind,
            length,
            value.map_or(String::new(), |it| READING.spell(&it)),
        )
    }
}

impl Ord for Place {
    fn cmp(&self, other: &Self) -> Ordering {
        let (kind, length) = (self.0.cmp(&other.0), self.1.cmp(&other.1));
        kind.then(length).then_with(|| natural(&self.2, &other.2))
    }
}

impl PartialOrd for Place {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

fn one() -> Math {
    Math::Number(1_i64.into())
}

fn one_plus<const N: usize>(parts: [Math; N]) -> Math {
    Math::sum(std::iter::once(one()).chain(parts))
}

fn times_s(name: &str) -> Math {
    Math::product([Math::name("s"), Math::name(name)])
}

/// s²/ω²
fn relative_square(name: &str) -> Math {
    Math::quotient(Math::name("s").power(2), Math::name(name).power(2))
}
