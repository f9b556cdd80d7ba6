//! How much of a formula is written in place, and names for coefficients where it is long.

use crate::algebra::Polynomial;
use crate::analysis::form::{Form, Normalised};
use crate::analysis::report::Expanded;
use crate::render::form;
use crate::render::math::{self, Math};
use crate::render::names::Names;
use crate::render::nest;
use crate::render::share;

/// Up to this many terms a formula is written in one piece.
const IN_PLACE: usize = 40;
/// Up to this many terms coefficients are written as sums; above it in nested form.
const AS_SUMS: usize = 300;

/// The way a formula of some length is written.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Manner {
    /// In one piece.
    InPlace,
    /// With named coefficients.
    Named,
    /// With named coefficients in nested form.
    Nested,
}

/// Terms of numerator and denominator.
#[must_use]
pub fn term_counts(formula: &Expanded) -> (usize, usize) {
    let count = |side: &[Polynomial]| side.iter().map(Polynomial::len).sum();
    (count(&formula.numerator), count(&formula.denominator))
}

/// The way a formula is written.
#[must_use]
pub fn manner(formula: &Expanded) -> Manner {
    let (above, below) = term_counts(formula);
    match above + below {
        0..=IN_PLACE => Manner::InPlace,
        count if count <= AS_SUMS => Manner::Named,
        _ => Manner::Nested,
    }
}

/// A coefficient with its name.
#[derive(Clone, Debug)]
pub struct Definition {
    /// Name, such as `b1`.
    pub name: String,
    /// What it stands for.
    pub value: Math,
    /// Terms when expanded; 0 where that was not counted.
    pub terms: usize,
}

/// A formula over named coefficients.
#[derive(Clone, Debug)]
pub struct NamedForm {
    /// Numerator, over the names.
    pub numerator: Math,
    /// Denominator, over the names.
    pub denominator: Math,
    /// What the names stand for, numerator first.
    pub definitions: Vec<Definition>,
}

/// The quotient with a first coefficient of one below, each other coefficient by a name.
#[must_use]
pub fn normalised(form: &Normalised, names: &Names<'_>) -> NamedForm {
    let powers = form.numerator.len().max(form.denominator.len());
    let (above, below) = letters(powers, names);
    let mut definitions = Vec::new();
    let mut side = |coefficients: &[Form], letter: &str| {
        let parts = (0..).zip(coefficients).filter(|(_, it)| !it.is_zero());
        Math::sum(parts.map(|(power, coefficient)| {
            let value = form::math(coefficient, names);
            let factor = if matches!(coefficient, Form::Number(_)) {
                value
            } else {
                let name = format!("{letter}{power}");
                let factor = Math::name(&name);
                definitions.push(Definition {
                    name,
                    value,
                    terms: 0,
                });
                factor
            };
            Math::product([factor, Math::name("s").power(power)])
        }))
    };
    let numerator = side(&form.numerator, above);
    let denominator = side(&form.denominator, below);
    NamedForm {
        numerator,
        denominator,
        definitions,
    }
}

/// Gives names to all coefficients that are not numbers; `nested` with common symbols taken out.
#[must_use]
pub fn named(formula: &Expanded, names: &Names<'_>, nested: bool) -> NamedForm {
    let powers = formula.numerator.len().max(formula.denominator.len());
    let (above, below) = letters(powers, names);
    let mut definitions = Vec::new();
    let mut side = |coefficients: &[Polynomial], letter: &str| {
        let parts = coefficients.iter().enumerate();
        let parts = parts.filter(|(_, coefficient)| !coefficient.is_zero());
        Math::sum(parts.map(|(power, coefficient)| {
            let factor = if coefficient.is_constant() {
                math::polynomial(coefficient, names)
            } else {
                let name = format!("{letter}{power}");
                let factor = Math::name(&name);
                definitions.push(define(name, coefficient, nested, names));
                factor
            };
            let power = u32::try_from(power).unwrap_or(u32::MAX);
            Math::product([factor, Math::name("s").power(power)])
        }))
    };
    let numerator = side(&formula.numerator, above);
    let denominator = side(&formula.denominator, below);
    if nested {
        definitions = with_shared_sums(definitions, names);
    }
    NamedForm {
        numerator,
        denominator,
        definitions,
    }
}

/// Sums that stand in several places get names of their own, in front of what uses them.
fn with_shared_sums(list: Vec<Definition>, names: &Names<'_>) -> Vec<Definition> {
    let values: Vec<Math> = list.iter().map(|it| it.value.clone()).collect();
    let free = ["x", "y", "z", "ξ"].into_iter().find(|letter| {
        let most: usize = values.iter().map(Math::leaves).sum();
        (1..=most).all(|number| !names.is_taken(&format!("{letter}{number}")))
    });
    let shared = share::shared_sums(&values, free.unwrap_or("shared_"));
    let first = shared
        .definitions
        .into_iter()
        .map(|(name, value)| Definition {
            name,
            value,
            terms: 0,
        });
    let rest = list.into_iter().zip(shared.values);
    first
        .chain(rest.map(|(it, value)| Definition { value, ..it }))
        .collect()
}

fn define(name: String, value: &Polynomial, nested: bool, names: &Names<'_>) -> Definition {
    Definition {
        name,
        value: if nested {
            nest::nested(value, names)
        } else {
            math::for_reading(value, names)
        },
        terms: value.len(),
    }
}

/// Letters whose numbered forms are no names of the network.
fn letters(powers: usize, names: &Names<'_>) -> (&'static str, &'static str) {
    const PAIRS: [(&str, &str); 5] = [("a", "b"), ("n", "d"), ("p", "q"), ("α", "β"), ("a_", "b_")];
    let free = |letter: &str| (0..powers).all(|power| !names.is_taken(&format!("{letter}{power}")));
    let found = PAIRS
        .into_iter()
        .find(|(above, below)| free(above) && free(below));
    found.unwrap_or(("num_", "den_"))
}
