//! A random point modulo a prime: a value in s for every value symbol, with some relations kept and
//! others released.

use crate::algebra::univariate::Univariate;
use crate::algebra::{Fraction, Polynomial, PrimeField, Symbol};
use crate::analysis::relations::resolution_order;
use crate::network::{Network, RelationId};

/// Which point.
pub(crate) struct Choice<'a> {
    /// Chooses the values of independent symbols.
    pub(crate) seed: u64,
    /// Where on the line that leads from the point with every relation kept (0) into the space where
    /// the released ones do not hold.
    pub(crate) shift: u64,
    /// Whether a relation is released.
    pub(crate) released: &'a dyn Fn(RelationId) -> bool,
}

/// Quotient of two polynomials in s modulo the prime.
#[derive(Clone, Debug)]
pub(crate) struct Quotient {
    /// Numerator.
    pub(crate) numerator: Univariate,
    /// Denominator.
    pub(crate) denominator: Univariate,
}

/// Values of all symbols.
pub(crate) struct Point {
    values: Vec<Option<Quotient>>,
    seed: u64,
}

impl Point {
    /// Evaluates all relations; `None` where a denominator vanishes (choose another seed).
    ///
    /// A released relation without s adds to each symbol it sets a random multiple of the shift. One
    /// with s keeps its form, and its parameters are shifted instead.
    pub(crate) fn new(network: &Network, field: &PrimeField, choice: &Choice<'_>) -> Option<Self> {
        let mut point = Self {
            values: vec![None; network.symbols().len()],
            seed: choice.seed,
        };
        for id in resolution_order(network) {
            let relation = network.relation(id);
            let released = (choice.released)(id);
            let keeps_form = relation.has_s();
            for (symbol, value) in &relation.sets {
                let shift_parameters = released && keeps_form;
                let mut found = point.fraction(value, field, &|parameter| {
                    if shift_parameters {
                        offset(field, choice, id.index() as u64 + 1, parameter)
                    } else {
                        0
                    }
                })?;
                if released && !keeps_form {
                    let by = offset(field, choice, 0, *symbol);
                    let moved = found.denominator.scale(by, field);
                    found.numerator = found.numerator.add(&moved, field);
                }
                point.values[symbol.index()] = Some(found);
            }
        }
        Some(point)
    }

    /// The value of a symbol.
    pub(crate) fn value(&self, symbol: Symbol, field: &PrimeField) -> Quotient {
        if let Some(Some(quotient)) = self.values.get(symbol.index()) {
            return quotient.clone();
        }
        let numerator = if symbol == Symbol::S {
            Univariate::variable()
        } else {
            Univariate::constant(residue(field, self.seed, 0, symbol))
        };
        Quotient {
            numerator,
            denominator: Univariate::constant(1),
        }
    }

    /// Value of a fraction; `shift` is added to each of its symbols.
    fn fraction(
        &self,
        fraction: &Fraction,
        field: &PrimeField,
        shift: &dyn Fn(Symbol) -> u64,
    ) -> Option<Quotient> {
        let upper = self.polynomial(fraction.numerator(), field, shift);
        let lower = self.polynomial(fraction.denominator(), field, shift);
        if lower.numerator.is_zero() {
            return None;
        }
        Some(Quotient {
            numerator: upper.numerator.mul(&lower.denominator, field),
            denominator: upper.denominator.mul(&lower.numerator, field),
        }
        .reduced(field))
    }

    fn polynomial(
        &self,
        polynomial: &Polynomial,
        field: &PrimeField,
        shift: &dyn Fn(Symbol) -> u64,
    ) -> Quotient {
        let mut sum = Quotient::constant(0);
        for (monomial, coefficient) in polynomial.terms() {
            let mut term = Quotient::constant(field.from_integer(coefficient));
            for (symbol, exponent) in monomial.factors() {
                let mut value = self.value(symbol, field);
                let by = if symbol == Symbol::S { 0 } else { shift(symbol) };
                if by != 0 {
                    let moved = value.denominator.scale(by, field);
                    value.numerator = value.numerator.add(&moved, field);
                }
                for _ in 0..exponent {
                    term = term.times(&value, field);
                }
            }
            sum = sum.plus(&term, field);
        }
        sum
    }
}

impl Quotient {
    fn constant(value: u64) -> Self {
        Self {
            numerator: Univariate::constant(value),
            denominator: Univariate::constant(1),
        }
    }

    fn times(&self, other: &Self, field: &PrimeField) -> Self {
        Self {
            numerator: self.numerator.mul(&other.numerator, field),
            denominator: self.denominator.mul(&other.denominator, field),
        }
    }

    fn plus(&self, other: &Self, field: &PrimeField) -> Self {
        if self.denominator == other.denominator {
            return Self {
                numerator: self.numerator.add(&other.numerator, field),
                denominator: self.denominator.clone(),
            };
        }
        let left = self.numerator.mul(&other.denominator, field);
        let right = other.numerator.mul(&self.denominator, field);
        Self {
            numerator: left.add(&right, field),
            denominator: self.denominator.mul(&other.denominator, field),
        }
    }

    /// Without common factors, so that no factor in s comes from the arithmetic.
    fn reduced(self, field: &PrimeField) -> Self {
        let common = self.numerator.gcd(&self.denominator, field);
        if common.degree() == Some(0) {
            return self;
        }
        Self {
            numerator: self.numerator.div_rem(&common, field).0,
            denominator: self.denominator.div_rem(&common, field).0,
        }
    }
}

fn offset(field: &PrimeField, choice: &Choice<'_>, stream: u64, symbol: Symbol) -> u64 {
    field.mul(
        choice.shift,
        residue(field, choice.seed, stream + 1, symbol),
    )
}

/// A fixed pseudo-random residue other than zero (SplitMix64).
pub(crate) fn residue(field: &PrimeField, seed: u64, stream: u64, symbol: Symbol) -> u64 {
    let index = symbol.index() as u64;
    let mut word = seed
        .wrapping_mul(0x9E37_79B9_7F4A_7C15)
        .wrapping_add(stream.wrapping_mul(0xD1B5_4A32_D192_ED03))
        .wrapping_add(index.wrapping_mul(0x8CB9_2BA7_2F3D_8DD7));
    word ^= word >> 30;
    word = word.wrapping_mul(0xBF58_476D_1CE4_E5B9);
    word ^= word >> 27;
    word = word.wrapping_mul(0x94D0_49BB_1331_11EB);
    word ^= word >> 31;
    field.from_integer(&crate::algebra::Integer::from(word >> 1)).max(1)
}
