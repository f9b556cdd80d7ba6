//! Binary floating point of any length, and complex numbers over it. Sums and products are exact;
//! whoever wants fewer digits rounds.

use std::cmp::Ordering;
use std::ops::{Add, Mul, Neg, Sub};

use nalgebra::Complex;
use num_bigint::{BigInt, Sign};
use num_traits::{Signed, ToPrimitive, Zero};

use crate::algebra::{Integer, Rational};

/// mantissa · 2^exponent.
#[derive(Clone, Debug)]
pub struct Big {
    mantissa: BigInt,
    exponent: i64,
}

impl Big {
    /// 0
    #[must_use]
    pub fn zero() -> Self {
        Self {
            mantissa: BigInt::zero(),
            exponent: 0,
        }
    }

    /// A power of two.
    #[must_use]
    pub fn power_of_two(exponent: i64) -> Self {
        Self {
            mantissa: BigInt::from(1),
            exponent,
        }
    }

    /// The value of a finite double, exactly; 0 for others.
    #[must_use]
    pub fn from_f64(value: f64) -> Self {
        if value == 0.0 || !value.is_finite() {
            return Self::zero();
        }
        let bits = value.to_bits();
        let biased = i64::try_from(bits >> 52 & 0x7ff).unwrap_or(0);
        let fraction = bits & ((1 << 52) - 1);
        let (mantissa, exponent) = if biased == 0 {
            (fraction, -1074)
        } else {
            (fraction | 1 << 52, biased - 1075)
        };
        let mantissa = BigInt::from(mantissa);
        Self {
            mantissa: if value < 0.0 { -mantissa } else { mantissa },
            exponent,
        }
    }

    /// A rational number to `precision` bits.
    #[must_use]
    pub fn from_rational(value: &Rational, precision: u64) -> Self {
        Self::from(value.numerator()).div(&Self::from(value.denominator()), precision)
    }

    /// Whether it is 0.
    #[must_use]
    pub fn is_zero(&self) -> bool {
        self.mantissa.is_zero()
    }

    /// −1, 0 or 1.
    #[must_use]
    pub fn signum(&self) -> i32 {
        match self.mantissa.sign() {
            Sign::Minus => -1,
            Sign::NoSign => 0,
            Sign::Plus => 1,
        }
    }

    /// |self|
    #[must_use]
    pub fn abs(&self) -> Self {
        Self {
            mantissa: self.mantissa.abs(),
            exponent: self.exponent,
        }
    }

    /// The e with 2^(e−1) ≤ |self| < 2^e; `None` for 0.
    #[must_use]
    pub fn magnitude(&self) -> Option<i64> {
        if self.is_zero() {
            return None;
        }
        Some(i64::try_from(self.mantissa.bits()).unwrap_or(i64::MAX) + self.exponent)
    }

    /// self · 2^by
    #[must_use]
    pub fn shift(&self, by: i64) -> Self {
        Self {
            mantissa: self.mantissa.clone(),
            exponent: self.exponent + by,
        }
    }

    /// To the nearest of `precision` bits.
    #[must_use]
    pub fn round(self, precision: u64) -> Self {
        let bits = self.mantissa.bits();
        if bits <= precision {
            return self;
        }
        let drop = bits - precision;
        let half = BigInt::from(1) << (drop - 1);
        Self {
            mantissa: (self.mantissa + half) >> drop,
            exponent: self.exponent + i64::try_from(drop).unwrap_or(0),
        }
    }

    /// self / other to `precision` bits, rounded down; 0 where the divisor is 0.
    #[must_use]
    pub fn div(&self, other: &Self, precision: u64) -> Self {
        if other.is_zero() {
            return Self::zero();
        }
        let wanted = precision + 1 + other.mantissa.bits();
        let shift = wanted.saturating_sub(self.mantissa.bits());
        Self {
            mantissa: (&self.mantissa << shift) / &other.mantissa,
            exponent: self.exponent - other.exponent - i64::try_from(shift).unwrap_or(0),
        }
        .round(precision)
    }

    /// √self to some `precision` bits, rounded down; 0 for negative numbers.
    #[must_use]
    pub fn sqrt(&self, precision: u64) -> Self {
        if self.signum() <= 0 {
            return Self::zero();
        }
        let mut shift = (2 * precision).saturating_sub(self.mantissa.bits());
        let exponent = self.exponent - i64::try_from(shift).unwrap_or(0);
        if exponent.rem_euclid(2) == 1 {
            shift += 1;
        }
        let exponent = self.exponent - i64::try_from(shift).unwrap_or(0);
        Self {
            mantissa: (&self.mantissa << shift).sqrt(),
            exponent: exponent / 2,
        }
    }

    /// The nearest double (±∞ beyond their range).
    #[must_use]
    pub fn to_f64(&self) -> f64 {
        let short = self.clone().round(53);
        let Some(magnitude) = short.magnitude() else {
            return 0.0;
        };
        let mantissa = short.mantissa.to_f64().unwrap_or(0.0);
        if magnitude > 1024 {
            return f64::INFINITY.copysign(mantissa);
        }
        if magnitude < -1073 {
            return 0.0;
        }
        let half = short.exponent / 2;
        let power = |exponent: i64| 2_f64.powi(i32::try_from(exponent).unwrap_or(0));
        mantissa * power(half) * power(short.exponent - half)
    }

    /// The exact value.
    #[must_use]
    pub fn to_rational(&self) -> Rational {
        let mantissa = Rational::from(Integer::from(self.mantissa.clone()));
        let power =
            Integer::from(2).pow(u32::try_from(self.exponent.unsigned_abs()).unwrap_or(u32::MAX));
        let power = Rational::from(power);
        if self.exponent >= 0 {
            mantissa * power
        } else {
            mantissa * power.recip().unwrap_or_else(Rational::zero)
        }
    }
}

impl From<&Integer> for Big {
    fn from(value: &Integer) -> Self {
        Self {
            mantissa: value.to_bigint(),
            exponent: 0,
        }
    }
}

/// Both mantissas over the smaller exponent.
fn aligned(a: &Big, b: &Big) -> (BigInt, BigInt, i64) {
    let exponent = if a.is_zero() {
        b.exponent
    } else if b.is_zero() {
        a.exponent
    } else {
        a.exponent.min(b.exponent)
    };
    let lift = |big: &Big| {
        if big.is_zero() {
            BigInt::zero()
        } else {
            &big.mantissa << u64::try_from(big.exponent - exponent).unwrap_or(0)
        }
    };
    (lift(a), lift(b), exponent)
}

impl Add for &Big {
    type Output = Big;
    fn add(self, other: Self) -> Big {
        let (a, b, exponent) = aligned(self, other);
        Big {
            mantissa: a + b,
            exponent,
        }
    }
}

impl Sub for &Big {
    type Output = Big;
    fn sub(self, other: Self) -> Big {
        let (a, b, exponent) = aligned(self, other);
        Big {
            mantissa: a - b,
            exponent,
        }
    }
}

impl Mul for &Big {
    type Output = Big;
    fn mul(self, other: Self) -> Big {
        Big {
            mantissa: &self.mantissa * &other.mantissa,
            exponent: self.exponent + other.exponent,
        }
    }
}

impl Neg for Big {
    type Output = Self;
    fn neg(self) -> Self {
        Self {
            mantissa: -self.mantissa,
            exponent: self.exponent,
        }
    }
}

impl PartialEq for Big {
    fn eq(&self, other: &Self) -> bool {
        self.cmp(other) == Ordering::Equal
    }
}

impl Eq for Big {}

impl PartialOrd for Big {
    fn partial_cmp(&self, other: &Self) -> Option<Ordering> {
        Some(self.cmp(other))
    }
}

impl Ord for Big {
    fn cmp(&self, other: &Self) -> Ordering {
        let signs = self.signum().cmp(&other.signum());
        if signs != Ordering::Equal || self.is_zero() {
            return signs;
        }
        let sizes = self.magnitude().cmp(&other.magnitude());
        if sizes != Ordering::Equal {
            return if self.signum() > 0 {
                sizes
            } else {
                sizes.reverse()
            };
        }
        let (a, b, _) = aligned(self, other);
        a.cmp(&b)
    }
}

/// A complex number.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct BigComplex {
    /// Real part.
    pub re: Big,
    /// Imaginary part.
    pub im: Big,
}

impl BigComplex {
    /// 0
    #[must_use]
    pub fn zero() -> Self {
        Self::real(Big::zero())
    }

    /// A real number.
    #[must_use]
    pub fn real(re: Big) -> Self {
        Self {
            re,
            im: Big::zero(),
        }
    }

    /// The complex conjugate.
    #[must_use]
    pub fn conjugate(&self) -> Self {
        Self {
            re: self.re.clone(),
            im: -self.im.clone(),
        }
    }

    /// re² + im², exactly.
    #[must_use]
    pub fn square_norm(&self) -> Big {
        &(&self.re * &self.re) + &(&self.im * &self.im)
    }

    /// |self| to some `precision` bits, rounded down.
    #[must_use]
    pub fn norm(&self, precision: u64) -> Big {
        self.square_norm().sqrt(precision)
    }

    /// Both parts to `precision` bits.
    #[must_use]
    pub fn round(self, precision: u64) -> Self {
        Self {
            re: self.re.round(precision),
            im: self.im.round(precision),
        }
    }

    /// self / other to `precision` bits; 0 where the divisor is 0.
    #[must_use]
    pub fn div(&self, other: &Self, precision: u64) -> Self {
        let above = self * &other.conjugate();
        let below = other.square_norm();
        Self {
            re: above.re.div(&below, precision),
            im: above.im.div(&below, precision),
        }
    }

    /// Both parts as the nearest doubles.
    #[must_use]
    pub fn to_f64(&self) -> Complex<f64> {
        Complex::new(self.re.to_f64(), self.im.to_f64())
    }
}

impl Add for &BigComplex {
    type Output = BigComplex;
    fn add(self, other: Self) -> BigComplex {
        BigComplex {
            re: &self.re + &other.re,
            im: &self.im + &other.im,
        }
    }
}

impl Sub for &BigComplex {
    type Output = BigComplex;
    fn sub(self, other: Self) -> BigComplex {
        BigComplex {
            re: &self.re - &other.re,
            im: &self.im - &other.im,
        }
    }
}

impl Mul for &BigComplex {
    type Output = BigComplex;
    fn mul(self, other: Self) -> BigComplex {
        if self.im.is_zero() && other.im.is_zero() {
            return BigComplex::real(&self.re * &other.re);
        }
        BigComplex {
            re: &(&self.re * &other.re) - &(&self.im * &other.im),
            im: &(&self.re * &other.im) + &(&self.im * &other.re),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn doubles_go_there_and_back() {
        for value in [0.0, 1.0, -3.75, 1e-300, 2.5e307, -1e-12, f64::MIN_POSITIVE] {
            assert_eq!(Big::from_f64(value).to_f64().to_bits(), value.to_bits());
        }
    }

    #[test]
    fn quotients_and_roots_are_close_from_below() {
        let three = Big::from(&Integer::from(3));
        let third = Big::power_of_two(0).div(&three, 60);
        assert!((third.to_f64() - 1.0 / 3.0).abs() < 1e-15);
        let root = Big::from(&Integer::from(2)).shift(-31).sqrt(80);
        assert!((root.to_f64() - (2_f64.powi(-30)).sqrt()).abs() < 1e-20);
        assert!(&root * &root <= Big::power_of_two(-30));
    }

    #[test]
    fn order_is_that_of_the_numbers() {
        let mut values = [3.5, -2.0, 0.0, 1e20, -1e-20, 2.0, -2.5].map(Big::from_f64);
        values.sort();
        let sorted: Vec<f64> = values.iter().map(Big::to_f64).collect();
        assert_eq!(sorted, [-2.5, -2.0, -1e-20, 0.0, 2.0, 3.5, 1e20]);
    }

    #[test]
    fn complex_quotients() {
        let number = |re: f64, im: f64| BigComplex {
            re: Big::from_f64(re),
            im: Big::from_f64(im),
        };
        let quotient = number(1.0, 2.0).div(&number(3.0, -4.0), 80).to_f64();
        assert!((quotient - Complex::new(-0.2, 0.4)).norm() < 1e-15);
    }
}
