//! A long polynomial with its common symbols taken out, one after the other (Horner's scheme in
//! several variables): far shorter than the sum of its terms, and still exact.

use std::collections::BTreeMap;

use crate::algebra::{Integer, Monomial, Polynomial, Symbol};
use crate::render::math::{self, Math};
use crate::render::names::Names;

type Terms = Vec<(Monomial, Integer)>;

/// The polynomial in nested form; a sum of unrelated terms stays as it is.
///
/// Cost: each step visits every remaining term; steps are bounded by symbols times degree.
#[must_use]
pub fn nested(polynomial: &Polynomial, names: &Names<'_>) -> Math {
    nest(math::ordered_terms(polynomial, names), names)
}

fn nest(mut terms: Terms, names: &Names<'_>) -> Math {
    let mut parts: Vec<(Vec<Math>, Math)> = Vec::new();
    while let Some((symbol, exponent)) = most_shared(&terms, names) {
        let divisor = Monomial::power(symbol, exponent);
        let (with, without): (Terms, Terms) = terms
            .into_iter()
            .partition(|(monomial, _)| monomial.exponent(symbol) > 0);
        let inner = with
            .into_iter()
            .filter_map(|(monomial, coefficient)| Some((monomial.div(&divisor)?, coefficient)))
            .collect();
        let taken = Math::name(names.name(symbol)).power(exponent);
        join(&mut parts, taken, nest(inner, names));
        terms = without;
    }
    let rest = math::polynomial(&Polynomial::from_terms(terms), names);
    let products = parts
        .into_iter()
        .map(|(taken, inner)| Math::product([Math::sum(taken), inner]));
    let parts = products.chain([rest]);
    Math::sum(parts.filter(|part| !is_zero(part)))
}

/// Puts what was taken out beside the others that leave the same: `(R1 + R2)·(C1 + C2)`.
fn join(parts: &mut Vec<(Vec<Math>, Math)>, taken: Math, inner: Math) {
    match parts.iter_mut().find(|(_, other)| *other == inner) {
        Some((list, _)) => list.push(taken),
        None => parts.push((vec![taken], inner)),
    }
}

/// The symbol that stands in most terms, at least two, and its least exponent there.
fn most_shared(terms: &Terms, names: &Names<'_>) -> Option<(Symbol, u32)> {
    let mut seen: BTreeMap<Symbol, (usize, u32)> = BTreeMap::new();
    for (symbol, exponent) in terms.iter().flat_map(|(monomial, _)| monomial.factors()) {
        let entry = seen.entry(symbol).or_insert((0, exponent));
        *entry = (entry.0 + 1, entry.1.min(exponent));
    }
    seen.into_iter()
        .filter(|(_, (count, _))| *count > 1)
        .max_by(|left, right| {
            let count = left.1.0.cmp(&right.1.0);
            count.then_with(|| names.by_reading(right.0, left.0))
        })
        .map(|(symbol, (_, exponent))| (symbol, exponent))
}

fn is_zero(math: &Math) -> bool {
    matches!(math, Math::Number(number) if number.is_zero())
}
