//! Products of powers of symbols.

use std::cmp::Ordering;

use smallvec::SmallVec;

use crate::algebra::symbol::Symbol;

/// A product of powers, factors sorted by symbol, exponents ≥ 1.
///
/// Order: lexicographic, the symbol with the lowest index (`s`) first; admissible.
#[derive(Clone, Debug, Default, PartialEq, Eq, Hash)]
pub struct Monomial(SmallVec<[(Symbol, u32); 12]>);

impl Monomial {
    /// 1
    #[must_use]
    pub fn one() -> Self {
        Self::default()
    }

    /// symbol
    #[must_use]
    pub fn symbol(symbol: Symbol) -> Self {
        Self::power(symbol, 1)
    }

    /// symbol^exponent
    #[must_use]
    pub fn power(symbol: Symbol, exponent: u32) -> Self {
        let mut factors = SmallVec::new();
        if exponent > 0 {
            factors.push((symbol, exponent));
        }
        Self(factors)
    }

    /// From factors sorted by symbol; zeroth powers are left out.
    pub(super) fn from_sorted(factors: impl Iterator<Item = (Symbol, u32)>) -> Self {
        Self(factors.filter(|&(_, exponent)| exponent > 0).collect())
    }

    /// = 1
    #[must_use]
    pub fn is_one(&self) -> bool {
        self.0.is_empty()
    }

    /// The factors, sorted by symbol.
    pub fn factors(&self) -> impl Iterator<Item = (Symbol, u32)> + '_ {
        self.0.iter().copied()
    }

    /// Exponent of a symbol.
    #[must_use]
    pub fn exponent(&self, symbol: Symbol) -> u32 {
        self.0
            .iter()
            .find(|(found, _)| *found == symbol)
            .map_or(0, |(_, exponent)| *exponent)
    }

    /// Sum of the exponents.
    #[must_use]
    pub fn total_degree(&self) -> u32 {
        self.0
            .iter()
            .fold(0, |sum: u32, (_, exponent)| sum.saturating_add(*exponent))
    }

    /// self · other
    #[must_use]
    pub fn mul(&self, other: &Self) -> Self {
        let mut product = SmallVec::with_capacity(self.0.len() + other.0.len());
        let (mut left, mut right) = (self.0.iter().peekable(), other.0.iter().peekable());
        while let (Some(&&a), Some(&&b)) = (left.peek(), right.peek()) {
            match a.0.cmp(&b.0) {
                Ordering::Less => {
                    product.push(a);
                    left.next();
                }
                Ordering::Greater => {
                    product.push(b);
                    right.next();
                }
                Ordering::Equal => {
                    product.push((a.0, a.1.saturating_add(b.1)));
                    left.next();
                    right.next();
                }
            }
        }
        product.extend(left.copied());
        product.extend(right.copied());
        Self(product)
    }

    /// self / other when other divides self.
    #[must_use]
    pub fn div(&self, other: &Self) -> Option<Self> {
        let mut quotient = SmallVec::with_capacity(self.0.len());
        let mut right = other.0.iter().peekable();
        for &(symbol, exponent) in &self.0 {
            match right.peek() {
                Some(&&(taken, by)) if taken == symbol => {
                    if by > exponent {
                        return None;
                    }
                    if by < exponent {
                        quotient.push((symbol, exponent - by));
                    }
                    right.next();
                }
                Some(&&(taken, _)) if taken < symbol => return None,
                _ => quotient.push((symbol, exponent)),
            }
        }
        right.peek().is_none().then_some(Self(quotient))
    }

    /// Greatest common divisor.
    #[must_use]
    pub fn gcd(&self, other: &Self) -> Self {
        Self(
            self.0
                .iter()
                .filter_map(|&(symbol, exponent)| {
                    let shared = exponent.min(other.exponent(symbol));
                    (shared > 0).then_some((symbol, shared))
                })
                .collect(),
        )
    }

    /// The monomial without a symbol, and the exponent it had.
    #[must_use]
    pub fn without(&self, symbol: Symbol) -> (Self, u32) {
        let exponent = self.exponent(symbol);
        let rest = self
            .0
            .iter()
            .copied()
            .filter(|(found, _)| *found != symbol)
            .collect();
        (Self(rest), exponent)
    }
}

impl PartialOrd for Monomial {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Monomial {
    fn cmp(&self, other: &Self) -> Ordering {
        for (a, b) in self.0.iter().zip(&other.0) {
            let order = b.0.cmp(&a.0).then(a.1.cmp(&b.1));
            if order != Ordering::Equal {
                return order;
            }
        }
        self.0.len().cmp(&other.0.len())
    }
}
