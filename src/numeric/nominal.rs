//! The nominal values as numbers, and how far they may stray.

use std::collections::{BTreeMap, BTreeSet};

use crate::algebra::{Integer, Polynomial, Rational, Symbol};
use crate::analysis::relations::Substitution;
use crate::budget::{Budget, Exceeded};
use crate::network::{Network, Strength, Tolerance, Value};
use crate::numeric::big::Big;

/// Bits of numbers that are no rationals: π and mutual inductances k·√(L1·L2).
const BITS: u64 = 512;

/// What is taken for a value whose tolerance is not stated.
const DEFAULT_PERCENT: i64 = 1;

/// Nominal values of all symbols of a network that have one.
pub struct Nominals<'a> {
    network: &'a Network,
    values: BTreeMap<Symbol, Rational>,
}

impl<'a> Nominals<'a> {
    /// Stated nominals, those that relations make of them, and the mutual inductances of couplings by
    /// factor.
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn new(network: &'a Network, budget: &Budget) -> Result<Self, Exceeded> {
        let substitution = Substitution::new(network, budget)?;
        let mut values = BTreeMap::from([(Symbol::PI, pi())]);
        for facts in network.all_facts() {
            if let Some(nominal) = &facts.nominal {
                values.insert(facts.symbol, nominal.clone());
            }
        }
        for facts in network.all_facts() {
            if network.set_by(facts.symbol).is_none() {
                continue;
            }
            let value = substitution.value(facts.symbol);
            let known = |symbol: &Symbol| values.contains_key(symbol);
            if value.symbols().iter().all(known)
                && let Some(number) = value.value(&|symbol| values[&symbol].clone())
            {
                values.insert(facts.symbol, number);
            }
        }
        let mut nominals = Self { network, values };
        nominals.add_mutuals();
        Ok(nominals)
    }

    fn add_mutuals(&mut self) {
        for coupling in self.network.couplings() {
            let Strength::Factor(k) = &coupling.strength else {
                continue;
            };
            let coils = [coupling.first, coupling.second].map(|id| {
                let value = self.network.element(id).value()?;
                self.number(value)
            });
            let name = format!("M_{}", coupling.name);
            if let (Some(k), [Some(first), Some(second)], Some(symbol)) =
                (self.number(k), coils, self.network.symbols().find(&name))
            {
                self.values.insert(symbol, k * root(&(first * second)));
            }
        }
    }

    /// The network.
    #[must_use]
    pub fn network(&self) -> &'a Network {
        self.network
    }

    /// The nominal of a symbol.
    #[must_use]
    pub fn value(&self, symbol: Symbol) -> Option<&Rational> {
        self.values.get(&symbol)
    }

    /// The nominal of a value.
    #[must_use]
    pub fn number(&self, value: &Value) -> Option<Rational> {
        match value {
            Value::Number(number) => Some(number.clone()),
            Value::Symbol(symbol) => self.value(*symbol).cloned(),
        }
    }

    /// Names of the symbols of some polynomials that have no nominal.
    #[must_use]
    pub fn missing<'p>(
        &self,
        polynomials: impl IntoIterator<Item = &'p Polynomial>,
    ) -> Vec<String> {
        let mut names = BTreeSet::new();
        for polynomial in polynomials {
            for symbol in polynomial.symbols() {
                if symbol != Symbol::S && self.value(symbol).is_none() {
                    names.insert(self.network.symbols().name(symbol).to_owned());
                }
            }
        }
        names.into_iter().collect()
    }

    /// Σ c_k·s^k at the nominals, and the number it is to be divided by.
    #[must_use]
    pub fn in_s(&self, polynomial: &Polynomial) -> (Polynomial, Integer) {
        polynomial.evaluate(&|symbol| self.values.get(&symbol).cloned())
    }

    /// How far an independent symbol may stray from its nominal, as fractions of it.
    #[must_use]
    pub fn spread(&self, symbol: Symbol) -> Spread {
        let facts = self.network.facts(symbol);
        match facts.and_then(|facts| facts.tolerance.as_ref()) {
            Some(Tolerance { up, down }) => Spread {
                up: up.clone(),
                down: down.clone(),
                stated: true,
            },
            None => {
                let percent = Rational::new(Integer::from(DEFAULT_PERCENT), Integer::from(100));
                let percent = percent.unwrap_or_else(Rational::zero);
                Spread {
                    up: percent.clone(),
                    down: percent,
                    stated: false,
                }
            }
        }
    }

    /// d(symbol)/d(ln `of`): the symbol itself where both are the same, half of it where it is the
    /// mutual inductance of a coil `of`.
    #[must_use]
    pub fn follows(&self, of: Symbol) -> Vec<(Symbol, Rational)> {
        let mut list: Vec<(Symbol, Rational)> = Vec::new();
        if let Some(value) = self.value(of) {
            list.push((of, value.clone()));
        }
        let half = Rational::new(Integer::one(), Integer::from(2)).unwrap_or_else(Rational::zero);
        for coupling in self.network.couplings() {
            let Strength::Factor(k) = &coupling.strength else {
                continue;
            };
            let name = format!("M_{}", coupling.name);
            let Some(mutual) = self.network.symbols().find(&name) else {
                continue;
            };
            let Some(value) = self.value(mutual) else {
                continue;
            };
            let coil = |id| self.network.element(id).value() == Some(&Value::Symbol(of));
            let mut share = Rational::zero();
            for id in [coupling.first, coupling.second] {
                if coil(id) {
                    share = &share + &half;
                }
            }
            if *k == Value::Symbol(of) {
                share = &share + &Rational::one();
            }
            if !share.is_zero() {
                list.push((mutual, value * &share));
            }
        }
        list
    }
}

/// Largest relative deviations from a nominal.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Spread {
    /// Upwards, ≥ 0.
    pub up: Rational,
    /// Downwards, ≥ 0.
    pub down: Rational,
    /// Whether the file states it; else it is the default of 1 %.
    pub stated: bool,
}

/// √value to [`BITS`] bits; exact for squares of short numbers.
fn root(value: &Rational) -> Rational {
    let exact = value
        .numerator()
        .square_root()
        .zip(value.denominator().square_root());
    if let Some((above, below)) = exact
        && let Some(root) = Rational::new(above, below)
    {
        return root;
    }
    Big::from_rational(value, 2 * BITS).sqrt(BITS).to_rational()
}

/// π to some [`BITS`] bits (Machin 1706: π/4 = 4·arctan 1/5 − arctan 1/239).
fn pi() -> Rational {
    let scale = Integer::from(2).pow(u32::try_from(BITS).unwrap_or(512) + 32);
    let arctan_of_inverse = |number: i64| {
        let square = Integer::from(number * number);
        let mut power = scale.div_floor(&Integer::from(number));
        let mut sum = Integer::zero();
        let mut odd = 1_i64;
        while !power.is_zero() {
            let term = power.div_floor(&Integer::from(odd));
            sum = if odd % 4 == 1 {
                &sum + &term
            } else {
                &sum - &term
            };
            power = power.div_floor(&square);
            odd += 2;
        }
        sum
    };
    let quarter = &(&arctan_of_inverse(5) * &Integer::from(4)) - &arctan_of_inverse(239);
    Rational::new(&quarter * &Integer::from(4), scale).unwrap_or_else(Rational::zero)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn pi_has_its_digits() {
        // First 50 digits of π, common knowledge (OEIS A000796).
        let digits = "314159265358979323846264338327950288419716939937510";
        let scaled = pi() * Rational::from(Integer::from(10).pow(50));
        let whole = scaled.numerator().div_floor(scaled.denominator());
        assert_eq!(whole.to_string(), digits);
    }

    #[test]
    fn roots_of_squares_are_exact() {
        let nine_fourths = Rational::new(Integer::from(9), Integer::from(4)).expect("a number");
        let three_halves = Rational::new(Integer::from(3), Integer::from(2)).expect("a number");
        assert_eq!(root(&nine_fourths), three_halves);
        let two = root(&Rational::from(2_i64));
        let square = Big::from_rational(&(&two * &two), 300);
        assert!((square.to_f64() - 2.0).abs() < 1e-15);
    }
}
