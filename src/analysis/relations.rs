//! Relations put in: the value of every symbol over the independent ones.

use std::collections::{BTreeMap, BTreeSet};

use crate::algebra::{Fraction, Symbol, SymbolTable};
use crate::budget::{Budget, Exceeded};
use crate::network::{Network, RelationId};

/// The value of each symbol that a relation sets, over symbols that none sets.
#[derive(Clone, Debug, Default)]
pub(crate) struct Substitution {
    values: BTreeMap<Symbol, Fraction>,
    /// Relations whose denominators vanish identically under the others.
    pub(crate) undefined: Vec<RelationId>,
}

impl Substitution {
    /// All relations of the network.
    pub(crate) fn new(network: &Network, budget: &Budget) -> Result<Self, Exceeded> {
        let mut substitution = Self::default();
        for id in resolution_order(network) {
            for (symbol, value) in &network.relation(id).sets {
                match substitution.apply(value, budget)? {
                    Some(resolved) => {
                        substitution.values.insert(*symbol, resolved);
                    }
                    None => substitution.undefined.push(id),
                }
            }
        }
        Ok(substitution)
    }

    /// Every relation released: a relation with s keeps its form over fresh copies of its parameters.
    pub(crate) fn released(
        network: &Network,
        table: &mut SymbolTable,
        copies: &mut BTreeMap<Symbol, (RelationId, Symbol)>,
        budget: &Budget,
    ) -> Result<Self, Exceeded> {
        let mut substitution = Self::default();
        for (id, relation) in network.relations() {
            if !relation.has_s() {
                continue;
            }
            let mut own: BTreeMap<Symbol, Symbol> = BTreeMap::new();
            for (symbol, value) in &relation.sets {
                for parameter in value.symbols() {
                    if parameter == Symbol::S || parameter == Symbol::PI {
                        continue;
                    }
                    own.entry(parameter).or_insert_with(|| {
                        let name = table.name(parameter).to_owned();
                        let copy = table.fresh(&name);
                        copies.insert(copy, (id, parameter));
                        copy
                    });
                }
                let renamed = value.substitute(
                    &|found| own.get(&found).map(|copy| Fraction::symbol(*copy)),
                    budget,
                )?;
                if let Some(renamed) = renamed {
                    substitution.values.insert(*symbol, renamed);
                }
            }
        }
        Ok(substitution)
    }

    /// The value of a symbol; itself when no relation sets it.
    pub(crate) fn value(&self, symbol: Symbol) -> Fraction {
        self.values
            .get(&symbol)
            .cloned()
            .unwrap_or_else(|| Fraction::symbol(symbol))
    }

    /// Puts values in for independent symbols, everywhere.
    pub(crate) fn extend(
        &mut self,
        value: &dyn Fn(Symbol) -> Option<Fraction>,
        symbols: impl Iterator<Item = Symbol>,
        budget: &Budget,
    ) -> Result<(), Exceeded> {
        for found in self.values.values_mut() {
            if let Some(changed) = found.substitute(value, budget)? {
                *found = changed;
            }
        }
        for symbol in symbols {
            if let Some(found) = value(symbol) {
                self.values.insert(symbol, found);
            }
        }
        Ok(())
    }

    /// A fraction with every relation put in; `None` when its denominator becomes zero.
    pub(crate) fn apply(
        &self,
        fraction: &Fraction,
        budget: &Budget,
    ) -> Result<Option<Fraction>, Exceeded> {
        if self.values.is_empty() {
            return Ok(Some(fraction.clone()));
        }
        fraction.substitute(&|symbol| self.values.get(&symbol).cloned(), budget)
    }
}

/// All relations, each after those its right side needs. Iterative: chains may be long.
pub(crate) fn resolution_order(network: &Network) -> Vec<RelationId> {
    let mut order = Vec::with_capacity(network.relations().len());
    let mut seen = BTreeSet::new();
    for (root, _) in network.relations() {
        let mut stack = vec![(root, false)];
        while let Some((id, ready)) = stack.pop() {
            if ready {
                order.push(id);
                continue;
            }
            if !seen.insert(id) {
                continue;
            }
            stack.push((id, true));
            for (_, value) in &network.relation(id).sets {
                for symbol in value.symbols() {
                    if let Some(needed) = network.set_by(symbol)
                        && !seen.contains(&needed)
                    {
                        stack.push((needed, false));
                    }
                }
            }
        }
    }
    order
}
