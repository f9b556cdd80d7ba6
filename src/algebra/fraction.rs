//! Quotients of polynomials, always reduced.
//!
//! Canonical form: numerator and denominator share no polynomial and no number; the leading
//! coefficient of the denominator is positive. Equal fractions are therefore identical.

use crate::algebra::gcd::gcd;
use crate::algebra::integer::Integer;
use crate::algebra::monomial::Monomial;
use crate::algebra::polynomial::Polynomial;
use crate::algebra::prime_field::PrimeField;
use crate::algebra::rational::Rational;
use crate::algebra::symbol::Symbol;
use crate::budget::{Budget, Exceeded};

/// A rational function over the integers.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct Fraction {
    numerator: Polynomial,
    denominator: Polynomial,
}

impl Fraction {
    /// numerator/denominator, reduced; `None` when the denominator is zero.
    ///
    /// # Errors
    /// When the common factor could not be found within the budget.
    pub fn new(
        numerator: Polynomial,
        denominator: Polynomial,
        budget: &Budget,
    ) -> Result<Option<Self>, Exceeded> {
        if denominator.is_zero() {
            return Ok(None);
        }
        let common = gcd(&numerator, &denominator, budget)?;
        let divide = |polynomial: &Polynomial| {
            polynomial
                .div_exact(&common)
                .unwrap_or_else(|| polynomial.clone())
        };
        Ok(Some(Self::signed(divide(&numerator), divide(&denominator))))
    }

    fn signed(numerator: Polynomial, denominator: Polynomial) -> Self {
        if denominator.lead().signum() < 0 {
            return Self {
                numerator: -numerator,
                denominator: -denominator,
            };
        }
        Self {
            numerator,
            denominator,
        }
    }

    /// A symbol.
    #[must_use]
    pub fn symbol(symbol: Symbol) -> Self {
        Self::from(Polynomial::symbol(symbol))
    }

    /// 0
    #[must_use]
    pub fn zero() -> Self {
        Self::from(Polynomial::zero())
    }

    /// 1
    #[must_use]
    pub fn one() -> Self {
        Self::from(Polynomial::one())
    }

    /// Numerator.
    #[must_use]
    pub fn numerator(&self) -> &Polynomial {
        &self.numerator
    }

    /// Denominator, not zero.
    #[must_use]
    pub fn denominator(&self) -> &Polynomial {
        &self.denominator
    }

    /// = 0
    #[must_use]
    pub fn is_zero(&self) -> bool {
        self.numerator.is_zero()
    }

    /// = 1
    #[must_use]
    pub fn is_one(&self) -> bool {
        self.numerator.is_one() && self.denominator.is_one()
    }

    /// Whether the denominator is 1.
    #[must_use]
    pub fn is_polynomial(&self) -> bool {
        self.denominator.is_one()
    }

    /// The number, when no symbol stands in it.
    #[must_use]
    pub fn as_rational(&self) -> Option<Rational> {
        Rational::new(
            self.numerator.as_constant()?,
            self.denominator.as_constant()?,
        )
    }

    /// The numerator, when the denominator is 1.
    #[must_use]
    pub fn as_polynomial(&self) -> Option<&Polynomial> {
        self.is_polynomial().then_some(&self.numerator)
    }

    /// The symbol, when it is just one.
    #[must_use]
    pub fn as_symbol(&self) -> Option<Symbol> {
        self.as_polynomial()?.as_symbol()
    }

    /// The symbols that stand in it, sorted.
    #[must_use]
    pub fn symbols(&self) -> Vec<Symbol> {
        let mut symbols = self.numerator.symbols();
        symbols.extend(self.denominator.symbols());
        symbols.sort_unstable();
        symbols.dedup();
        symbols
    }

    /// Whether a symbol stands in it.
    #[must_use]
    pub fn contains(&self, symbol: Symbol) -> bool {
        self.numerator.contains(symbol) || self.denominator.contains(symbol)
    }

    /// self + other
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn add(&self, other: &Self, budget: &Budget) -> Result<Self, Exceeded> {
        if self.denominator == other.denominator {
            let sum = &self.numerator + &other.numerator;
            return Self::quotient(sum, self.denominator.clone(), budget);
        }
        let left = self.numerator.product(&other.denominator, budget)?;
        let right = other.numerator.product(&self.denominator, budget)?;
        let below = self.denominator.product(&other.denominator, budget)?;
        Self::quotient(&left + &right, below, budget)
    }

    /// self − other
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn sub(&self, other: &Self, budget: &Budget) -> Result<Self, Exceeded> {
        self.add(&other.neg(), budget)
    }

    /// self · other
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn mul(&self, other: &Self, budget: &Budget) -> Result<Self, Exceeded> {
        let above = self.numerator.product(&other.numerator, budget)?;
        let below = self.denominator.product(&other.denominator, budget)?;
        Self::quotient(above, below, budget)
    }

    /// self / other; `None` when other is zero.
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn div(&self, other: &Self, budget: &Budget) -> Result<Option<Self>, Exceeded> {
        match other.recip() {
            Some(inverse) => self.mul(&inverse, budget).map(Some),
            None => Ok(None),
        }
    }

    /// A quotient whose denominator is known not to be zero.
    fn quotient(
        numerator: Polynomial,
        denominator: Polynomial,
        budget: &Budget,
    ) -> Result<Self, Exceeded> {
        Ok(Self::new(numerator, denominator, budget)?.unwrap_or_else(Self::zero))
    }

    /// 1/self; `None` for zero.
    #[must_use]
    pub fn recip(&self) -> Option<Self> {
        (!self.is_zero()).then(|| Self::signed(self.denominator.clone(), self.numerator.clone()))
    }

    /// −self
    #[must_use]
    pub fn neg(&self) -> Self {
        Self {
            numerator: -&self.numerator,
            denominator: self.denominator.clone(),
        }
    }

    /// self^exponent; `None` for a negative power of zero.
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn pow(&self, exponent: i32, budget: &Budget) -> Result<Option<Self>, Exceeded> {
        let power = exponent.unsigned_abs();
        let raised = Self {
            numerator: self.numerator.power(power, budget)?,
            denominator: self.denominator.power(power, budget)?,
        };
        Ok(if exponent < 0 {
            raised.recip()
        } else {
            Some(raised)
        })
    }

    /// Fractions put in for some symbols, all at once; `None` when the denominator becomes zero.
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn substitute(
        &self,
        value: &dyn Fn(Symbol) -> Option<Self>,
        budget: &Budget,
    ) -> Result<Option<Self>, Exceeded> {
        let above = put_in(&self.numerator, value, budget)?;
        let below = put_in(&self.denominator, value, budget)?;
        above.div(&below, budget)
    }

    /// ∂self/∂symbol
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn derivative(&self, symbol: Symbol, budget: &Budget) -> Result<Self, Exceeded> {
        let left = self
            .numerator
            .derivative(symbol)
            .product(&self.denominator, budget)?;
        let right = self
            .numerator
            .product(&self.denominator.derivative(symbol), budget)?;
        let below = self.denominator.product(&self.denominator, budget)?;
        Self::quotient(&left - &right, below, budget)
    }

    /// The value at numbers; `None` where the denominator vanishes.
    #[must_use]
    pub fn value(&self, value: &dyn Fn(Symbol) -> Rational) -> Option<Rational> {
        let inverse = self.denominator.value(value).recip()?;
        Some(&self.numerator.value(value) * &inverse)
    }

    /// The value modulo a prime; `None` where the denominator vanishes.
    #[must_use]
    pub fn value_mod(&self, field: &PrimeField, value: &dyn Fn(Symbol) -> u64) -> Option<u64> {
        let inverse = field.inv(self.denominator.value_mod(field, value))?;
        Some(field.mul(self.numerator.value_mod(field, value), inverse))
    }

    /// Whether it is stored as documented.
    #[must_use]
    pub fn is_canonical(&self) -> bool {
        let budget = Budget::unlimited();
        self.denominator.lead().signum() > 0
            && gcd(&self.numerator, &self.denominator, &budget).is_ok_and(|common| common.is_one())
    }
}

/// A polynomial at fractions, over one common denominator for each symbol.
fn put_in(
    polynomial: &Polynomial,
    value: &dyn Fn(Symbol) -> Option<Fraction>,
    budget: &Budget,
) -> Result<Fraction, Exceeded> {
    let mut denominator = Polynomial::one();
    let symbols = polynomial.symbols();
    // All at once: the values may hold the symbols themselves, so the sum is built term by term.
    let values: Vec<(Symbol, Fraction, u32)> = symbols
        .into_iter()
        .filter_map(|symbol| Some((symbol, value(symbol)?)))
        .filter(|(symbol, fraction)| fraction.as_symbol() != Some(*symbol))
        .map(|(symbol, fraction)| (symbol, fraction, polynomial.degree(symbol)))
        .collect();
    if values.is_empty() {
        return Ok(Fraction::from(polynomial.clone()));
    }
    let mut sum: Vec<(Monomial, Integer)> = Vec::new();
    for (_, fraction, degree) in &values {
        denominator = denominator.product(&fraction.denominator.power(*degree, budget)?, budget)?;
    }
    for (monomial, coefficient) in polynomial.terms() {
        let mut rest = monomial.clone();
        let mut term = Polynomial::constant(coefficient.clone());
        for (symbol, fraction, degree) in &values {
            let (without, exponent) = rest.without(*symbol);
            rest = without;
            let above = fraction.numerator.power(exponent, budget)?;
            let below = fraction.denominator.power(degree - exponent, budget)?;
            term = term.product(&above, budget)?.product(&below, budget)?;
        }
        sum.extend(term.mul_monomial(&rest).terms().iter().cloned());
        if sum.len() > budget.limits().terms.saturating_mul(2) {
            let gathered = Polynomial::from_terms(std::mem::take(&mut sum));
            budget.terms(gathered.len())?;
            budget.time()?;
            sum = gathered.terms().to_vec();
        }
    }
    let numerator = Polynomial::from_terms(sum);
    budget.terms(numerator.len())?;
    Fraction::quotient(numerator, denominator, budget)
}

impl From<Polynomial> for Fraction {
    fn from(numerator: Polynomial) -> Self {
        Self {
            numerator,
            denominator: Polynomial::one(),
        }
    }
}

impl From<Integer> for Fraction {
    fn from(value: Integer) -> Self {
        Self::from(Polynomial::constant(value))
    }
}

impl From<Rational> for Fraction {
    fn from(value: Rational) -> Self {
        Self {
            numerator: Polynomial::constant(value.numerator().clone()),
            denominator: Polynomial::constant(value.denominator().clone()),
        }
    }
}
