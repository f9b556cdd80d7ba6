//! What a sweep over a determinant needs of its values.

use std::convert::Infallible;

use crate::algebra::integer::Integer;
use crate::algebra::polynomial::Polynomial;
use crate::algebra::prime_field::PrimeField;
use crate::algebra::univariate::Univariate;
use crate::budget::{Budget, Exceeded};

/// A commutative ring with one; operations are methods of a context that may hold a modulus or a
/// budget.
pub trait Ring {
    /// Its elements.
    type Element: Clone;
    /// What can go wrong.
    type Error;

    /// 0
    fn zero(&self) -> Self::Element;
    /// 1
    fn one(&self) -> Self::Element;
    /// An integer.
    fn integer(&self, value: &Integer) -> Self::Element;
    /// a + b
    ///
    /// # Errors
    /// When a budget is reached.
    fn add(&self, a: &Self::Element, b: &Self::Element) -> Result<Self::Element, Self::Error>;
    /// a · b
    ///
    /// # Errors
    /// When a budget is reached.
    fn mul(&self, a: &Self::Element, b: &Self::Element) -> Result<Self::Element, Self::Error>;
    /// −a
    fn neg(&self, a: &Self::Element) -> Self::Element;
    /// = 0
    fn is_zero(&self, a: &Self::Element) -> bool;
    /// Whether there is room for all these at once.
    ///
    /// # Errors
    /// When a budget is reached.
    fn room(&self, _elements: &[Self::Element]) -> Result<(), Self::Error> {
        Ok(())
    }
}

impl Ring for PrimeField {
    type Element = u64;
    type Error = Infallible;

    fn zero(&self) -> u64 {
        0
    }

    fn one(&self) -> u64 {
        1
    }

    fn integer(&self, value: &Integer) -> u64 {
        self.from_integer(value)
    }

    fn add(&self, a: &u64, b: &u64) -> Result<u64, Infallible> {
        Ok(Self::add(self, *a, *b))
    }

    fn mul(&self, a: &u64, b: &u64) -> Result<u64, Infallible> {
        Ok(Self::mul(self, *a, *b))
    }

    fn neg(&self, a: &u64) -> u64 {
        Self::neg(self, *a)
    }

    fn is_zero(&self, a: &u64) -> bool {
        *a == 0
    }
}

/// Polynomials in one variable modulo a prime.
#[derive(Clone, Copy, Debug)]
pub struct UnivariateRing {
    /// The coefficients' field.
    pub field: PrimeField,
}

impl Ring for UnivariateRing {
    type Element = Univariate;
    type Error = Infallible;

    fn zero(&self) -> Univariate {
        Univariate::zero()
    }

    fn one(&self) -> Univariate {
        Univariate::constant(1)
    }

    fn integer(&self, value: &Integer) -> Univariate {
        Univariate::constant(self.field.from_integer(value))
    }

    fn add(&self, a: &Univariate, b: &Univariate) -> Result<Univariate, Infallible> {
        Ok(a.add(b, &self.field))
    }

    fn mul(&self, a: &Univariate, b: &Univariate) -> Result<Univariate, Infallible> {
        Ok(a.mul(b, &self.field))
    }

    fn neg(&self, a: &Univariate) -> Univariate {
        a.neg(&self.field)
    }

    fn is_zero(&self, a: &Univariate) -> bool {
        a.is_zero()
    }
}

/// Terms of intermediate results for each term of the result.
const MERGED: usize = 4;

/// Polynomials over the integers, within a budget.
#[derive(Clone, Copy, Debug)]
pub struct PolynomialRing<'a> {
    /// Bounds.
    pub budget: &'a Budget,
}

impl Ring for PolynomialRing<'_> {
    type Element = Polynomial;
    type Error = Exceeded;

    fn zero(&self) -> Polynomial {
        Polynomial::zero()
    }

    fn one(&self) -> Polynomial {
        Polynomial::one()
    }

    fn integer(&self, value: &Integer) -> Polynomial {
        Polynomial::constant(value.clone())
    }

    fn add(&self, a: &Polynomial, b: &Polynomial) -> Result<Polynomial, Exceeded> {
        let sum = a + b;
        self.budget.terms(sum.len())?;
        Ok(sum)
    }

    fn mul(&self, a: &Polynomial, b: &Polynomial) -> Result<Polynomial, Exceeded> {
        a.product(b, self.budget)
    }

    fn neg(&self, a: &Polynomial) -> Polynomial {
        -a
    }

    fn is_zero(&self, a: &Polynomial) -> bool {
        a.is_zero()
    }

    /// Of independent values no term of a layer is lost later; under relations terms merge.
    fn room(&self, elements: &[Polynomial]) -> Result<(), Exceeded> {
        let all: usize = elements.iter().map(Polynomial::len).sum();
        self.budget.terms(all / MERGED)
    }
}
