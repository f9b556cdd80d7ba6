//! Integers modulo 2^61 − 1.

use crate::algebra::{Integer, Rational};

const PRIME: u64 = (1 << 61) - 1;

/// A residue.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Residue(u64);

impl Residue {
    /// 0
    pub(crate) const ZERO: Self = Self(0);
    /// 1
    pub(crate) const ONE: Self = Self(1);

    /// The residue of a word.
    pub(crate) fn new(value: u64) -> Self {
        Self(value % PRIME)
    }

    /// The least non-negative representative.
    pub(crate) fn get(self) -> u64 {
        self.0
    }

    /// = 0
    pub(crate) fn is_zero(self) -> bool {
        self.0 == 0
    }

    /// self + other
    pub(crate) fn add(self, other: Self) -> Self {
        Self((self.0 + other.0) % PRIME)
    }

    /// −self
    pub(crate) fn neg(self) -> Self {
        Self((PRIME - self.0) % PRIME)
    }

    /// self − other
    pub(crate) fn sub(self, other: Self) -> Self {
        self.add(other.neg())
    }

    /// self · other
    pub(crate) fn mul(self, other: Self) -> Self {
        let product = u128::from(self.0) * u128::from(other.0) % u128::from(PRIME);
        Self(u64::try_from(product).unwrap_or(0))
    }

    /// self^exponent
    pub(crate) fn power(self, mut exponent: u64) -> Self {
        let (mut base, mut power) = (self, Self::ONE);
        while exponent > 0 {
            if exponent & 1 == 1 {
                power = power.mul(base);
            }
            base = base.mul(base);
            exponent >>= 1;
        }
        power
    }

    /// 1/self (Fermat); `None` for zero.
    pub(crate) fn inverse(self) -> Option<Self> {
        (!self.is_zero()).then(|| self.power(PRIME - 2))
    }

    /// The residue of an integer.
    pub(crate) fn integer(value: &Integer) -> Self {
        Self(value.modulo(PRIME))
    }

    /// The residue of a rational; 0 where the prime divides the denominator.
    pub(crate) fn rational(value: &Rational) -> Self {
        let below = Self::integer(value.denominator()).inverse();
        Self::integer(value.numerator()).mul(below.unwrap_or(Self::ZERO))
    }
}
