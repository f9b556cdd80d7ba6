//! A random point modulo a prime: a value in s for every value symbol, with some relations kept and
//! others released.

use std::convert::Infallible;

use crate::algebra::univariate::Univariate;
use crate::algebra::{
    Fraction, Polynomial, PrimeField, Series, SeriesRing, Symbol, UnivariateRing,
};
use crate::analysis::determinant::Values;
use crate::analysis::relations::resolution_order;
use crate::network::{Network, RelationId, Strength, Value};

/// Which point.
pub(crate) struct Choice<'a> {
    /// Chooses the values of independent symbols.
    pub(crate) seed: u64,
    /// Where on the line that leads from the point with every relation kept (0) into the space where
    /// the released ones do not hold.
    pub(crate) shift: u64,
    /// Whether a relation is released.
    pub(crate) released: &'a dyn Fn(RelationId) -> bool,
    /// One independent quantity that gets another value than the seed gives it.
    pub(crate) salt: Option<Quantity>,
}

/// An independent quantity of a point.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(crate) enum Quantity {
    /// A symbol that no relation sets.
    Free(Symbol),
    /// A symbol whose relation is released.
    Released(Symbol),
    /// The copy of a parameter inside a released relation that keeps its form.
    Copy(RelationId, Symbol),
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
    salt: Option<Quantity>,
    /// Mutual inductances of couplings given by their factor.
    mutual: Vec<Option<Quotient>>,
    field: PrimeField,
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
            salt: choice.salt,
            mutual: Vec::new(),
            field: *field,
        };
        for id in resolution_order(network) {
            let relation = network.relation(id);
            let released = (choice.released)(id);
            let keeps_form = relation.has_s();
            for (symbol, value) in &relation.sets {
                let shift_parameters = released && keeps_form;
                let mut found = point.fraction(value, field, &|parameter| {
                    if shift_parameters {
                        offset(field, choice, Quantity::Copy(id, parameter))
                    } else {
                        0
                    }
                })?;
                if released && !keeps_form {
                    let by = offset(field, choice, Quantity::Released(*symbol));
                    let moved = found.denominator.scale(by, field);
                    found.numerator = found.numerator.add(&moved, field);
                }
                point.values[symbol.index()] = Some(found);
            }
            point.share_denominator(&relation.sets, field);
        }
        point.couple(network)?;
        Some(point)
    }

    /// All nominals with every relation kept; π and what has no nominal are random.
    pub(crate) fn nominal(network: &Network, field: &PrimeField) -> Option<Self> {
        let mut point = Self {
            values: vec![None; network.symbols().len()],
            seed: 0,
            salt: None,
            mutual: Vec::new(),
            field: *field,
        };
        for facts in network.all_facts() {
            if let Some(nominal) = &facts.nominal
                && network.set_by(facts.symbol).is_none()
            {
                let value = Quotient::constant(field.from_rational(nominal)?);
                point.values[facts.symbol.index()] = Some(value);
            }
        }
        for id in resolution_order(network) {
            let sets = &network.relation(id).sets;
            for (symbol, value) in sets {
                let found = point.fraction(value, field, &|_| 0)?;
                point.values[symbol.index()] = Some(found);
            }
            point.share_denominator(sets, field);
        }
        point.couple(network)?;
        Some(point)
    }

    /// M = k·√(L1·L2); `None` where the product is no square modulo the prime.
    fn couple(&mut self, network: &Network) -> Option<()> {
        let field = self.field;
        for coupling in network.couplings() {
            let Strength::Factor(k) = &coupling.strength else {
                self.mutual.push(None);
                continue;
            };
            let k = self.of_value(k)?;
            let coil = |id| self.of_value(network.element(id).value()?);
            let product = coil(coupling.first)?.times(&coil(coupling.second)?, &field);
            let root = |polynomial: &Univariate| {
                // Inductances hold no s.
                field.square_root(polynomial.coefficients().first().copied().unwrap_or(0))
            };
            let square = Quotient {
                numerator: Univariate::constant(root(
                    &product.numerator.mul(&product.denominator, &field),
                )?),
                denominator: product.denominator,
            };
            self.mutual.push(Some(k.times(&square, &field)));
        }
        Some(())
    }

    /// A value of the network at this point.
    pub(crate) fn of_value(&self, value: &Value) -> Option<Quotient> {
        match value {
            Value::Symbol(symbol) => Some(self.value(*symbol, &self.field)),
            Value::Number(number) => Some(Quotient::constant(self.field.from_rational(number)?)),
        }
    }

    /// Brings what one relation sets over one common denominator.
    fn share_denominator(&mut self, sets: &[(Symbol, Fraction)], field: &PrimeField) {
        if sets.len() < 2 {
            return;
        }
        let mut common = Univariate::constant(1);
        for (symbol, _) in sets {
            let own = self.value(*symbol, field).denominator;
            let shared = common.gcd(&own, field);
            common = common.mul(&own.div_rem(&shared, field).0, field);
        }
        for (symbol, _) in sets {
            let own = self.value(*symbol, field);
            let factor = common.div_rem(&own.denominator, field).0;
            self.values[symbol.index()] = Some(Quotient {
                numerator: own.numerator.mul(&factor, field),
                denominator: common.clone(),
            });
        }
    }

    /// The value of a symbol.
    pub(crate) fn value(&self, symbol: Symbol, field: &PrimeField) -> Quotient {
        if let Some(Some(quotient)) = self.values.get(symbol.index()) {
            return quotient.clone();
        }
        let numerator = if symbol == Symbol::S {
            Univariate::variable()
        } else {
            let choice = Choice {
                seed: self.seed,
                shift: 0,
                released: &|_| false,
                salt: self.salt,
            };
            Univariate::constant(salted(field, &choice, Quantity::Free(symbol)))
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
        Some(
            Quotient {
                numerator: upper.numerator.mul(&lower.denominator, field),
                denominator: upper.denominator.mul(&lower.numerator, field),
            }
            .reduced(field),
        )
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
                let by = if symbol == Symbol::S {
                    0
                } else {
                    shift(symbol)
                };
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

impl Values<UnivariateRing> for Point {
    fn symbol(&self, symbol: Symbol) -> Result<(Univariate, Univariate), Infallible> {
        let value = self.value(symbol, &self.field);
        Ok((value.numerator, value.denominator))
    }

    fn mutual(&self, coupling: usize) -> Result<(Univariate, Univariate), Infallible> {
        let value = self.mutual.get(coupling).cloned().flatten();
        let value = value.unwrap_or_else(|| Quotient::constant(0));
        Ok((value.numerator, value.denominator))
    }

    fn s(&self) -> Univariate {
        Univariate::variable()
    }

    fn polynomial(&self, polynomial: &Polynomial) -> Result<(Univariate, Univariate), Infallible> {
        let value = Self::polynomial(self, polynomial, &self.field, &|_| 0);
        Ok((value.numerator, value.denominator))
    }
}

/// The values of a point as series.
pub(crate) struct Terms<'a> {
    /// The point.
    pub(crate) point: &'a Point,
    /// The series.
    pub(crate) ring: SeriesRing,
}

impl Terms<'_> {
    fn both(&self, pair: (Univariate, Univariate)) -> (Series, Series) {
        (self.ring.polynomial(&pair.0), self.ring.polynomial(&pair.1))
    }
}

impl Values<SeriesRing> for Terms<'_> {
    fn symbol(&self, symbol: Symbol) -> Result<(Series, Series), Infallible> {
        Values::<UnivariateRing>::symbol(self.point, symbol).map(|pair| self.both(pair))
    }

    fn mutual(&self, coupling: usize) -> Result<(Series, Series), Infallible> {
        Values::<UnivariateRing>::mutual(self.point, coupling).map(|pair| self.both(pair))
    }

    fn s(&self) -> Series {
        self.ring.polynomial(&Univariate::variable())
    }

    fn polynomial(&self, polynomial: &Polynomial) -> Result<(Series, Series), Infallible> {
        Values::<UnivariateRing>::polynomial(self.point, polynomial).map(|pair| self.both(pair))
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

fn offset(field: &PrimeField, choice: &Choice<'_>, quantity: Quantity) -> u64 {
    field.mul(choice.shift, salted(field, choice, quantity))
}

/// The random residue of a quantity.
fn salted(field: &PrimeField, choice: &Choice<'_>, quantity: Quantity) -> u64 {
    let seed = if choice.salt == Some(quantity) {
        choice.seed ^ 0x5A17
    } else {
        choice.seed
    };
    match quantity {
        Quantity::Free(symbol) => residue(field, seed, 0, symbol),
        Quantity::Released(symbol) => residue(field, seed, 1, symbol),
        Quantity::Copy(id, symbol) => residue(field, seed, id.index() as u64 + 2, symbol),
    }
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
    field
        .from_integer(&crate::algebra::Integer::from(word >> 1))
        .max(1)
}
