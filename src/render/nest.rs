//! A long polynomial with its common symbols taken out, one after the other (Horner's scheme in
//! several variables): far shorter than the sum of its terms, and still exact.

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
    let mut seen: Vec<Option<Seen>> = Vec::new();
    for (symbol, exponent) in terms.iter().flat_map(|(monomial, _)| monomial.factors()) {
        let index = symbol.index();
        if index >= seen.len() {
            seen.resize(index + 1, None);
        }
        let entry = seen[index].get_or_insert(Seen {
            symbol,
            terms: 0,
            exponent,
        });
        entry.terms += 1;
        entry.exponent = entry.exponent.min(exponent);
    }
    seen.into_iter()
        .flatten()
        .filter(|it| it.terms > 1)
        .max_by(|left, right| {
            let by_terms = left.terms.cmp(&right.terms);
            by_terms.then_with(|| names.by_reading(right.symbol, left.symbol))
        })
        .map(|it| (it.symbol, it.exponent))
}

/// In how many terms a symbol was seen, and its least exponent.
#[derive(Clone, Copy)]
struct Seen {
    symbol: Symbol,
    terms: usize,
    exponent: u32,
}

fn is_zero(math: &Math) -> bool {
    matches!(math, Math::Number(number) if number.is_zero())
}
