//! Numbers for the equations: random residues for independent symbols, relations evaluated.

use std::collections::BTreeMap;

use crate::algebra::gcd::gcd;
use crate::algebra::{Fraction, Polynomial, Symbol};
use crate::analysis::couplings::Couplings;
use crate::analysis::equations::{At, Residue, residue};
use crate::analysis::relations::resolution_order;
use crate::budget::Budget;
use crate::network::{Network, Strength, Value};

/// Values modulo the prime.
pub(crate) struct Numbers<'a> {
    network: &'a Network,
    couplings: &'a Couplings,
    seed: u64,
    s: Residue,
    values: BTreeMap<Symbol, (Residue, Residue)>,
    /// Least common denominators of what one relation sets, by its first symbol.
    commons: BTreeMap<Symbol, Residue>,
    /// A symbol whose value is another than the seed's.
    changed: Option<Symbol>,
}

impl<'a> Numbers<'a> {
    /// A point where every relation holds; `None` where a denominator vanishes.
    pub(crate) fn related(
        network: &'a Network,
        couplings: &'a Couplings,
        seed: u64,
        s: Residue,
    ) -> Option<Self> {
        let mut numbers = Self {
            network,
            couplings,
            seed,
            s,
            values: BTreeMap::new(),
            commons: BTreeMap::new(),
            changed: None,
        };
        for (&inductance, &root) in couplings.roots() {
            let value = numbers.random(root);
            numbers
                .values
                .insert(inductance, (value.mul(value), Residue::ONE));
        }
        for id in resolution_order(network) {
            let relation = network.relation(id);
            for (symbol, value) in &relation.sets {
                let pair = numbers.pair(value);
                if pair.1.is_zero() {
                    return None;
                }
                numbers.values.insert(*symbol, pair);
            }
            numbers.share(&relation.sets);
        }
        Some(numbers)
    }

    /// A point where every value is independent, `changed` another than in the same point without it.
    pub(crate) fn independent(
        network: &'a Network,
        couplings: &'a Couplings,
        seed: u64,
        changed: Option<Symbol>,
    ) -> Self {
        let mut numbers = Self {
            network,
            couplings,
            seed,
            s: random(seed, 0),
            values: BTreeMap::new(),
            commons: BTreeMap::new(),
            changed,
        };
        // Every symbol that a relation sets has a number of its own.
        for (_, relation) in network.relations() {
            for (symbol, _) in &relation.sets {
                let value = numbers.random(*symbol);
                numbers.values.insert(*symbol, (value, Residue::ONE));
            }
        }
        numbers
    }

    /// Brings what one relation sets over its least common denominator.
    fn share(&mut self, sets: &[(Symbol, Fraction)]) {
        let Some((first, _)) = sets.first() else {
            return;
        };
        if sets.len() < 2 {
            return;
        }
        let budget = Budget::default();
        let mut common = Polynomial::one();
        for (_, value) in sets {
            let Ok(shared) = gcd(&common, value.denominator(), &budget) else {
                return;
            };
            let rest = value.denominator().div_exact(&shared);
            common = &common * &rest.unwrap_or_else(Polynomial::one);
        }
        let (above, below) = self.pair(&Fraction::from(common));
        if let Some(inverse) = below.inverse() {
            self.commons.insert(*first, above.mul(inverse));
        }
    }

    fn random(&self, symbol: Symbol) -> Residue {
        let seed = if self.changed == Some(symbol) {
            self.seed ^ 0x00C0_FFEE
        } else {
            self.seed
        };
        random(seed, symbol.index() as u64 + 1)
    }

    fn symbol(&self, symbol: Symbol) -> (Residue, Residue) {
        if symbol == Symbol::S {
            return (self.s, Residue::ONE);
        }
        match self.values.get(&symbol) {
            Some(pair) => *pair,
            None => (self.random(symbol), Residue::ONE),
        }
    }

    /// Numerator and denominator of a fraction, over the denominators of its symbols.
    fn pair(&self, fraction: &Fraction) -> (Residue, Residue) {
        let upper = self.polynomial(fraction.numerator());
        let lower = self.polynomial(fraction.denominator());
        (upper.0.mul(lower.1), upper.1.mul(lower.0))
    }

    fn polynomial(&self, polynomial: &Polynomial) -> (Residue, Residue) {
        let degrees: Vec<(Symbol, u32)> = polynomial
            .symbols()
            .into_iter()
            .map(|symbol| (symbol, polynomial.degree(symbol)))
            .collect();
        let mut below = Residue::ONE;
        for &(symbol, degree) in &degrees {
            below = below.mul(self.symbol(symbol).1.power(u64::from(degree)));
        }
        let mut sum = Residue::ZERO;
        for (monomial, coefficient) in polynomial.terms() {
            let mut term = Residue::integer(coefficient);
            for &(symbol, degree) in &degrees {
                let (n, d) = self.symbol(symbol);
                let exponent = monomial.exponent(symbol);
                term = term
                    .mul(n.power(u64::from(exponent)))
                    .mul(d.power(u64::from(degree - exponent)));
            }
            sum = sum.add(term);
        }
        (sum, below)
    }

    /// The value of an expression; `None` where it divides by zero.
    pub(crate) fn value_of(&self, fraction: &Fraction) -> Option<Residue> {
        let (above, below) = self.pair(fraction);
        Some(above.mul(below.inverse()?))
    }

    /// The value of a quotient in the symbols of a formula, roots of inductances included.
    pub(crate) fn formula(
        &self,
        fraction: &Fraction,
        function: &dyn Fn(Symbol) -> Option<Residue>,
    ) -> Option<Residue> {
        let mut bases: BTreeMap<Symbol, Residue> = BTreeMap::new();
        for symbol in fraction.symbols() {
            let base = function(symbol).unwrap_or_else(|| {
                let (n, d) = self.symbol(symbol);
                n.mul(d.inverse().unwrap_or(Residue::ZERO))
            });
            bases.insert(symbol, base);
        }
        let value = |polynomial: &Polynomial| -> Residue {
            let mut sum = Residue::ZERO;
            for (monomial, coefficient) in polynomial.terms() {
                let mut term = Residue::integer(coefficient);
                for (symbol, exponent) in monomial.factors() {
                    let base = bases[&symbol];
                    term = term.mul(base.power(u64::from(exponent)));
                }
                sum = sum.add(term);
            }
            sum
        };
        let below = value(fraction.denominator()).inverse()?;
        Some(value(fraction.numerator()).mul(below))
    }
}

impl At for Numbers<'_> {
    fn value(&self, value: &Value) -> (Residue, Residue) {
        match value {
            Value::Symbol(symbol) => self.symbol(*symbol),
            Value::Number(number) => (
                Residue::integer(number.numerator()),
                Residue::integer(number.denominator()),
            ),
        }
    }

    fn mutual(&self, coupling: usize) -> Residue {
        let found = &self.network.couplings()[coupling];
        let Strength::Factor(k) = &found.strength else {
            return Residue::ZERO;
        };
        let Some(mutual) = self.couplings.mutual(coupling) else {
            return Residue::ZERO;
        };
        let Some(value) = self.formula(mutual, &|_| None) else {
            return Residue::ZERO;
        };
        // M² = k²·L1·L2 is checked here, whatever the engine's way to M.
        let coil = |id| {
            self.network
                .element(id)
                .value()
                .map_or(Residue::ZERO, |value| {
                    let (n, d) = self.value(value);
                    n.mul(d.inverse().unwrap_or(Residue::ZERO))
                })
        };
        let (k, k_below) = self.value(k);
        let k = k.mul(k_below.inverse().unwrap_or(Residue::ZERO));
        let square = k.mul(k).mul(coil(found.first)).mul(coil(found.second));
        if value.mul(value) == square || self.changed.is_some() {
            value
        } else {
            // A wrong M makes the comparison fail, which is what it is for.
            value.add(Residue::ONE)
        }
    }

    fn s(&self) -> Residue {
        self.s
    }

    fn row(&self, values: &[Value]) -> (Vec<Residue>, Residue) {
        let pairs: Vec<(Residue, Residue)> = values.iter().map(|value| self.value(value)).collect();
        let shared = values.iter().find_map(|value| match value {
            Value::Symbol(symbol) => {
                let id = self.network.set_by(*symbol)?;
                let first = self.network.relation(id).sets.first()?.0;
                self.commons.get(&first).copied()
            }
            Value::Number(_) => None,
        });
        let common = shared.unwrap_or_else(|| {
            pairs
                .iter()
                .fold(Residue::ONE, |product, (_, below)| product.mul(*below))
        });
        let coefficients = pairs
            .iter()
            .map(|(above, below)| {
                above
                    .mul(common)
                    .mul(below.inverse().unwrap_or(Residue::ZERO))
            })
            .collect();
        (coefficients, common)
    }
}

/// A fixed pseudo-random residue, not zero.
pub(crate) fn random(seed: u64, stream: u64) -> Residue {
    let mut word = seed
        .wrapping_mul(0xA24B_AED4_963E_E407)
        .wrapping_add(stream.wrapping_mul(0x9FB2_1C65_1E98_DF25));
    word ^= word >> 32;
    word = word.wrapping_mul(0xD6E8_FEB8_6659_FD93);
    word ^= word >> 32;
    word = word.wrapping_mul(0xD6E8_FEB8_6659_FD93);
    word ^= word >> 32;
    let value = Residue::new(word);
    if value.is_zero() {
        residue(&crate::algebra::Rational::one())
    } else {
        value
    }
}
