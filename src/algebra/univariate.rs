//! Dense polynomials in one variable modulo a prime.

use crate::algebra::prime_field::PrimeField;

/// Coefficients by power; the last is non-zero.
#[derive(Clone, Debug, Default, PartialEq, Eq, Hash)]
pub struct Univariate(Vec<u64>);

impl Univariate {
    /// From coefficients by power; zeros at the end are dropped.
    #[must_use]
    pub fn new(mut coefficients: Vec<u64>) -> Self {
        while coefficients.last() == Some(&0) {
            coefficients.pop();
        }
        Self(coefficients)
    }

    /// 0
    #[must_use]
    pub fn zero() -> Self {
        Self::default()
    }

    /// A constant.
    #[must_use]
    pub fn constant(value: u64) -> Self {
        Self::new(vec![value])
    }

    /// The variable.
    #[must_use]
    pub fn variable() -> Self {
        Self(vec![0, 1])
    }

    /// Coefficients by power.
    #[must_use]
    pub fn coefficients(&self) -> &[u64] {
        &self.0
    }

    /// = 0
    #[must_use]
    pub fn is_zero(&self) -> bool {
        self.0.is_empty()
    }

    /// Degree; `None` for zero.
    #[must_use]
    pub fn degree(&self) -> Option<usize> {
        self.0.len().checked_sub(1)
    }

    /// Multiplicity of the root 0; `None` for zero.
    #[must_use]
    pub fn valuation(&self) -> Option<usize> {
        self.0.iter().position(|&value| value != 0)
    }

    /// Leading coefficient, 0 for zero.
    #[must_use]
    pub fn lead(&self) -> u64 {
        self.0.last().copied().unwrap_or(0)
    }

    /// self + other
    #[must_use]
    pub fn add(&self, other: &Self, field: &PrimeField) -> Self {
        let (long, short) = if self.0.len() >= other.0.len() {
            (self, other)
        } else {
            (other, self)
        };
        let mut sum = long.0.clone();
        for (target, &value) in sum.iter_mut().zip(&short.0) {
            *target = field.add(*target, value);
        }
        Self::new(sum)
    }

    /// −self
    #[must_use]
    pub fn neg(&self, field: &PrimeField) -> Self {
        Self(self.0.iter().map(|&value| field.neg(value)).collect())
    }

    /// self − other
    #[must_use]
    pub fn sub(&self, other: &Self, field: &PrimeField) -> Self {
        self.add(&other.neg(field), field)
    }

    /// factor · self
    #[must_use]
    pub fn scale(&self, factor: u64, field: &PrimeField) -> Self {
        Self::new(
            self.0
                .iter()
                .map(|&value| field.mul(value, factor))
                .collect(),
        )
    }

    /// self · other
    #[must_use]
    pub fn mul(&self, other: &Self, field: &PrimeField) -> Self {
        if self.is_zero() || other.is_zero() {
            return Self::zero();
        }
        let mut product = vec![0; self.0.len() + other.0.len() - 1];
        for (i, &a) in self.0.iter().enumerate() {
            if a == 0 {
                continue;
            }
            for (j, &b) in other.0.iter().enumerate() {
                product[i + j] = field.add(product[i + j], field.mul(a, b));
            }
        }
        Self::new(product)
    }

    /// Quotient and remainder; division by zero gives (0, self).
    #[must_use]
    pub fn div_rem(&self, other: &Self, field: &PrimeField) -> (Self, Self) {
        let Some(inverse) = field.inv(other.lead()) else {
            return (Self::zero(), self.clone());
        };
        let mut rest = self.0.clone();
        let short = other.0.len();
        if rest.len() < short {
            return (Self::zero(), self.clone());
        }
        let mut quotient = vec![0; rest.len() - short + 1];
        for at in (0..quotient.len()).rev() {
            let weight = field.mul(rest[at + short - 1], inverse);
            quotient[at] = weight;
            if weight == 0 {
                continue;
            }
            for (offset, &value) in other.0.iter().enumerate() {
                rest[at + offset] = field.sub(rest[at + offset], field.mul(weight, value));
            }
        }
        rest.truncate(short - 1);
        (Self::new(quotient), Self::new(rest))
    }

    /// self divided by its leading coefficient.
    #[must_use]
    pub fn monic(&self, field: &PrimeField) -> Self {
        match field.inv(self.lead()) {
            Some(inverse) => self.scale(inverse, field),
            None => Self::zero(),
        }
    }

    /// Greatest common divisor, monic (Euclid); 0 only when both are zero.
    #[must_use]
    pub fn gcd(&self, other: &Self, field: &PrimeField) -> Self {
        let (mut a, mut b) = (self.clone(), other.clone());
        while !b.is_zero() {
            let rest = a.div_rem(&b, field).1;
            a = b;
            b = rest;
        }
        a.monic(field)
    }

    /// The value at a residue.
    #[must_use]
    pub fn evaluate(&self, at: u64, field: &PrimeField) -> u64 {
        self.0
            .iter()
            .rev()
            .fold(0, |sum, &value| field.add(field.mul(sum, at), value))
    }

    /// d/dx
    #[must_use]
    pub fn derivative(&self, field: &PrimeField) -> Self {
        Self::new(
            self.0
                .iter()
                .enumerate()
                .skip(1)
                .map(|(power, &value)| field.mul(value, power as u64))
                .collect(),
        )
    }

    /// How often `factor` divides self; 0 for a constant factor or zero.
    #[must_use]
    pub fn multiplicity(&self, factor: &Self, field: &PrimeField) -> u32 {
        if self.is_zero() || factor.degree().unwrap_or(0) == 0 {
            return 0;
        }
        let mut count = 0;
        let mut rest = self.clone();
        loop {
            let (quotient, left) = rest.div_rem(factor, field);
            if !left.is_zero() {
                return count;
            }
            count += 1;
            rest = quotient;
        }
    }

    /// The polynomial of least degree through points with different abscissae (Newton).
    #[must_use]
    pub fn interpolate(points: &[(u64, u64)], field: &PrimeField) -> Self {
        let mut result = Self::zero();
        let mut basis = Self::constant(1);
        for &(at, value) in points {
            let missing = field.sub(value, result.evaluate(at, field));
            let Some(inverse) = field.inv(basis.evaluate(at, field)) else {
                continue;
            };
            let step = basis.scale(field.mul(missing, inverse), field);
            result = result.add(&step, field);
            basis = basis.mul(&Self::new(vec![field.neg(at), 1]), field);
        }
        result
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_common_factor_is_found() {
        let field = PrimeField::default_prime();
        let f = Univariate::new(vec![3, 1, 4]);
        let a = f.mul(&Univariate::new(vec![1, 5]), &field);
        let b = f.mul(&Univariate::new(vec![9, 2, 6]), &field);
        assert_eq!(a.gcd(&b, &field), f.monic(&field));
        assert_eq!(
            f.mul(&f, &field).mul(&a, &field).multiplicity(&f, &field),
            3
        );
    }

    #[test]
    fn interpolation_gives_the_polynomial_back() {
        let field = PrimeField::default_prime();
        let f = Univariate::new(vec![7, 0, 5, 11]);
        let points: Vec<_> = (10..14).map(|at| (at, f.evaluate(at, &field))).collect();
        assert_eq!(Univariate::interpolate(&points, &field), f);
    }
}
