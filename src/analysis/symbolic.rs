//! The layer of values that are polynomials: relations put in, or released.

use std::collections::BTreeMap;

use crate::algebra::gcd::gcd;
use crate::algebra::{Fraction, Polynomial, PolynomialRing, Symbol};
use crate::analysis::couplings::Couplings;
use crate::analysis::determinant::Values;
use crate::analysis::relations::Substitution;
use crate::budget::{Budget, Exceeded};
use crate::network::Network;

/// Values as quotients of polynomials.
pub(crate) struct Symbolic<'a> {
    substitution: &'a Substitution,
    couplings: &'a Couplings,
    /// What one relation sets, over one common denominator.
    shared: BTreeMap<Symbol, (Polynomial, Polynomial)>,
    /// A last change of every value: fresh symbols become numbers in structural tests.
    budget: &'a Budget,
}

impl<'a> Symbolic<'a> {
    /// The values of a network under a substitution.
    pub(crate) fn new(
        network: &Network,
        substitution: &'a Substitution,
        couplings: &'a Couplings,
        budget: &'a Budget,
    ) -> Result<Self, Exceeded> {
        let mut shared = BTreeMap::new();
        for (_, relation) in network.relations() {
            if relation.sets.len() < 2 {
                continue;
            }
            let mut common = Polynomial::one();
            for (symbol, _) in &relation.sets {
                let own = substitution.value(*symbol);
                let divisor = gcd(&common, own.denominator(), budget)?;
                let rest = own.denominator().div_exact(&divisor);
                common = common.product(&rest.unwrap_or_else(Polynomial::one), budget)?;
            }
            for (symbol, _) in &relation.sets {
                let own = substitution.value(*symbol);
                let factor = common
                    .div_exact(own.denominator())
                    .unwrap_or_else(Polynomial::one);
                let above = own.numerator().product(&factor, budget)?;
                shared.insert(*symbol, (above, common.clone()));
            }
        }
        Ok(Self {
            substitution,
            couplings,
            shared,
            budget,
        })
    }
}

fn pair(fraction: &Fraction) -> (Polynomial, Polynomial) {
    (fraction.numerator().clone(), fraction.denominator().clone())
}

impl Values<PolynomialRing<'_>> for Symbolic<'_> {
    fn symbol(&self, symbol: Symbol) -> Result<(Polynomial, Polynomial), Exceeded> {
        if let Some(found) = self.shared.get(&symbol) {
            return Ok(found.clone());
        }
        Ok(pair(&self.substitution.value(symbol)))
    }

    fn mutual(&self, coupling: usize) -> Result<(Polynomial, Polynomial), Exceeded> {
        Ok(self
            .couplings
            .mutual(coupling)
            .map_or_else(|| (Polynomial::zero(), Polynomial::one()), pair))
    }

    fn s(&self) -> Polynomial {
        Polynomial::symbol(Symbol::S)
    }

    fn polynomial(&self, polynomial: &Polynomial) -> Result<(Polynomial, Polynomial), Exceeded> {
        let fraction = Fraction::from(polynomial.clone());
        let value = self.substitution.apply(&fraction, self.budget)?;
        Ok(pair(&value.unwrap_or_else(Fraction::zero)))
    }
}
