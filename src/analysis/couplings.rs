//! Couplings by their factor: M = k·√(L1·L2) as polynomials in the roots of the inductances.
//!
//! With r_i² = L_i the mutual inductance k·r_i·r_j is a polynomial, and the ring of polynomials in r
//! and k has unique factors (that of L, k and M with M² = k²·L1·L2 has not). At the end every
//! monomial is written with L_i, k and at most one M of each coupling.

use std::collections::BTreeMap;

use crate::algebra::{Fraction, Integer, Monomial, Polynomial, Symbol, SymbolTable};
use crate::analysis::relations::Substitution;
use crate::budget::{Budget, Exceeded};
use crate::network::{Network, Strength, Value};

/// The mutual inductances of a network and how to write them.
#[derive(Clone, Debug, Default)]
pub(crate) struct Couplings {
    /// Root symbol of each inductance that needs one.
    roots: BTreeMap<Symbol, Symbol>,
    /// Mutual inductance of each coupling given by its factor.
    mutual: Vec<Option<Fraction>>,
    /// How odd products are written.
    pairs: Vec<Pair>,
}

/// A coupling of two base inductances: number · k · r1 · r2 is written M.
#[derive(Clone, Debug)]
struct Pair {
    number: Fraction,
    factor: Option<Symbol>,
    first: Symbol,
    second: Symbol,
    name: Symbol,
}

/// A coupling whose mutual inductance is not a rational function of the values.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct Irrational {
    /// Index of the coupling.
    pub(crate) coupling: usize,
}

impl Couplings {
    /// Roots where they are needed; puts r² for L into the substitution.
    pub(crate) fn new(
        network: &Network,
        substitution: &mut Substitution,
        table: &mut SymbolTable,
        budget: &Budget,
    ) -> Result<Result<Self, Irrational>, Exceeded> {
        let mut couplings = Self::default();
        let by_factor = network
            .couplings()
            .iter()
            .any(|coupling| matches!(coupling.strength, Strength::Factor(_)));
        if !by_factor {
            couplings.mutual = vec![None; network.couplings().len()];
            return Ok(Ok(couplings));
        }
        couplings.find_roots(network, substitution, table, budget)?;
        for (index, coupling) in network.couplings().iter().enumerate() {
            let Strength::Factor(k) = &coupling.strength else {
                couplings.mutual.push(None);
                continue;
            };
            let product = product(network, substitution, index, budget)?;
            let root = square_root(product.numerator()).zip(square_root(product.denominator()));
            let Some((above, below)) = root else {
                return Ok(Err(Irrational { coupling: index }));
            };
            let k = value(substitution, k);
            let Some(root) = Fraction::new(above, below, budget)? else {
                return Ok(Err(Irrational { coupling: index }));
            };
            couplings.add_pair(&coupling.name, &k, &root, table);
            couplings.mutual.push(Some(k.mul(&root, budget)?));
        }
        Ok(Ok(couplings))
    }

    fn find_roots(
        &mut self,
        network: &Network,
        substitution: &mut Substitution,
        table: &mut SymbolTable,
        budget: &Budget,
    ) -> Result<(), Exceeded> {
        for (index, coupling) in network.couplings().iter().enumerate() {
            if !matches!(coupling.strength, Strength::Factor(_)) {
                continue;
            }
            let product = product(network, substitution, index, budget)?;
            for side in [product.numerator(), product.denominator()] {
                for (symbol, exponent) in side.monomial_content().factors() {
                    if exponent % 2 == 1 && !self.roots.values().any(|root| *root == symbol) {
                        let root = table.fresh(&format!("r_{}", table.name(symbol).to_owned()));
                        self.roots.insert(symbol, root);
                    }
                }
            }
            let roots = &self.roots;
            substitution.extend(
                &|symbol| {
                    let root = Polynomial::symbol(*roots.get(&symbol)?);
                    Some(Fraction::from(&root * &root))
                },
                roots.keys().copied(),
                budget,
            )?;
        }
        Ok(())
    }

    /// Remembers how k·r1·r2 is written, where the coils are independent symbols.
    fn add_pair(&mut self, name: &str, k: &Fraction, root: &Fraction, table: &mut SymbolTable) {
        let Some(root) = root.as_polynomial() else {
            return;
        };
        let [(monomial, one)] = root.terms() else {
            return;
        };
        let roots: Vec<(Symbol, u32)> = monomial.factors().collect();
        let [(first, 1), (second, 1)] = roots.as_slice() else {
            return;
        };
        let is_root = |symbol: &Symbol| self.roots.values().any(|root| root == symbol);
        if !one.is_one() || !is_root(first) || !is_root(second) {
            return;
        }
        let (number, factor) = match (k.as_rational(), k.as_symbol()) {
            (Some(number), _) if !number.is_zero() => (Fraction::from(number), None),
            (_, Some(symbol)) => (Fraction::one(), Some(symbol)),
            _ => return,
        };
        self.pairs.push(Pair {
            number,
            factor,
            first: *first,
            second: *second,
            name: table.intern(&format!("M_{name}")),
        });
    }

    /// Root symbol of each inductance that has one.
    pub(crate) fn roots(&self) -> &BTreeMap<Symbol, Symbol> {
        &self.roots
    }

    /// M of a coupling given by its factor.
    pub(crate) fn mutual(&self, index: usize) -> Option<&Fraction> {
        self.mutual.get(index)?.as_ref()
    }

    /// What M_T stands for inside expressions of the file.
    pub(crate) fn expression(&self, symbol: Symbol) -> Option<Fraction> {
        let pair = self.pairs.iter().find(|pair| pair.name == symbol)?;
        let mut monomial = Monomial::symbol(pair.first).mul(&Monomial::symbol(pair.second));
        if let Some(factor) = pair.factor {
            monomial = monomial.mul(&Monomial::symbol(factor));
        }
        let product = Fraction::from(Polynomial::monomial(Integer::one(), monomial));
        product.mul(&pair.number, &Budget::unlimited()).ok()
    }

    /// Numerator and denominator written without roots.
    pub(crate) fn written(
        &self,
        numerator: &Polynomial,
        denominator: &Polynomial,
    ) -> (Polynomial, Polynomial) {
        if self.roots.is_empty() {
            return (numerator.clone(), denominator.clone());
        }
        let mut balance = Monomial::one();
        for &root in self.roots.values() {
            let odd = |monomial: &Monomial| self.parity(monomial, root);
            let mut terms = numerator.terms().iter().chain(denominator.terms());
            if terms.all(|(monomial, _)| odd(monomial)) {
                balance = balance.mul(&Monomial::symbol(root));
            }
        }
        let mut scale = Integer::one();
        for pair in &self.pairs {
            scale = &scale * &pair.number.numerator().as_constant().unwrap_or_default();
        }
        let write = |polynomial: &Polynomial| {
            Polynomial::from_terms(polynomial.terms().iter().map(|(monomial, coefficient)| {
                let (monomial, number) = self.rewrite(&monomial.mul(&balance), &scale);
                (monomial, coefficient * &number)
            }))
        };
        (write(numerator), write(denominator))
    }

    /// Parity of r → −r together with the factors of its couplings.
    fn parity(&self, monomial: &Monomial, root: Symbol) -> bool {
        let mut exponent = monomial.exponent(root);
        for pair in &self.pairs {
            if pair.first == root || pair.second == root {
                exponent += pair.factor.map_or(0, |factor| monomial.exponent(factor));
            }
        }
        exponent % 2 == 1
    }

    fn rewrite(&self, monomial: &Monomial, scale: &Integer) -> (Monomial, Integer) {
        let mut rest = monomial.clone();
        let mut number = scale.clone();
        for pair in &self.pairs {
            let both = Monomial::symbol(pair.first).mul(&Monomial::symbol(pair.second));
            let (odd, taken) = match pair.factor {
                Some(factor) => (
                    rest.exponent(factor) % 2 == 1,
                    both.mul(&Monomial::symbol(factor)),
                ),
                None => (
                    rest.exponent(pair.first) % 2 == 1 && rest.exponent(pair.second) % 2 == 1,
                    both,
                ),
            };
            if !odd {
                continue;
            }
            if let Some(left) = rest.div(&taken) {
                rest = left.mul(&Monomial::symbol(pair.name));
                // k·r1·r2 = M, number·r1·r2 = M.
                let above = pair.number.denominator().as_constant().unwrap_or_default();
                let below = pair.number.numerator().as_constant().unwrap_or_default();
                number = (&number * &above).div_exact(&below).unwrap_or(number);
            }
        }
        for (&inductance, &root) in &self.roots {
            let (without, exponent) = rest.without(root);
            rest = without
                .mul(&Monomial::power(inductance, exponent / 2))
                .mul(&Monomial::power(root, exponent % 2));
        }
        (rest, number)
    }
}

fn value(substitution: &Substitution, value: &Value) -> Fraction {
    match value {
        Value::Symbol(symbol) => substitution.value(*symbol),
        Value::Number(number) => Fraction::from(number.clone()),
    }
}

fn product(
    network: &Network,
    substitution: &Substitution,
    index: usize,
    budget: &Budget,
) -> Result<Fraction, Exceeded> {
    let coupling = &network.couplings()[index];
    let coil = |id| {
        network
            .element(id)
            .value()
            .map_or_else(Fraction::zero, |found| value(substitution, found))
    };
    coil(coupling.first).mul(&coil(coupling.second), budget)
}

/// The root of a perfect square, leading coefficient positive.
pub(crate) fn square_root(square: &Polynomial) -> Option<Polynomial> {
    let Some((monomial, coefficient)) = square.terms().first() else {
        return Some(Polynomial::zero());
    };
    let mut half = Monomial::one();
    for (symbol, exponent) in monomial.factors() {
        if exponent % 2 == 1 {
            return None;
        }
        half = half.mul(&Monomial::power(symbol, exponent / 2));
    }
    let lead = Polynomial::monomial(coefficient.square_root()?, half);
    let twice = lead.scale(&Integer::from(2));
    let mut root = lead.clone();
    let mut rest = square - &(&lead * &lead);
    while let Some((monomial, coefficient)) = rest.terms().first() {
        let top = Polynomial::monomial(coefficient.clone(), monomial.clone());
        let term = top.div_exact(&twice)?;
        let doubled = &root.scale(&Integer::from(2)) + &term;
        rest = &rest - &(&doubled * &term);
        root = &root + &term;
        if root.len() > square.len() {
            return None;
        }
    }
    Some(root)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn squares_have_roots_and_others_none() {
        let mut table = SymbolTable::new();
        let a = Polynomial::symbol(table.intern("a"));
        let b = Polynomial::symbol(table.intern("b"));
        let root = &(&a - &b.scale(&Integer::from(3))) + &Polynomial::one();
        let found = square_root(&(&root * &root)).expect("a square");
        assert!(found == root || found == -root);
        assert!(square_root(&(&a * &b)).is_none());
        assert!(square_root(&(&(&a * &a) + &b)).is_none());
        assert!(square_root(&Polynomial::constant(2)).is_none());
        assert_eq!(
            square_root(&Polynomial::constant(9)),
            Some(Polynomial::constant(3))
        );
    }
}
