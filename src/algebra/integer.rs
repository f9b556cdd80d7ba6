//! Integers: a machine word while it fits, big beyond.
//!
//! Canonical form: small exactly when the value fits in an `i64`.

use std::cmp::Ordering;
use std::fmt;
use std::ops::{Add, AddAssign, Mul, MulAssign, Neg, Sub, SubAssign};
use std::str::FromStr;

use num_bigint::{BigInt, Sign};
use num_integer::Integer as _;
use num_traits::{Signed, ToPrimitive};

/// An integer of any size.
#[derive(Clone, PartialEq, Eq, Hash)]
pub struct Integer(Repr);

#[derive(Clone, PartialEq, Eq, Hash)]
enum Repr {
    Small(i64),
    Big(Box<BigInt>),
}

use Repr::{Big, Small};

impl Integer {
    /// 0
    #[must_use]
    pub const fn zero() -> Self {
        Self(Small(0))
    }

    /// 1
    #[must_use]
    pub const fn one() -> Self {
        Self(Small(1))
    }

    fn from_big(value: BigInt) -> Self {
        match value.to_i64() {
            Some(small) => Self(Small(small)),
            None => Self(Big(Box::new(value))),
        }
    }

    fn from_wide(value: i128) -> Self {
        match i64::try_from(value) {
            Ok(small) => Self(Small(small)),
            Err(_) => Self(Big(Box::new(BigInt::from(value)))),
        }
    }

    /// Whether the value is stored as documented.
    #[must_use]
    pub fn is_canonical(&self) -> bool {
        match &self.0 {
            Small(_) => true,
            Big(value) => value.to_i64().is_none(),
        }
    }

    /// = 0
    #[must_use]
    pub fn is_zero(&self) -> bool {
        matches!(self.0, Small(0))
    }

    /// = 1
    #[must_use]
    pub fn is_one(&self) -> bool {
        matches!(self.0, Small(1))
    }

    /// −1, 0 or 1.
    #[must_use]
    pub fn signum(&self) -> i32 {
        match &self.0 {
            Small(value) => value.signum() as i32,
            Big(value) => {
                if value.is_negative() {
                    -1
                } else {
                    1
                }
            }
        }
    }

    /// |self|
    #[must_use]
    pub fn abs(&self) -> Self {
        if self.signum() < 0 {
            -self
        } else {
            self.clone()
        }
    }

    /// The value as a machine word, when it fits.
    #[must_use]
    pub fn to_i64(&self) -> Option<i64> {
        match &self.0 {
            Small(value) => Some(*value),
            Big(_) => None,
        }
    }

    /// The value in the library's type.
    #[must_use]
    pub fn to_bigint(&self) -> BigInt {
        match &self.0 {
            Small(value) => BigInt::from(*value),
            Big(value) => (**value).clone(),
        }
    }

    /// Bits of the absolute value.
    #[must_use]
    pub fn bits(&self) -> u64 {
        match &self.0 {
            Small(value) => u64::from(64 - value.unsigned_abs().leading_zeros()),
            Big(value) => value.bits(),
        }
    }

    /// Greatest common divisor, ≥ 0.
    #[must_use]
    pub fn gcd(&self, other: &Self) -> Self {
        match (&self.0, &other.0) {
            (Small(a), Small(b)) => Self::from(binary_gcd(a.unsigned_abs(), b.unsigned_abs())),
            (Small(0), Big(_)) => other.abs(),
            (Big(_), Small(0)) => self.abs(),
            (Small(a), Big(b)) | (Big(b), Small(a)) => {
                let small = a.unsigned_abs();
                let rest = (&**b % small).abs().to_u64().unwrap_or(0);
                Self::from(binary_gcd(small, rest))
            }
            (Big(a), Big(b)) => Self::from_big(a.gcd(b)),
        }
    }

    /// Least common multiple, ≥ 0.
    #[must_use]
    pub fn lcm(&self, other: &Self) -> Self {
        let common = self.gcd(other);
        if common.is_zero() {
            return Self::zero();
        }
        let (part, _) = self.div_rem(&common);
        (&part * other).abs()
    }

    /// self / other when the division leaves nothing.
    #[must_use]
    pub fn div_exact(&self, other: &Self) -> Option<Self> {
        if other.is_zero() {
            return None;
        }
        let (quotient, rest) = self.div_rem(other);
        rest.is_zero().then_some(quotient)
    }

    /// Quotient towards zero and remainder.
    ///
    /// # Panics
    /// When `other` is zero.
    #[must_use]
    pub fn div_rem(&self, other: &Self) -> (Self, Self) {
        if let (Small(a), Small(b)) = (&self.0, &other.0)
            && let (Some(quotient), Some(rest)) = (a.checked_div(*b), a.checked_rem(*b))
        {
            return (Self(Small(quotient)), Self(Small(rest)));
        }
        let (quotient, rest) = match (&self.0, &other.0) {
            (Big(a), Big(b)) => a.div_rem(b),
            (Big(a), Small(b)) => (&**a / *b, &**a % *b),
            (Small(_), _) => self.to_bigint().div_rem(&other.to_bigint()),
        };
        (Self::from_big(quotient), Self::from_big(rest))
    }

    /// Quotient rounded down.
    ///
    /// # Panics
    /// When `other` is zero.
    #[must_use]
    pub fn div_floor(&self, other: &Self) -> Self {
        Self::from_big(self.to_bigint().div_floor(&other.to_bigint()))
    }

    /// self^exponent
    #[must_use]
    pub fn pow(&self, exponent: u32) -> Self {
        if let Small(value) = &self.0
            && let Some(power) = value.checked_pow(exponent)
        {
            return Self(Small(power));
        }
        Self::from_big(num_traits::pow(self.to_bigint(), exponent as usize))
    }

    /// The integer square root when self is a square.
    #[must_use]
    pub fn square_root(&self) -> Option<Self> {
        if self.signum() < 0 {
            return None;
        }
        let root = Self::from_big(self.to_bigint().sqrt());
        (&root * &root == *self).then_some(root)
    }

    /// Least non-negative residue.
    ///
    /// # Panics
    /// When `modulus` is zero.
    #[must_use]
    pub fn modulo(&self, modulus: u64) -> u64 {
        match &self.0 {
            Small(value) => {
                let rest = value.unsigned_abs() % modulus;
                if *value < 0 && rest != 0 {
                    modulus - rest
                } else {
                    rest
                }
            }
            Big(value) => {
                let rest = (value.magnitude() % modulus).to_u64().unwrap_or(0);
                if value.sign() == Sign::Minus && rest != 0 {
                    modulus - rest
                } else {
                    rest
                }
            }
        }
    }
}

/// Stein's algorithm.
fn binary_gcd(mut a: u64, mut b: u64) -> u64 {
    if a == 0 || b == 0 {
        return a | b;
    }
    let shift = (a | b).trailing_zeros();
    a >>= a.trailing_zeros();
    while b != 0 {
        b >>= b.trailing_zeros();
        if a > b {
            std::mem::swap(&mut a, &mut b);
        }
        b -= a;
    }
    a << shift
}

impl Default for Integer {
    fn default() -> Self {
        Self::zero()
    }
}

macro_rules! from_small {
    ($($kind:ty),*) => {$(
        impl From<$kind> for Integer {
            fn from(value: $kind) -> Self {
                Self(Small(i64::from(value)))
            }
        }
    )*};
}
from_small!(i32, u32, i64);

impl From<u64> for Integer {
    fn from(value: u64) -> Self {
        Self::from_wide(i128::from(value))
    }
}

impl From<i128> for Integer {
    fn from(value: i128) -> Self {
        Self::from_wide(value)
    }
}

impl From<usize> for Integer {
    fn from(value: usize) -> Self {
        Self::from(value as u64)
    }
}

impl From<BigInt> for Integer {
    fn from(value: BigInt) -> Self {
        Self::from_big(value)
    }
}

impl FromStr for Integer {
    type Err = num_bigint::ParseBigIntError;

    fn from_str(text: &str) -> Result<Self, Self::Err> {
        BigInt::from_str(text).map(Self::from_big)
    }
}

impl fmt::Display for Integer {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        match &self.0 {
            Small(value) => fmt::Display::fmt(value, formatter),
            Big(value) => fmt::Display::fmt(value, formatter),
        }
    }
}

impl fmt::Debug for Integer {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        fmt::Display::fmt(self, formatter)
    }
}

impl PartialOrd for Integer {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Integer {
    fn cmp(&self, other: &Self) -> Ordering {
        match (&self.0, &other.0) {
            (Small(a), Small(b)) => a.cmp(b),
            (Big(a), Big(b)) => a.cmp(b),
            (Small(_), Big(b)) => {
                if b.is_negative() {
                    Ordering::Greater
                } else {
                    Ordering::Less
                }
            }
            (Big(a), Small(_)) => {
                if a.is_negative() {
                    Ordering::Less
                } else {
                    Ordering::Greater
                }
            }
        }
    }
}

impl Neg for &Integer {
    type Output = Integer;

    fn neg(self) -> Integer {
        match &self.0 {
            Small(value) => Integer::from_wide(-i128::from(*value)),
            Big(value) => Integer::from_big(-(**value).clone()),
        }
    }
}

impl Neg for Integer {
    type Output = Self;

    fn neg(self) -> Self {
        -&self
    }
}

macro_rules! operator {
    ($trait:ident, $method:ident, $wide:expr, $assign:ident, $assign_method:ident) => {
        impl $trait<&Integer> for &Integer {
            type Output = Integer;

            fn $method(self, other: &Integer) -> Integer {
                if let (Small(a), Small(b)) = (&self.0, &other.0) {
                    let wide: fn(i128, i128) -> i128 = $wide;
                    return Integer::from_wide(wide(i128::from(*a), i128::from(*b)));
                }
                Integer::from_big(match (&self.0, &other.0) {
                    (Big(a), Big(b)) => $trait::$method(&**a, &**b),
                    (Big(a), Small(b)) => $trait::$method(&**a, *b),
                    (Small(a), Big(b)) => $trait::$method(*a, &**b),
                    (Small(a), Small(b)) => $trait::$method(BigInt::from(*a), *b),
                })
            }
        }

        impl $trait for Integer {
            type Output = Self;

            fn $method(self, other: Self) -> Self {
                $trait::$method(&self, &other)
            }
        }

        impl $trait<&Integer> for Integer {
            type Output = Self;

            fn $method(self, other: &Self) -> Self {
                $trait::$method(&self, other)
            }
        }

        impl $assign<&Integer> for Integer {
            fn $assign_method(&mut self, other: &Self) {
                *self = $trait::$method(&*self, other);
            }
        }

        impl $assign for Integer {
            fn $assign_method(&mut self, other: Self) {
                *self = $trait::$method(&*self, &other);
            }
        }
    };
}

operator!(Add, add, |a, b| a + b, AddAssign, add_assign);
operator!(Sub, sub, |a, b| a - b, SubAssign, sub_assign);
operator!(Mul, mul, |a, b| a * b, MulAssign, mul_assign);
