//! Quotients of polynomials, always reduced.
//!
//! Canonical form: numerator and denominator share no polynomial and no number; the leading
//! coefficient of the denominator is positive. Equal fractions are therefore identical.

use crate::algebra::gcd::{cofactors, gcd};
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

    /// self + other, with common factors of the denominators taken out first (Henrici 1956).
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn add(&self, other: &Self, budget: &Budget) -> Result<Self, Exceeded> {
        if self.denominator == other.denominator {
            let sum = &self.numerator + &other.numerator;
            return Self::quotient(sum, self.denominator.clone(), budget);
        }
        let (common, left, right) = cofactors(&self.denominator, &other.denominator, budget)?;
        let sum =
            &self.numerator.product(&right, budget)? + &other.numerator.product(&left, budget)?;
        if sum.is_zero() {
            return Ok(Self::zero());
        }
        let (_, sum, common) = cofactors(&sum, &common, budget)?;
        let below = left.product(&right, budget)?.product(&common, budget)?;
        Ok(Self::signed(sum, below))
    }

    /// self − other
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn sub(&self, other: &Self, budget: &Budget) -> Result<Self, Exceeded> {
        self.add(&other.neg(), budget)
    }

    /// self · other, each numerator reduced against the other denominator before (Henrici 1956).
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn mul(&self, other: &Self, budget: &Budget) -> Result<Self, Exceeded> {
        if self.is_zero() || other.is_zero() {
            return Ok(Self::zero());
        }
        let (_, a, d) = cofactors(&self.numerator, &other.denominator, budget)?;
        let (_, b, c) = cofactors(&other.numerator, &self.denominator, budget)?;
        Ok(Self::signed(a.product(&b, budget)?, c.product(&d, budget)?))
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
    let values: Vec<(Symbol, Fraction)> = symbols
        .into_iter()
        .filter_map(|symbol| Some((symbol, value(symbol)?)))
        .filter(|(symbol, fraction)| fraction.as_symbol() != Some(*symbol))
        .collect();
    if values.is_empty() {
        return Ok(Fraction::from(polynomial.clone()));
    }
    // Values with one denominator share its powers: as many as the term with most of them needs.
    let mut below: Vec<&Polynomial> = Vec::new();
    let group: Vec<usize> = values
        .iter()
        .map(|(_, fraction)| {
            let known = below.iter().position(|it| *it == &fraction.denominator);
            known.unwrap_or_else(|| {
                below.push(&fraction.denominator);
                below.len() - 1
            })
        })
        .collect();
    let powers = |monomial: &Monomial| {
        let mut totals = vec![0; below.len()];
        for ((symbol, _), &place) in values.iter().zip(&group) {
            totals[place] += monomial.exponent(*symbol);
        }
        totals
    };
    let mut most = vec![0; below.len()];
    for (monomial, _) in polynomial.terms() {
        for (most, power) in most.iter_mut().zip(powers(monomial)) {
            *most = power.max(*most);
        }
    }
    for (divisor, power) in below.iter().zip(&most) {
        denominator = denominator.product(&divisor.power(*power, budget)?, budget)?;
    }
    let mut sum: Vec<(Monomial, Integer)> = Vec::new();
    for (monomial, coefficient) in polynomial.terms() {
        let mut rest = monomial.clone();
        let mut term = Polynomial::constant(coefficient.clone());
        for (symbol, fraction) in &values {
            let (without, exponent) = rest.without(*symbol);
            rest = without;
            if exponent > 0 {
                term = term.product(&fraction.numerator.power(exponent, budget)?, budget)?;
            }
        }
        for ((divisor, most), used) in below.iter().zip(&most).zip(powers(monomial)) {
            if *most > used && !divisor.is_one() {
                term = term.product(&divisor.power(most - used, budget)?, budget)?;
            }
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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::algebra::SymbolTable;

    /// A polynomial of many terms in many variables, different for each salt.
    fn long(symbols: &[Polynomial], salt: usize) -> Polynomial {
        let mut sum = Polynomial::constant(1 + salt as i64);
        for (i, a) in symbols.iter().enumerate() {
            for (j, b) in symbols.iter().enumerate().skip(i + 1) {
                let c = &symbols[(i * j + salt) % symbols.len()];
                let number = Polynomial::constant((1 + (i + 3 * j + salt) % 5) as i64);
                sum = &sum + &(&(&(a * b) * c) * &number);
            }
        }
        sum
    }

    fn symbols(many: usize) -> Vec<Polynomial> {
        let mut table = SymbolTable::new();
        (0..many)
            .map(|index| Polynomial::symbol(table.intern(&format!("x{index}"))))
            .collect()
    }

    #[test]
    fn sums_and_products_are_what_the_definition_says() {
        let x = symbols(3);
        let budget = Budget::unlimited();
        let parts: Vec<Polynomial> = vec![
            &x[0] + &x[1],
            &x[1] - &x[2],
            &(&x[0] * &x[2]) + &Polynomial::one(),
            Polynomial::constant(6),
            &x[0] * &Polynomial::constant(4),
        ];
        let mut values = Vec::new();
        for above in &parts {
            for below in &parts {
                let product = above * &parts[0];
                let value = Fraction::new(product, below * &parts[1], &budget);
                values.push(value.expect("in budget").expect("no zero"));
            }
        }
        for a in &values {
            for b in &values {
                let sum = &(&a.numerator * &b.denominator) + &(&b.numerator * &a.denominator);
                let below = &a.denominator * &b.denominator;
                let above = &a.numerator * &b.numerator;
                let whole = |above, below| Fraction::new(above, below, &budget).expect("ok");
                assert_eq!(
                    Some(a.add(b, &budget).expect("ok")),
                    whole(sum, below.clone())
                );
                assert_eq!(Some(a.mul(b, &budget).expect("ok")), whole(above, below));
            }
            assert!(a.sub(a, &budget).expect("ok").is_zero());
        }
    }

    #[test]
    fn a_closed_loop_needs_no_large_common_factor() {
        let x = symbols(14);
        let budget = Budget::unlimited();
        let (above, below) = (long(&x, 1), long(&x, 4));
        let open = Fraction::new(above.clone(), below.clone(), &budget);
        let open = open.expect("ok").expect("no zero");
        let mut table = SymbolTable::new();
        let names: Vec<Symbol> = (0..15).map(|i| table.intern(&format!("x{i}"))).collect();
        let name = Polynomial::symbol(names[14]);
        let closing = Fraction::new(name.clone(), &name + &Polynomial::one(), &budget);
        let closing = closing.expect("ok").expect("no zero");
        let put = |symbol: Symbol| (symbol == names[14]).then(|| open.clone());
        let closed = closing
            .substitute(&put, &budget)
            .expect("ok")
            .expect("no zero");
        let expected = Fraction::signed(above.clone(), &above + &below);
        assert_eq!(closed, expected);
    }
}
