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
        let sum = self.0 + other.0;
        Self(if sum >= PRIME { sum - PRIME } else { sum })
    }

    /// −self
    pub(crate) fn neg(self) -> Self {
        Self(if self.0 == 0 { 0 } else { PRIME - self.0 })
    }

    /// self − other
    pub(crate) fn sub(self, other: Self) -> Self {
        self.add(other.neg())
    }

    /// self · other
    pub(crate) fn mul(self, other: Self) -> Self {
        // 2^61 = 1: the high part is added to the low part.
        let product = u128::from(self.0) * u128::from(other.0);
        let low = u64::try_from(product & u128::from(PRIME)).unwrap_or(0);
        let high = u64::try_from(product >> 61).unwrap_or(0);
        let folded = low + high;
        Self(if folded >= PRIME {
            folded - PRIME
        } else {
            folded
        })
    }

    /// self^exponent
    pub(crate) fn power(self, mut exponent: u64) -> Self {
        if exponent == 1 {
            return self;
        }
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
        if self == Self::ONE {
            return Some(self);
        }
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
