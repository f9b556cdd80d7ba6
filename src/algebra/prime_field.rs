//! Arithmetic modulo an odd prime below 2^63, on plain residues.

use crate::algebra::integer::Integer;
use crate::algebra::rational::Rational;

/// The integers modulo a prime; residues are `u64` below it.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct PrimeField {
    prime: u64,
}

/// 2^61 − 1
const MERSENNE: u64 = (1 << 61) - 1;

/// The largest primes below 2^62, descending; together with 2^61 − 1 enough for lifting.
const START: u64 = (1 << 62) - 1;

impl PrimeField {
    /// The field of a prime. The caller vouches for primality.
    ///
    /// # Panics
    /// When `prime` is even or not below 2^63.
    #[must_use]
    pub fn new(prime: u64) -> Self {
        assert!(prime % 2 == 1 && prime < 1 << 63, "an odd prime below 2^63");
        Self { prime }
    }

    /// The field of 2^61 − 1.
    #[must_use]
    pub fn default_prime() -> Self {
        Self { prime: MERSENNE }
    }

    /// Fields of different primes of 62 bits, for the Chinese remainder theorem.
    pub fn primes() -> impl Iterator<Item = Self> {
        (0_u64..)
            .map(|step| START - 2 * step)
            .filter(|&candidate| is_prime(candidate))
            .map(Self::new)
    }

    /// The prime.
    #[must_use]
    pub fn prime(&self) -> u64 {
        self.prime
    }

    /// a + b
    #[must_use]
    pub fn add(&self, a: u64, b: u64) -> u64 {
        let sum = a + b;
        if sum >= self.prime {
            sum - self.prime
        } else {
            sum
        }
    }

    /// a − b
    #[must_use]
    pub fn sub(&self, a: u64, b: u64) -> u64 {
        if a >= b { a - b } else { a + self.prime - b }
    }

    /// −a
    #[must_use]
    pub fn neg(&self, a: u64) -> u64 {
        if a == 0 { 0 } else { self.prime - a }
    }

    /// a · b
    #[must_use]
    pub fn mul(&self, a: u64, b: u64) -> u64 {
        let product = u128::from(a) * u128::from(b);
        if self.prime == MERSENNE {
            let folded = (product as u64 & MERSENNE) + (product >> 61) as u64;
            return if folded >= MERSENNE {
                folded - MERSENNE
            } else {
                folded
            };
        }
        (product % u128::from(self.prime)) as u64
    }

    /// a^exponent
    #[must_use]
    pub fn pow(&self, mut a: u64, mut exponent: u64) -> u64 {
        if exponent == 1 {
            return a;
        }
        let mut power = 1;
        while exponent > 0 {
            if exponent & 1 == 1 {
                power = self.mul(power, a);
            }
            a = self.mul(a, a);
            exponent >>= 1;
        }
        power
    }

    /// 1/a; `None` for zero.
    #[must_use]
    pub fn inv(&self, a: u64) -> Option<u64> {
        if a == 0 {
            return None;
        }
        let (mut old, mut new) = (i128::from(self.prime), i128::from(a));
        let (mut old_factor, mut factor) = (0_i128, 1_i128);
        while new != 0 {
            let quotient = old / new;
            (old, new) = (new, old - quotient * new);
            (old_factor, factor) = (factor, old_factor - quotient * factor);
        }
        u64::try_from(old_factor.rem_euclid(i128::from(self.prime))).ok()
    }

    /// 1/a for each, with one inversion (Montgomery's trick); `None` where one is zero.
    #[must_use]
    pub fn inverses(&self, list: &[u64]) -> Option<Vec<u64>> {
        let mut product = 1;
        let mut found: Vec<u64> = Vec::with_capacity(list.len());
        for &a in list {
            found.push(product);
            product = self.mul(product, a);
        }
        let mut inverse = self.inv(product)?;
        for (before, &a) in found.iter_mut().zip(list).rev() {
            *before = self.mul(*before, inverse);
            inverse = self.mul(inverse, a);
        }
        Some(found)
    }

    /// A square root of a residue, where there is one and the prime is 3 mod 4.
    #[must_use]
    pub fn square_root(&self, a: u64) -> Option<u64> {
        let root = self.pow(a, self.prime.div_ceil(4));
        (self.mul(root, root) == a).then_some(root)
    }

    /// Residue of an integer.
    #[must_use]
    pub fn from_integer(&self, value: &Integer) -> u64 {
        value.modulo(self.prime)
    }

    /// Residue of a machine word.
    #[must_use]
    pub fn from_i64(&self, value: i64) -> u64 {
        self.from_integer(&Integer::from(value))
    }

    /// Residue of a rational; `None` when the prime divides its denominator.
    #[must_use]
    pub fn from_rational(&self, value: &Rational) -> Option<u64> {
        let inverse = self.inv(self.from_integer(value.denominator()))?;
        Some(self.mul(self.from_integer(value.numerator()), inverse))
    }
}

/// Miller–Rabin with the bases that decide all 64-bit numbers (Jaeschke 1993; Sorenson & Webster 2017).
fn is_prime(candidate: u64) -> bool {
    if candidate.is_multiple_of(2) {
        return candidate == 2;
    }
    let field = PrimeField { prime: candidate };
    let odd = (candidate - 1) >> (candidate - 1).trailing_zeros();
    let twos = (candidate - 1).trailing_zeros();
    [2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37]
        .iter()
        .all(|&base| {
            if candidate.is_multiple_of(base) {
                return candidate == base;
            }
            let mut power = field.pow(base, odd);
            if power == 1 || power == candidate - 1 {
                return true;
            }
            (1..twos).any(|_| {
                power = field.mul(power, power);
                power == candidate - 1
            })
        })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn inverses_of_many_are_those_of_each() {
        let field = PrimeField::default_prime();
        let list = [3, 1, 77, field.prime() - 1];
        let each: Option<Vec<u64>> = list.iter().map(|&a| field.inv(a)).collect();
        assert_eq!(field.inverses(&list), each);
        assert_eq!(field.inverses(&[2, 0]), None);
        assert_eq!(field.inverses(&[]), Some(Vec::new()));
    }

    #[test]
    fn inverses_are_inverses() {
        for field in PrimeField::primes()
            .take(3)
            .chain([PrimeField::default_prime()])
        {
            for value in [1, 2, 3, 12_345, field.prime() - 1] {
                let inverse = field.inv(value).expect("not zero");
                assert_eq!(field.mul(value, inverse), 1);
            }
            assert_eq!(field.inv(0), None);
        }
    }

    #[test]
    fn square_roots_of_squares_are_found() {
        let field = PrimeField::default_prime();
        let square = field.mul(987_654_321, 987_654_321);
        let root = field.square_root(square).expect("a square");
        assert_eq!(field.mul(root, root), square);
    }
}
