//! Exponents of several symbols in one machine word, so that monomials multiply by one addition.
//!
//! Every symbol has a field wide enough for the exponents that can occur and one guard bit above them;
//! fields stand in the order of [`Monomial`], so that words compare as monomials do (Monagan & Pearce 2009).

use std::cmp::Reverse;
use std::collections::BinaryHeap;

use rustc_hash::FxHashMap;

use crate::algebra::integer::Integer;
use crate::algebra::monomial::Monomial;
use crate::algebra::symbol::Symbol;
use crate::budget::{Budget, Exceeded};

type Term = (Monomial, Integer);

/// Where the exponent of each symbol stands.
struct Packing {
    /// Symbol, position and width without the guard bit; descending positions.
    fields: Vec<(Symbol, u32, u32)>,
    guards: u128,
}

impl Packing {
    /// A packing for exponents up to the bounds given, if it fits in a word of 128 bits.
    fn new(bounds: &[(Symbol, u32)]) -> Option<Self> {
        let width = |bound: u32| 32 - bound.leading_zeros();
        let total: u32 = bounds.iter().map(|&(_, bound)| width(bound) + 1).sum();
        if total > 128 {
            return None;
        }
        let mut position = total;
        let mut guards = 0;
        let fields = bounds
            .iter()
            .map(|&(symbol, bound)| {
                position -= width(bound) + 1;
                guards |= 1 << (position + width(bound));
                (symbol, position, width(bound))
            })
            .collect();
        Some(Self { fields, guards })
    }

    fn pack(&self, monomial: &Monomial) -> u128 {
        let mut fields = self.fields.iter();
        let mut word = 0;
        for (symbol, exponent) in monomial.factors() {
            if let Some((_, position, _)) = fields.find(|(found, _, _)| *found == symbol) {
                word |= u128::from(exponent) << position;
            }
        }
        word
    }

    fn unpack(&self, word: u128) -> Monomial {
        Monomial::from_sorted(self.fields.iter().map(|&(symbol, position, width)| {
            let exponent = (word >> position) & ((1 << width) - 1);
            (symbol, u32::try_from(exponent).unwrap_or(u32::MAX))
        }))
    }

    /// a / b, if b divides a.
    fn quotient(&self, a: u128, b: u128) -> Option<u128> {
        let difference = (a | self.guards) - b;
        (difference & self.guards == self.guards).then_some(difference ^ self.guards)
    }

    fn pack_all(&self, terms: &[Term]) -> Vec<u128> {
        terms
            .iter()
            .map(|(monomial, _)| self.pack(monomial))
            .collect()
    }
}

/// Highest exponents, by symbol.
fn degrees(terms: &[Term]) -> Vec<(Symbol, u32)> {
    let mut degrees: Vec<(Symbol, u32)> = Vec::new();
    for (monomial, _) in terms {
        let mut at = 0;
        for (symbol, exponent) in monomial.factors() {
            while degrees.get(at).is_some_and(|&(known, _)| known < symbol) {
                at += 1;
            }
            match degrees.get_mut(at) {
                Some((known, highest)) if *known == symbol => *highest = exponent.max(*highest),
                _ => degrees.insert(at, (symbol, exponent)),
            }
        }
    }
    degrees
}

/// Sum of two lists of exponents; nothing where one overflows.
fn sum(a: &[(Symbol, u32)], b: &[(Symbol, u32)]) -> Option<Vec<(Symbol, u32)>> {
    let mut sum = a.to_vec();
    for &(symbol, exponent) in b {
        match sum.binary_search_by_key(&symbol, |&(known, _)| known) {
            Ok(at) => sum[at].1 = sum[at].1.checked_add(exponent)?,
            Err(at) => sum.insert(at, (symbol, exponent)),
        }
    }
    Some(sum)
}

/// Coefficients as machine words, if they are.
fn words(terms: &[Term]) -> Option<Vec<i64>> {
    terms
        .iter()
        .map(|(_, coefficient)| coefficient.to_i64())
        .collect()
}

/// Sum of the absolute values.
fn norm(words: &[i64]) -> u128 {
    words
        .iter()
        .map(|word| u128::from(word.unsigned_abs()))
        .sum()
}

/// The terms of a product, descending; nothing where exponents do not fit.
///
/// # Errors
/// When more terms arise than the budget allows.
///
/// Cost: `a.len()`·`b.len()` additions of words and as many look-ups.
pub(super) fn product(
    a: &[Term],
    b: &[Term],
    budget: &Budget,
) -> Result<Option<Vec<Term>>, Exceeded> {
    let Some(packing) = sum(&degrees(a), &degrees(b)).and_then(|bounds| Packing::new(&bounds))
    else {
        return Ok(None);
    };
    let (left, right) = (packing.pack_all(a), packing.pack_all(b));
    let small = words(a).zip(words(b)).filter(|(x, y)| {
        // No sum of products exceeds the product of the larger coefficient sums.
        norm(x)
            .checked_mul(norm(y))
            .is_some_and(|bound| bound <= i128::MAX as u128)
    });
    let terms = match small {
        Some((x, y)) => collect(&left, &right, budget, |i, j, sum: &mut i128| {
            *sum += i128::from(x[i]) * i128::from(y[j]);
        })?
        .into_iter()
        .filter(|(_, sum)| *sum != 0)
        .map(|(word, sum)| (packing.unpack(word), Integer::from(sum)))
        .collect(),
        None => collect(&left, &right, budget, |i, j, sum: &mut Integer| {
            *sum += &a[i].1 * &b[j].1;
        })?
        .into_iter()
        .filter(|(_, sum)| !sum.is_zero())
        .map(|(word, sum)| (packing.unpack(word), sum))
        .collect(),
    };
    Ok(Some(terms))
}

/// Sums of products by monomial, descending.
fn collect<C: Default>(
    left: &[u128],
    right: &[u128],
    budget: &Budget,
    mut add: impl FnMut(usize, usize, &mut C),
) -> Result<Vec<(u128, C)>, Exceeded> {
    let mut places: FxHashMap<u128, u32> = FxHashMap::default();
    let mut sums: Vec<(u128, C)> = Vec::new();
    for (i, a) in left.iter().enumerate() {
        for (j, b) in right.iter().enumerate() {
            let next = u32::try_from(sums.len()).unwrap_or(u32::MAX);
            let place = *places.entry(a + b).or_insert(next);
            if place == next {
                sums.push((a + b, C::default()));
            }
            add(i, j, &mut sums[place as usize].1);
        }
        budget.terms(sums.len())?;
        if i % 256 == 255 {
            budget.time()?;
        }
    }
    sums.sort_unstable_by_key(|&(word, _)| Reverse(word));
    Ok(sums)
}

/// What a division found.
pub(super) enum Division {
    /// The quotient.
    Exact(Vec<Term>),
    /// The division leaves something.
    Inexact,
    /// Exponents do not fit; nothing is known.
    TooWide,
}

/// Divides by a polynomial of at least two terms, with a heap of the products still to be subtracted
/// (Johnson 1974; Monagan & Pearce 2011).
///
/// Cost: quotient·divisor products, each with the logarithm of the divisor's length.
pub(super) fn divide(dividend: &[Term], divisor: &[Term]) -> Division {
    let bounds = degrees(dividend);
    let mut room = bounds.clone();
    for &(symbol, exponent) in &degrees(divisor) {
        match room.binary_search_by_key(&symbol, |&(known, _)| known) {
            Ok(at) if room[at].1 >= exponent => room[at].1 -= exponent,
            _ => return Division::Inexact,
        }
    }
    let Some(packing) = Packing::new(&bounds) else {
        return Division::TooWide;
    };
    let room = packing.pack(&Monomial::from_sorted(room.into_iter()));
    let found = match words(dividend).zip(words(divisor)) {
        Some((x, y)) => match quotient_of_words(&packing, room, (dividend, &x), (divisor, &y)) {
            Some(found) => found,
            None => quotient_of_integers(&packing, room, dividend, divisor),
        },
        None => quotient_of_integers(&packing, room, dividend, divisor),
    };
    match found {
        Some(terms) => Division::Exact(terms),
        None => Division::Inexact,
    }
}

/// With machine words; the outer `None` where they overflow.
fn quotient_of_words(
    packing: &Packing,
    room: u128,
    (dividend, x): (&[Term], &[i64]),
    (divisor, y): (&[Term], &[i64]),
) -> Option<Option<Vec<Term>>> {
    let mut overflow = false;
    let mut quotient: Vec<i64> = Vec::new();
    let words = long_division(
        packing,
        room,
        &packing.pack_all(dividend),
        &packing.pack_all(divisor),
        |minuend, products, quotient: &mut Vec<i64>| {
            let mut rest = minuend.map_or(0, |at| i128::from(x[at]));
            for &(i, j) in products {
                let product = i128::from(quotient[i]) * i128::from(y[j]);
                match rest.checked_sub(product) {
                    Some(less) => rest = less,
                    None => overflow = true,
                }
            }
            if overflow {
                return Step::Stop;
            }
            if rest == 0 {
                return Step::Vanishes;
            }
            let lead = i128::from(y[0]);
            if rest.wrapping_rem(lead) != 0 {
                return Step::Stop;
            }
            match i64::try_from(rest.wrapping_div(lead)) {
                Ok(weight) => {
                    quotient.push(weight);
                    Step::Term
                }
                Err(_) => {
                    overflow = true;
                    Step::Stop
                }
            }
        },
        &mut quotient,
    );
    if overflow {
        return None;
    }
    Some(words.map(|words| {
        words
            .into_iter()
            .zip(quotient)
            .map(|(word, weight)| (packing.unpack(word), Integer::from(weight)))
            .collect()
    }))
}

fn quotient_of_integers(
    packing: &Packing,
    room: u128,
    dividend: &[Term],
    divisor: &[Term],
) -> Option<Vec<Term>> {
    let mut quotient: Vec<Integer> = Vec::new();
    let words = long_division(
        packing,
        room,
        &packing.pack_all(dividend),
        &packing.pack_all(divisor),
        |minuend, products, quotient: &mut Vec<Integer>| {
            let mut rest = minuend.map_or_else(Integer::zero, |at| dividend[at].1.clone());
            for &(i, j) in products {
                rest -= &quotient[i] * &divisor[j].1;
            }
            if rest.is_zero() {
                return Step::Vanishes;
            }
            match rest.div_exact(&divisor[0].1) {
                Some(weight) => {
                    quotient.push(weight);
                    Step::Term
                }
                None => Step::Stop,
            }
        },
        &mut quotient,
    )?;
    Some(
        words
            .into_iter()
            .zip(quotient)
            .map(|(word, weight)| (packing.unpack(word), weight))
            .collect(),
    )
}

/// What became of one monomial of the dividend.
enum Step {
    /// Its coefficient is zero.
    Vanishes,
    /// A term of the quotient was found.
    Term,
    /// The coefficient does not divide.
    Stop,
}

/// The monomials of the quotient. `weigh` gets the place of the dividend's term, the products (quotient,
/// divisor) to be subtracted from it, and the quotient's coefficients, to which it adds.
fn long_division<Q>(
    packing: &Packing,
    room: u128,
    dividend: &[u128],
    divisor: &[u128],
    mut weigh: impl FnMut(Option<usize>, &[(usize, usize)], &mut Q) -> Step,
    weights: &mut Q,
) -> Option<Vec<u128>> {
    let lead = *divisor.first()?;
    let mut quotient: Vec<u128> = Vec::new();
    let mut at = 0;
    // One product for each term of the divisor: its next unused term of the quotient.
    let mut heap: BinaryHeap<(u128, Reverse<usize>, usize)> = BinaryHeap::new();
    let mut next = vec![0; divisor.len()];
    let mut queued = vec![false; divisor.len()];
    let mut products: Vec<(usize, usize)> = Vec::new();
    loop {
        let word = match (dividend.get(at), heap.peek()) {
            (Some(&own), Some(&(top, _, _))) => own.max(top),
            (Some(&own), None) => own,
            (None, Some(&(top, _, _))) => top,
            (None, None) => return Some(quotient),
        };
        let minuend = (dividend.get(at) == Some(&word)).then_some(at);
        at += usize::from(minuend.is_some());
        products.clear();
        while heap.peek().is_some_and(|&(top, _, _)| top == word) {
            if let Some((_, Reverse(j), i)) = heap.pop() {
                products.push((i, j));
                next[j] += 1;
                queued[j] = false;
            }
        }
        let mut queue = |j: usize, quotient: &[u128]| {
            if let (false, Some(term)) = (queued[j], quotient.get(next[j])) {
                heap.push((term + divisor[j], Reverse(j), next[j]));
                queued[j] = true;
            }
        };
        match weigh(minuend, &products, weights) {
            Step::Stop => return None,
            Step::Vanishes => products.iter().for_each(|&(_, j)| queue(j, &quotient)),
            Step::Term => {
                let term = packing.quotient(word, lead)?;
                packing.quotient(room, term)?;
                quotient.push(term);
                (1..divisor.len()).for_each(|j| queue(j, &quotient));
            }
        }
    }
}
