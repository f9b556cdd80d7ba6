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
    let mut parts: Vec<Part> = Vec::new();
    while let Some((symbol, exponent)) = most_shared(&terms, names) {
        let divisor = Monomial::power(symbol, exponent);
        let (with, without): (Terms, Terms) = terms
            .into_iter()
            .partition(|(monomial, _)| monomial.exponent(symbol) > 0);
        let inner: Terms = with
            .into_iter()
            .filter_map(|(monomial, coefficient)| Some((monomial.div(&divisor)?, coefficient)))
            .collect();
        let before = stands_before(symbol, &inner, names);
        let taken = Math::name(names.name(symbol)).power(exponent);
        join(&mut parts, symbol, before, taken, nest(inner, names));
        terms = without;
    }
    parts.sort_by(|left, right| names.by_reading(left.symbol, right.symbol));
    let rest = math::polynomial(&Polynomial::from_terms(terms), names);
    let parts = parts.into_iter().map(Part::product).chain([rest]);
    Math::sum(parts.filter(|part| !is_zero(part)))
}

/// What was taken out, and what it leaves.
struct Part {
    symbol: Symbol,
    before: bool,
    taken: Vec<Math>,
    inner: Math,
}

impl Part {
    fn product(mut self) -> Math {
        let taken = if self.taken.len() > 1 {
            self.taken.reverse();
            Math::sum(self.taken)
        } else {
            Math::product(self.taken)
        };
        if self.before {
            Math::product([taken, self.inner])
        } else {
            Math::product([self.inner, taken])
        }
    }
}

/// Puts what was taken out beside the others that leave the same: `(R1 + R2)·(C1 + C2)`.
fn join(parts: &mut Vec<Part>, symbol: Symbol, before: bool, taken: Math, inner: Math) {
    match parts.iter_mut().find(|part| part.inner == inner) {
        Some(part) => part.taken.push(taken),
        None => parts.push(Part {
            symbol,
            before,
            taken: vec![taken],
            inner,
        }),
    }
}

/// Whether a symbol stands before all that is left, as an engineer writes.
fn stands_before(symbol: Symbol, inner: &Terms, names: &Names<'_>) -> bool {
    let mut symbols = inner.iter().flat_map(|(monomial, _)| monomial.factors());
    symbols.all(|(other, _)| names.by_reading(symbol, other).is_lt())
}

/// The symbol that stands in most terms, at least two, and its least exponent there; of several the
/// last in reading order, so that capacitors and inductors come out of sums of resistances.
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
            by_terms.then_with(|| names.by_reading(left.symbol, right.symbol))
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
