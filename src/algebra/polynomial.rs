//! Sparse polynomials over the integers.
//!
//! Canonical form: terms strictly descending in the order of [`Monomial`], no zero coefficient.

use std::collections::BTreeMap;
use std::ops::{Add, Mul, Neg, Sub};

use rustc_hash::FxHashMap;

use crate::algebra::integer::Integer;
use crate::algebra::monomial::Monomial;
use crate::algebra::packed::{self, Division};
use crate::algebra::prime_field::PrimeField;
use crate::algebra::rational::Rational;
use crate::algebra::symbol::Symbol;
use crate::budget::{Budget, Exceeded};

/// Products of terms below which the clock is not looked at.
const SMALL_PRODUCT: usize = 1024;

/// A polynomial with integer coefficients.
#[derive(Clone, Debug, Default, PartialEq, Eq, Hash)]
pub struct Polynomial {
    terms: Vec<(Monomial, Integer)>,
}

impl Polynomial {
    /// 0
    #[must_use]
    pub fn zero() -> Self {
        Self::default()
    }

    /// 1
    #[must_use]
    pub fn one() -> Self {
        Self::constant(1)
    }

    /// An integer.
    #[must_use]
    pub fn constant(value: impl Into<Integer>) -> Self {
        Self::monomial(value.into(), Monomial::one())
    }

    /// A symbol.
    #[must_use]
    pub fn symbol(symbol: Symbol) -> Self {
        Self::monomial(Integer::one(), Monomial::symbol(symbol))
    }

    /// coefficient · monomial
    #[must_use]
    pub fn monomial(coefficient: Integer, monomial: Monomial) -> Self {
        let terms = if coefficient.is_zero() {
            Vec::new()
        } else {
            vec![(monomial, coefficient)]
        };
        Self { terms }
    }

    /// The sum of any terms, in any order, with repetitions.
    #[must_use]
    pub fn from_terms(terms: impl IntoIterator<Item = (Monomial, Integer)>) -> Self {
        let mut terms: Vec<_> = terms.into_iter().collect();
        terms.sort_unstable_by(|a, b| b.0.cmp(&a.0));
        let mut merged: Vec<(Monomial, Integer)> = Vec::with_capacity(terms.len());
        for (monomial, coefficient) in terms {
            match merged.last_mut() {
                Some(last) if last.0 == monomial => last.1 += coefficient,
                _ => merged.push((monomial, coefficient)),
            }
        }
        merged.retain(|(_, coefficient)| !coefficient.is_zero());
        Self { terms: merged }
    }

    /// The terms, descending.
    #[must_use]
    pub fn terms(&self) -> &[(Monomial, Integer)] {
        &self.terms
    }

    /// Number of terms.
    #[must_use]
    pub fn len(&self) -> usize {
        self.terms.len()
    }

    /// Same as [`Polynomial::is_zero`].
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.terms.is_empty()
    }

    /// Whether the terms stand as documented.
    #[must_use]
    pub fn is_canonical(&self) -> bool {
        self.terms
            .iter()
            .all(|(_, coefficient)| !coefficient.is_zero())
            && self.terms.windows(2).all(|pair| pair[0].0 > pair[1].0)
    }

    /// = 0
    #[must_use]
    pub fn is_zero(&self) -> bool {
        self.terms.is_empty()
    }

    /// = 1
    #[must_use]
    pub fn is_one(&self) -> bool {
        self.as_constant().is_some_and(|value| value.is_one())
    }

    /// Whether no symbol stands in it.
    #[must_use]
    pub fn is_constant(&self) -> bool {
        self.as_constant().is_some()
    }

    /// The value of a constant.
    #[must_use]
    pub fn as_constant(&self) -> Option<Integer> {
        match self.terms.as_slice() {
            [] => Some(Integer::zero()),
            [(monomial, coefficient)] if monomial.is_one() => Some(coefficient.clone()),
            _ => None,
        }
    }

    /// The symbol, when it is just one.
    #[must_use]
    pub fn as_symbol(&self) -> Option<Symbol> {
        match self.terms.as_slice() {
            [(monomial, coefficient)] if coefficient.is_one() && monomial.total_degree() == 1 => {
                monomial.factors().next().map(|(symbol, _)| symbol)
            }
            _ => None,
        }
    }

    /// The symbols that stand in it, sorted.
    #[must_use]
    pub fn symbols(&self) -> Vec<Symbol> {
        let mut symbols: Vec<Symbol> = self
            .terms
            .iter()
            .flat_map(|(monomial, _)| monomial.factors().map(|(symbol, _)| symbol))
            .collect();
        symbols.sort_unstable();
        symbols.dedup();
        symbols
    }

    /// Whether a symbol stands in it.
    #[must_use]
    pub fn contains(&self, symbol: Symbol) -> bool {
        self.terms
            .iter()
            .any(|(monomial, _)| monomial.exponent(symbol) > 0)
    }

    /// Highest power of a symbol; 0 for the zero polynomial.
    #[must_use]
    pub fn degree(&self, symbol: Symbol) -> u32 {
        self.terms
            .iter()
            .map(|(monomial, _)| monomial.exponent(symbol))
            .max()
            .unwrap_or(0)
    }

    /// Lowest power of a symbol; 0 for the zero polynomial.
    #[must_use]
    pub fn valuation(&self, symbol: Symbol) -> u32 {
        self.terms
            .iter()
            .map(|(monomial, _)| monomial.exponent(symbol))
            .min()
            .unwrap_or(0)
    }

    /// Highest total degree; 0 for the zero polynomial.
    #[must_use]
    pub fn total_degree(&self) -> u32 {
        self.terms
            .iter()
            .map(|(monomial, _)| monomial.total_degree())
            .max()
            .unwrap_or(0)
    }

    /// Coefficients by powers of a symbol; empty for zero, else the last is non-zero.
    #[must_use]
    pub fn coefficients(&self, symbol: Symbol) -> Vec<Self> {
        if self.is_zero() {
            return Vec::new();
        }
        let mut parts = vec![Self::zero(); self.degree(symbol) as usize + 1];
        for (monomial, coefficient) in &self.terms {
            let (rest, power) = monomial.without(symbol);
            // The order is kept: monomials with equal powers of one symbol compare by the rest.
            parts[power as usize]
                .terms
                .push((rest, coefficient.clone()));
        }
        parts
    }

    /// Σ `coefficients[k]` · symbol^k
    #[must_use]
    pub fn from_coefficients(symbol: Symbol, coefficients: &[Self]) -> Self {
        Self::from_terms(coefficients.iter().enumerate().flat_map(|(power, part)| {
            let power = Monomial::power(symbol, u32::try_from(power).unwrap_or(u32::MAX));
            part.terms
                .iter()
                .map(move |(monomial, coefficient)| (monomial.mul(&power), coefficient.clone()))
        }))
    }

    /// Coefficient of the highest power of a symbol.
    #[must_use]
    pub fn leading_coefficient(&self, symbol: Symbol) -> Self {
        self.coefficients(symbol).pop().unwrap_or_default()
    }

    /// Coefficient of the leading term; 0 for zero.
    #[must_use]
    pub fn lead(&self) -> Integer {
        self.terms
            .first()
            .map_or_else(Integer::zero, |(_, coefficient)| coefficient.clone())
    }

    /// factor · self
    #[must_use]
    pub fn scale(&self, factor: &Integer) -> Self {
        if factor.is_zero() {
            return Self::zero();
        }
        Self {
            terms: self
                .terms
                .iter()
                .map(|(monomial, coefficient)| (monomial.clone(), coefficient * factor))
                .collect(),
        }
    }

    /// monomial · self
    #[must_use]
    pub fn mul_monomial(&self, monomial: &Monomial) -> Self {
        Self {
            terms: self
                .terms
                .iter()
                .map(|(own, coefficient)| (own.mul(monomial), coefficient.clone()))
                .collect(),
        }
    }

    /// self / divisor when every coefficient is a multiple.
    #[must_use]
    pub fn div_integer(&self, divisor: &Integer) -> Option<Self> {
        let terms = self
            .terms
            .iter()
            .map(|(monomial, coefficient)| {
                Some((monomial.clone(), coefficient.div_exact(divisor)?))
            })
            .collect::<Option<_>>()?;
        Some(Self { terms })
    }

    /// Greatest common divisor of the coefficients, ≥ 0.
    #[must_use]
    pub fn content(&self) -> Integer {
        let mut content = Integer::zero();
        for (_, coefficient) in &self.terms {
            content = content.gcd(coefficient);
            if content.is_one() {
                break;
            }
        }
        content
    }

    /// self / content; the sign is kept.
    #[must_use]
    pub fn primitive(&self) -> Self {
        let content = self.content();
        if content.is_one() || content.is_zero() {
            return self.clone();
        }
        self.div_integer(&content).unwrap_or_default()
    }

    /// The largest monomial that divides every term.
    #[must_use]
    pub fn monomial_content(&self) -> Monomial {
        let mut terms = self.terms.iter();
        let Some((first, _)) = terms.next() else {
            return Monomial::one();
        };
        terms.fold(first.clone(), |common, (monomial, _)| common.gcd(monomial))
    }

    /// self^exponent; large results take their time, see [`Polynomial::power`].
    #[must_use]
    pub fn pow(&self, exponent: u32) -> Self {
        (0..exponent).fold(Self::one(), |product, _| &product * self)
    }

    /// self · other within a budget of terms.
    ///
    /// # Errors
    /// When the product has more terms than allowed.
    pub fn product(&self, other: &Self, budget: &Budget) -> Result<Self, Exceeded> {
        let work = self.len().saturating_mul(other.len());
        if self.len() == 1 || other.len() == 1 || work <= SMALL_PRODUCT {
            let product = self * other;
            budget.terms(product.len())?;
            return Ok(product);
        }
        budget.time()?;
        if let Some(terms) = packed::product(&self.terms, &other.terms, budget)? {
            return Ok(Self { terms });
        }
        let mut sums: FxHashMap<Monomial, Integer> = FxHashMap::default();
        for (a, x) in &self.terms {
            budget.time()?;
            for (b, y) in &other.terms {
                *sums.entry(a.mul(b)).or_default() += x * y;
            }
            budget.terms(sums.len())?;
        }
        Ok(Self::from_sums(sums))
    }

    fn from_sums(sums: FxHashMap<Monomial, Integer>) -> Self {
        let mut terms: Vec<_> = sums
            .into_iter()
            .filter(|(_, coefficient)| !coefficient.is_zero())
            .collect();
        terms.sort_unstable_by(|a, b| b.0.cmp(&a.0));
        Self { terms }
    }

    /// self^exponent within a budget of terms.
    ///
    /// # Errors
    /// When an intermediate power has more terms than allowed.
    pub fn power(&self, exponent: u32, budget: &Budget) -> Result<Self, Exceeded> {
        let mut product = Self::one();
        for _ in 0..exponent {
            product = product.product(self, budget)?;
        }
        Ok(product)
    }

    /// self / divisor when the division leaves nothing; `None` also for division by zero.
    #[must_use]
    pub fn div_exact(&self, divisor: &Self) -> Option<Self> {
        let (lead, lead_coefficient) = divisor.terms.first()?;
        if divisor.len() == 1 {
            let terms = self
                .terms
                .iter()
                .map(|(monomial, coefficient)| {
                    Some((
                        monomial.div(lead)?,
                        coefficient.div_exact(lead_coefficient)?,
                    ))
                })
                .collect::<Option<_>>()?;
            return Some(Self { terms });
        }
        if self.is_zero() {
            return Some(Self::zero());
        }
        match packed::divide(&self.terms, &divisor.terms) {
            Division::Exact(terms) => return Some(Self { terms }),
            Division::Inexact => return None,
            Division::TooWide => {}
        }
        let mut rest: BTreeMap<Monomial, Integer> = self.terms.iter().cloned().collect();
        let mut quotient = Vec::new();
        while let Some((monomial, coefficient)) = rest.pop_last() {
            let factor = monomial.div(lead)?;
            let weight = coefficient.div_exact(lead_coefficient)?;
            for (own, own_coefficient) in &divisor.terms[1..] {
                let target = own.mul(&factor);
                let change = own_coefficient * &weight;
                let entry = rest.entry(target.clone()).or_default();
                *entry -= change;
                if entry.is_zero() {
                    rest.remove(&target);
                }
            }
            quotient.push((factor, weight));
        }
        Some(Self { terms: quotient })
    }

    /// ∂self/∂symbol
    #[must_use]
    pub fn derivative(&self, symbol: Symbol) -> Self {
        Self::from_terms(self.terms.iter().filter_map(|(monomial, coefficient)| {
            let exponent = monomial.exponent(symbol);
            let lower = monomial.div(&Monomial::symbol(symbol))?;
            Some((lower, coefficient * &Integer::from(exponent)))
        }))
    }

    /// self with a polynomial in place of a symbol (Horner).
    #[must_use]
    pub fn substitute(&self, symbol: Symbol, value: &Self) -> Self {
        self.coefficients(symbol)
            .iter()
            .rev()
            .fold(Self::zero(), |sum, part| &(&sum * value) + part)
    }

    /// self with other symbols.
    #[must_use]
    pub fn rename(&self, name: &dyn Fn(Symbol) -> Symbol) -> Self {
        Self::from_terms(self.terms.iter().map(|(monomial, coefficient)| {
            let renamed = monomial
                .factors()
                .fold(Monomial::one(), |product, (symbol, exponent)| {
                    product.mul(&Monomial::power(name(symbol), exponent))
                });
            (renamed, coefficient.clone())
        }))
    }

    /// Numbers put in for some symbols: numerator and positive common denominator.
    #[must_use]
    pub fn evaluate(&self, value: &dyn Fn(Symbol) -> Option<Rational>) -> (Self, Integer) {
        let mut parts: Vec<(Monomial, Rational)> = Vec::with_capacity(self.len());
        let mut denominator = Integer::one();
        for (monomial, coefficient) in &self.terms {
            let mut number = Rational::from(coefficient.clone());
            let mut rest = Monomial::one();
            for (symbol, exponent) in monomial.factors() {
                match value(symbol) {
                    Some(found) => {
                        let power = i32::try_from(exponent).unwrap_or(i32::MAX);
                        number = &number * &found.pow(power).unwrap_or_else(Rational::zero);
                    }
                    None => rest = rest.mul(&Monomial::power(symbol, exponent)),
                }
            }
            denominator = denominator.lcm(number.denominator());
            parts.push((rest, number));
        }
        let polynomial = Self::from_terms(parts.into_iter().map(|(monomial, number)| {
            let factor = denominator.div_rem(number.denominator()).0;
            (monomial, number.numerator() * &factor)
        }));
        (polynomial, denominator)
    }

    /// The value at numbers.
    #[must_use]
    pub fn value(&self, value: &dyn Fn(Symbol) -> Rational) -> Rational {
        let (number, denominator) = self.evaluate(&|symbol| Some(value(symbol)));
        let numerator = number.as_constant().unwrap_or_default();
        Rational::new(numerator, denominator).unwrap_or_else(Rational::zero)
    }

    /// The value modulo a prime.
    #[must_use]
    pub fn value_mod(&self, field: &PrimeField, value: &dyn Fn(Symbol) -> u64) -> u64 {
        let mut sum = 0;
        for (monomial, coefficient) in &self.terms {
            let mut term = field.from_integer(coefficient);
            for (symbol, exponent) in monomial.factors() {
                term = field.mul(term, field.pow(value(symbol), u64::from(exponent)));
            }
            sum = field.add(sum, term);
        }
        sum
    }

    fn merged(&self, other: &Self, minus: bool) -> Self {
        let signed = |value: &Integer| if minus { -value } else { value.clone() };
        let mut terms = Vec::with_capacity(self.len() + other.len());
        let (mut left, mut right) = (self.terms.iter().peekable(), other.terms.iter().peekable());
        while let (Some(a), Some(b)) = (left.peek(), right.peek()) {
            match a.0.cmp(&b.0) {
                std::cmp::Ordering::Greater => {
                    terms.push((*a).clone());
                    left.next();
                }
                std::cmp::Ordering::Less => {
                    terms.push((b.0.clone(), signed(&b.1)));
                    right.next();
                }
                std::cmp::Ordering::Equal => {
                    let sum = if minus { &a.1 - &b.1 } else { &a.1 + &b.1 };
                    if !sum.is_zero() {
                        terms.push((a.0.clone(), sum));
                    }
                    left.next();
                    right.next();
                }
            }
        }
        terms.extend(left.cloned());
        terms.extend(right.map(|(monomial, value)| (monomial.clone(), signed(value))));
        Self { terms }
    }
}

impl Add<&Polynomial> for &Polynomial {
    type Output = Polynomial;

    fn add(self, other: &Polynomial) -> Polynomial {
        self.merged(other, false)
    }
}

impl Sub<&Polynomial> for &Polynomial {
    type Output = Polynomial;

    fn sub(self, other: &Polynomial) -> Polynomial {
        self.merged(other, true)
    }
}

impl Mul<&Polynomial> for &Polynomial {
    type Output = Polynomial;

    fn mul(self, other: &Polynomial) -> Polynomial {
        if let [(monomial, coefficient)] = other.terms.as_slice() {
            return self.mul_monomial(monomial).scale(coefficient);
        }
        if let [(monomial, coefficient)] = self.terms.as_slice() {
            return other.mul_monomial(monomial).scale(coefficient);
        }
        if self.len().min(other.len()) > 3
            && let Ok(Some(terms)) =
                packed::product(&self.terms, &other.terms, &Budget::unlimited())
        {
            return Polynomial { terms };
        }
        let mut sums: FxHashMap<Monomial, Integer> = FxHashMap::default();
        for (a, x) in &self.terms {
            for (b, y) in &other.terms {
                *sums.entry(a.mul(b)).or_default() += x * y;
            }
        }
        Polynomial::from_sums(sums)
    }
}

impl Neg for &Polynomial {
    type Output = Polynomial;

    fn neg(self) -> Polynomial {
        self.scale(&Integer::from(-1))
    }
}

impl Neg for Polynomial {
    type Output = Self;

    fn neg(self) -> Self {
        -&self
    }
}

macro_rules! owned {
    ($($trait:ident $method:ident),*) => {$(
        impl $trait for Polynomial {
            type Output = Self;

            fn $method(self, other: Self) -> Self {
                $trait::$method(&self, &other)
            }
        }
    )*};
}
owned!(Add add, Sub sub, Mul mul);
