//! Rational numbers, always reduced, denominator positive.

use std::cmp::Ordering;
use std::fmt;
use std::ops::{Add, Mul, Neg, Sub};

use crate::algebra::integer::Integer;

/// A rational number.
#[derive(Clone, PartialEq, Eq, Hash)]
pub struct Rational {
    numerator: Integer,
    denominator: Integer,
}

impl Rational {
    /// numerator/denominator; `None` when the denominator is zero.
    #[must_use]
    pub fn new(numerator: Integer, denominator: Integer) -> Option<Self> {
        if denominator.is_zero() {
            return None;
        }
        Some(Self::reduced(numerator, denominator))
    }

    fn reduced(numerator: Integer, denominator: Integer) -> Self {
        let common = numerator.gcd(&denominator);
        let (mut numerator, mut denominator) = if common.is_one() {
            (numerator, denominator)
        } else {
            (numerator.div_rem(&common).0, denominator.div_rem(&common).0)
        };
        if denominator.signum() < 0 {
            numerator = -numerator;
            denominator = -denominator;
        }
        Self {
            numerator,
            denominator,
        }
    }

    /// 0
    #[must_use]
    pub fn zero() -> Self {
        Self::from(0_i64)
    }

    /// 1
    #[must_use]
    pub fn one() -> Self {
        Self::from(1_i64)
    }

    /// Numerator, with the sign.
    #[must_use]
    pub fn numerator(&self) -> &Integer {
        &self.numerator
    }

    /// Denominator, > 0.
    #[must_use]
    pub fn denominator(&self) -> &Integer {
        &self.denominator
    }

    /// Whether it is stored as documented.
    #[must_use]
    pub fn is_canonical(&self) -> bool {
        self.denominator.signum() > 0 && self.numerator.gcd(&self.denominator).is_one()
    }

    /// = 0
    #[must_use]
    pub fn is_zero(&self) -> bool {
        self.numerator.is_zero()
    }

    /// Whether it is whole.
    #[must_use]
    pub fn is_integer(&self) -> bool {
        self.denominator.is_one()
    }

    /// −1, 0 or 1.
    #[must_use]
    pub fn signum(&self) -> i32 {
        self.numerator.signum()
    }

    /// |self|
    #[must_use]
    pub fn abs(&self) -> Self {
        Self {
            numerator: self.numerator.abs(),
            denominator: self.denominator.clone(),
        }
    }

    /// 1/self; `None` for zero.
    #[must_use]
    pub fn recip(&self) -> Option<Self> {
        Self::new(self.denominator.clone(), self.numerator.clone())
    }

    /// self^exponent; `None` for a negative power of zero.
    #[must_use]
    pub fn pow(&self, exponent: i32) -> Option<Self> {
        let power = Self {
            numerator: self.numerator.pow(exponent.unsigned_abs()),
            denominator: self.denominator.pow(exponent.unsigned_abs()),
        };
        if exponent < 0 {
            power.recip()
        } else {
            Some(power)
        }
    }
}

impl From<Integer> for Rational {
    fn from(value: Integer) -> Self {
        Self {
            numerator: value,
            denominator: Integer::one(),
        }
    }
}

impl From<i64> for Rational {
    fn from(value: i64) -> Self {
        Self::from(Integer::from(value))
    }
}

impl fmt::Display for Rational {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        if self.is_integer() {
            return write!(formatter, "{}", self.numerator);
        }
        write!(formatter, "{}/{}", self.numerator, self.denominator)
    }
}

impl fmt::Debug for Rational {
    fn fmt(&self, formatter: &mut fmt::Formatter<'_>) -> fmt::Result {
        fmt::Display::fmt(self, formatter)
    }
}

impl PartialOrd for Rational {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Rational {
    fn cmp(&self, other: &Self) -> Ordering {
        (&self.numerator * &other.denominator).cmp(&(&other.numerator * &self.denominator))
    }
}

impl Neg for Rational {
    type Output = Self;

    fn neg(self) -> Self {
        Self {
            numerator: -self.numerator,
            denominator: self.denominator,
        }
    }
}

impl Neg for &Rational {
    type Output = Rational;

    fn neg(self) -> Rational {
        -self.clone()
    }
}

impl Add<&Rational> for &Rational {
    type Output = Rational;

    fn add(self, other: &Rational) -> Rational {
        let left = &self.numerator * &other.denominator;
        let right = &other.numerator * &self.denominator;
        Rational::reduced(left + right, &self.denominator * &other.denominator)
    }
}

impl Sub<&Rational> for &Rational {
    type Output = Rational;

    fn sub(self, other: &Rational) -> Rational {
        self + &-other
    }
}

impl Mul<&Rational> for &Rational {
    type Output = Rational;

    fn mul(self, other: &Rational) -> Rational {
        Rational::reduced(
            &self.numerator * &other.numerator,
            &self.denominator * &other.denominator,
        )
    }
}

macro_rules! owned {
    ($($trait:ident $method:ident),*) => {$(
        impl $trait for Rational {
            type Output = Self;

            fn $method(self, other: Self) -> Self {
                $trait::$method(&self, &other)
            }
        }
    )*};
}
owned!(Add add, Sub sub, Mul mul);
