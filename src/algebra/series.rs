//! Truncated Laurent series modulo a prime: the lowest terms of a polynomial in s, or in 1/s.
//!
//! A value knows up to which power it is known. A lowest term is therefore never taken for one that
//! has only been lost; what cancels beyond the known terms is not known, and says so.

use std::convert::Infallible;

use smallvec::SmallVec;

use crate::algebra::integer::Integer;
use crate::algebra::prime_field::PrimeField;
use crate::algebra::ring::Ring;
use crate::algebra::univariate::Univariate;

/// Σ c_k·t^(low + k), and unless it is exact an unknown rest from t^(low + length) on. The first
/// coefficient is not zero; exact zero has no coefficient.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Series {
    low: i64,
    coefficients: SmallVec<[u64; 4]>,
    exact: bool,
}

impl Series {
    /// The lowest power; `None` where it is not known or the value is zero.
    #[must_use]
    pub fn low(&self) -> Option<i64> {
        (!self.coefficients.is_empty()).then_some(self.low)
    }

    /// Whether the value is known to be zero.
    #[must_use]
    pub fn is_zero(&self) -> bool {
        self.exact && self.coefficients.is_empty()
    }

    /// From where on it is unknown.
    fn end(&self) -> i64 {
        if self.exact {
            i64::MAX
        } else {
            self.low + length(self.coefficients.len())
        }
    }
}

/// Series with at most so many terms.
#[derive(Clone, Copy, Debug)]
pub struct SeriesRing {
    /// The field of the coefficients.
    pub field: PrimeField,
    /// Terms that are kept.
    pub terms: usize,
    /// Whether t is 1/s; else t is s.
    pub inverse: bool,
}

fn length(count: usize) -> i64 {
    i64::try_from(count).unwrap_or(i64::MAX)
}

impl SeriesRing {
    /// A polynomial in s.
    #[must_use]
    pub fn polynomial(&self, polynomial: &Univariate) -> Series {
        let mut coefficients: SmallVec<[u64; 4]> = polynomial.coefficients().into();
        let low = if self.inverse {
            coefficients.reverse();
            1 - length(coefficients.len())
        } else {
            0
        };
        self.normal(low, coefficients, true)
    }

    /// Without zeros in front, at most as many terms as are kept.
    fn normal(&self, low: i64, mut coefficients: SmallVec<[u64; 4]>, mut exact: bool) -> Series {
        let zeros = coefficients.iter().take_while(|it| **it == 0).count();
        coefficients.drain(..zeros);
        if coefficients.len() > self.terms {
            exact &= coefficients[self.terms..].iter().all(|it| *it == 0);
            coefficients.truncate(self.terms);
        }
        Series {
            low: low + length(zeros),
            coefficients,
            exact,
        }
    }
}

impl Ring for SeriesRing {
    type Element = Series;
    type Error = Infallible;

    fn zero(&self) -> Series {
        Series {
            low: 0,
            coefficients: SmallVec::new(),
            exact: true,
        }
    }

    fn one(&self) -> Series {
        self.integer(&Integer::one())
    }

    fn integer(&self, value: &Integer) -> Series {
        let residue = self.field.from_integer(value);
        self.normal(0, SmallVec::from_slice(&[residue]), true)
    }

    fn add(&self, a: &Series, b: &Series) -> Result<Series, Infallible> {
        if a.is_zero() {
            return Ok(b.clone());
        }
        if b.is_zero() {
            return Ok(a.clone());
        }
        let low = a.low.min(b.low);
        let known = a.end().min(b.end());
        let last = |side: &Series| side.low + length(side.coefficients.len());
        let top = last(a)
            .max(last(b))
            .min(known)
            .min(low + length(self.terms));
        let exact = known == i64::MAX && top == last(a).max(last(b));
        let at = |side: &Series, power: i64| {
            let index = usize::try_from(power - side.low).ok();
            let found = index.and_then(|index| side.coefficients.get(index));
            found.copied().unwrap_or(0)
        };
        let sum = (low..top)
            .map(|power| self.field.add(at(a, power), at(b, power)))
            .collect();
        Ok(self.normal(low, sum, exact))
    }

    fn mul(&self, a: &Series, b: &Series) -> Result<Series, Infallible> {
        if a.is_zero() || b.is_zero() {
            return Ok(self.zero());
        }
        let (m, n) = (a.coefficients.len(), b.coefficients.len());
        let mut count = (m + n).saturating_sub(1);
        if !a.exact {
            count = count.min(m);
        }
        if !b.exact {
            count = count.min(n);
        }
        let mut exact = a.exact && b.exact;
        if count > self.terms {
            count = self.terms;
            exact = false;
        }
        let mut product: SmallVec<[u64; 4]> = SmallVec::from_elem(0, count);
        for (i, x) in a.coefficients.iter().enumerate().take(count) {
            for (entry, y) in product[i..].iter_mut().zip(&b.coefficients) {
                *entry = self.field.add(*entry, self.field.mul(*x, *y));
            }
        }
        Ok(self.normal(a.low + b.low, product, exact))
    }

    fn neg(&self, a: &Series) -> Series {
        let mut negative = a.clone();
        for coefficient in &mut negative.coefficients {
            *coefficient = self.field.neg(*coefficient);
        }
        negative
    }

    fn is_zero(&self, a: &Series) -> bool {
        a.is_zero()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn known_terms_are_those_of_the_polynomials() {
        let field = PrimeField::default_prime();
        let mut seed = 11_u64;
        let mut random = || {
            seed = seed.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(9);
            // Small values, so that sums cancel often.
            let word = (seed >> 40) % 3;
            if word == 2 { field.neg(1) } else { word }
        };
        let mut unknown = 0;
        for round in 0..2000 {
            let ring = SeriesRing {
                field,
                terms: 1 + round % 4,
                inverse: round % 2 == 0,
            };
            let mut draw = || Univariate::new((0..4).map(|_| random()).collect());
            let (a, b, c) = (draw(), draw(), draw());
            let exact = a.mul(&b, &field).add(&c.mul(&a, &field), &field);
            let [x, y, z] = [&a, &b, &c].map(|it| ring.polynomial(it));
            let (Ok(left), Ok(right)) = (ring.mul(&x, &y), ring.mul(&z, &x));
            let Ok(found) = ring.add(&left, &right);
            let low = if ring.inverse {
                exact.degree().map(|degree| -length(degree))
            } else {
                exact.valuation().map(length)
            };
            match found.low() {
                Some(known) => assert_eq!(Some(known), low, "{a:?} {b:?} {c:?}"),
                None if found.is_zero() => assert_eq!(low, None),
                None => unknown += 1,
            }
        }
        assert!(unknown < 1000, "{unknown}");
    }
}
