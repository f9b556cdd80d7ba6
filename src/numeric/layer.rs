//! The parts at their nominal values, one of them with a relative deviation left open: N and D before
//! anything cancels, as polynomials in s and the deviation.

use std::collections::BTreeMap;

use crate::algebra::{Fraction, Polynomial, PolynomialRing, Rational, Symbol, SymbolTable};
use crate::analysis::determinant::Values;
use crate::budget::{Budget, Exceeded};
use crate::network::{Network, Strength};
use crate::numeric::nominal::Nominals;

/// Values of all symbols: numbers, one of them times 1 + deviation.
pub(super) struct Layer<'a> {
    values: BTreeMap<Symbol, Fraction>,
    mutual: Vec<Option<Fraction>>,
    budget: &'a Budget,
}

impl<'a> Layer<'a> {
    /// Every relation without s is released: each value is its nominal number, and `moved` alone is
    /// multiplied by 1 + deviation.
    pub(super) fn new(
        nominals: &Nominals<'_>,
        moved: Symbol,
        deviation: Symbol,
        budget: &'a Budget,
    ) -> Result<Self, Exceeded> {
        let network = nominals.network();
        let one_and = &Polynomial::one() + &Polynomial::symbol(deviation);
        let mut values = BTreeMap::new();
        let number = |symbol: Symbol| -> Result<Option<Fraction>, Exceeded> {
            let Some(value) = nominals.value(symbol) else {
                return Ok(None);
            };
            let value = Fraction::from(value.clone());
            if symbol != moved {
                return Ok(Some(value));
            }
            value
                .mul(&Fraction::from(one_and.clone()), budget)
                .map(Some)
        };
        for facts in network.all_facts() {
            let tied = network.set_by(facts.symbol);
            let relation = tied.map(|id| network.relation(id));
            let Some(relation) = relation.filter(|relation| relation.has_s()) else {
                if let Some(value) = number(facts.symbol)? {
                    values.insert(facts.symbol, value);
                }
                continue;
            };
            let set = relation
                .sets
                .iter()
                .find(|(symbol, _)| *symbol == facts.symbol);
            let Some((_, formula)) = set else { continue };
            let mut parameters = BTreeMap::new();
            for parameter in formula.symbols() {
                if let Some(value) = number(parameter)? {
                    parameters.insert(parameter, value);
                }
            }
            let put_in = formula.substitute(&|symbol| parameters.get(&symbol).cloned(), budget)?;
            if let Some(value) = put_in {
                values.insert(facts.symbol, value);
            }
        }
        values.insert(
            Symbol::PI,
            Fraction::from(
                nominals
                    .value(Symbol::PI)
                    .cloned()
                    .unwrap_or_else(Rational::zero),
            ),
        );
        let mutual = mutuals(network, nominals, moved, deviation, budget)?;
        Ok(Self {
            values,
            mutual,
            budget,
        })
    }
}

/// k·√(L1·L2) of each coupling by factor, to first order in a coil.
fn mutuals(
    network: &Network,
    nominals: &Nominals<'_>,
    moved: Symbol,
    deviation: Symbol,
    budget: &Budget,
) -> Result<Vec<Option<Fraction>>, Exceeded> {
    let follows = nominals.follows(moved);
    let mut list = Vec::new();
    for coupling in network.couplings() {
        let name = format!("M_{}", coupling.name);
        let symbol = match &coupling.strength {
            Strength::Factor(_) => network.symbols().find(&name),
            Strength::Mutual(_) => None,
        };
        let value = symbol.and_then(|symbol| Some((symbol, nominals.value(symbol)?)));
        let Some((symbol, value)) = value else {
            list.push(None);
            continue;
        };
        let slope = follows.iter().find(|(follower, _)| *follower == symbol);
        let slope = slope.map_or_else(Rational::zero, |(_, slope)| slope.clone());
        let moving = Fraction::from(slope).mul(&Fraction::symbol(deviation), budget)?;
        list.push(Some(Fraction::from(value.clone()).add(&moving, budget)?));
    }
    Ok(list)
}

fn pair(fraction: &Fraction) -> (Polynomial, Polynomial) {
    (fraction.numerator().clone(), fraction.denominator().clone())
}

impl Values<PolynomialRing<'_>> for Layer<'_> {
    fn symbol(&self, symbol: Symbol) -> Result<(Polynomial, Polynomial), Exceeded> {
        let value = self.values.get(&symbol).cloned();
        Ok(pair(&value.unwrap_or_else(|| Fraction::symbol(symbol))))
    }

    fn mutual(&self, coupling: usize) -> Result<(Polynomial, Polynomial), Exceeded> {
        let value = self.mutual.get(coupling).cloned().flatten();
        Ok(pair(&value.unwrap_or_else(Fraction::zero)))
    }

    fn s(&self) -> Polynomial {
        Polynomial::symbol(Symbol::S)
    }

    fn polynomial(&self, polynomial: &Polynomial) -> Result<(Polynomial, Polynomial), Exceeded> {
        let fraction = Fraction::from(polynomial.clone());
        let value =
            fraction.substitute(&|symbol| self.values.get(&symbol).cloned(), self.budget)?;
        Ok(pair(&value.unwrap_or_else(Fraction::zero)))
    }
}

/// A symbol for the deviation, beside those of the network.
pub(super) fn deviation(table: &mut SymbolTable) -> Symbol {
    table.fresh("deviation")
}
