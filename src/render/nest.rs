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
    product(
        factors(math::ordered_terms(polynomial, names), names),
        names,
    )
}

/// A factor with its first symbol in reading order, by which factors are put in order.
type Factor = (Option<Symbol>, Math);

/// The factors of what these terms add up to.
fn factors(mut terms: Terms, names: &Names<'_>) -> Vec<Factor> {
    let first = first_symbol(&terms, names);
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
        let taken = Math::name(names.name(symbol)).power(exponent);
        join(&mut parts, symbol, taken, factors(inner, names), names);
        terms = without;
    }
    parts.sort_by(|left, right| names.by_reading(left.symbol, right.symbol));
    if let ([_], true) = (parts.as_slice(), terms.is_empty()) {
        return parts.remove(0).factors();
    }
    let rest = math::polynomial(&Polynomial::from_terms(terms), names);
    let products = parts.into_iter().map(|part| product(part.factors(), names));
    let sum = products.chain([rest]).filter(|part| !is_zero(part));
    vec![(first, Math::sum(sum).positive_first())]
}

fn product(mut factors: Vec<Factor>, names: &Names<'_>) -> Math {
    factors.sort_by(|(left, _), (right, _)| match (left, right) {
        (Some(left), Some(right)) => names.by_reading(*left, *right),
        _ => left.is_some().cmp(&right.is_some()),
    });
    Math::product(factors.into_iter().map(|(_, math)| math))
}

/// What was taken out, and the product it leaves.
struct Part {
    symbol: Symbol,
    taken: Vec<Math>,
    inner: Vec<Factor>,
    whole: Math,
}

impl Part {
    fn factors(mut self) -> Vec<Factor> {
        self.taken.reverse();
        let taken = Math::sum(self.taken).positive_first();
        self.inner.push((Some(self.symbol), taken));
        self.inner
    }
}

/// Puts what was taken out beside the others that leave the same, the sign aside:
/// `(R1 − R2)·(C1 + C2)`.
fn join(parts: &mut Vec<Part>, symbol: Symbol, taken: Math, inner: Vec<Factor>, names: &Names<'_>) {
    let (negative, whole) = product(inner.clone(), names).split_sign();
    let turned = taken.clone().signed(negative);
    match parts.iter_mut().find(|part| part.whole == whole) {
        Some(part) => part.taken.push(turned),
        None => parts.push(Part {
            symbol,
            taken: vec![turned],
            inner: without_sign(inner, negative),
            whole,
        }),
    }
}

/// The factors of minus the product, where that is asked for.
fn without_sign(mut factors: Vec<Factor>, negative: bool) -> Vec<Factor> {
    if negative {
        factors.push((None, Math::integer(&Integer::from(-1_i64))));
    }
    factors
}

fn first_symbol(terms: &Terms, names: &Names<'_>) -> Option<Symbol> {
    let symbols = terms.iter().flat_map(|(monomial, _)| monomial.factors());
    symbols
        .map(|(symbol, _)| symbol)
        .min_by(|left, right| names.by_reading(*left, *right))
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
