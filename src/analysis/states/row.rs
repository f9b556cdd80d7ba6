//! Linear forms over the unknowns, the states and the inputs of a network; coefficients free of s.

use std::collections::BTreeMap;

use crate::algebra::Fraction;
use crate::budget::{Budget, Exceeded};

/// What a coefficient stands before. The order is the order of elimination: unknowns first.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) enum Column {
    /// A node voltage or a branch current.
    Unknown(usize),
    /// What keeps a value: one of the dynamic variables.
    State(usize),
    /// s^power times an input.
    Input {
        /// Which input.
        input: usize,
        /// How often it is differentiated.
        power: u32,
    },
}

/// A sum of columns with their coefficients; no coefficient is zero.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub(super) struct Row(pub(super) BTreeMap<Column, Fraction>);

impl Row {
    /// One column alone.
    pub(super) fn one(column: Column) -> Self {
        Self(BTreeMap::from([(column, Fraction::one())]))
    }

    /// The coefficient of a column.
    pub(super) fn get(&self, column: Column) -> Fraction {
        self.0.get(&column).cloned().unwrap_or_else(Fraction::zero)
    }

    /// No column at all.
    pub(super) fn is_empty(&self) -> bool {
        self.0.is_empty()
    }

    /// Adds a multiple of a column.
    pub(super) fn add(
        &mut self,
        column: Column,
        value: &Fraction,
        budget: &Budget,
    ) -> Result<(), Exceeded> {
        if value.is_zero() {
            return Ok(());
        }
        let sum = match self.0.get(&column) {
            Some(found) => found.add(value, budget)?,
            None => value.clone(),
        };
        if sum.is_zero() {
            self.0.remove(&column);
        } else {
            self.0.insert(column, sum);
        }
        Ok(())
    }

    /// self + factor · other
    pub(super) fn add_scaled(
        &mut self,
        other: &Self,
        factor: &Fraction,
        budget: &Budget,
    ) -> Result<(), Exceeded> {
        budget.time()?;
        for (&column, value) in &other.0 {
            self.add(column, &value.mul(factor, budget)?, budget)?;
        }
        Ok(())
    }

    /// factor · self
    pub(super) fn scaled(&self, factor: &Fraction, budget: &Budget) -> Result<Self, Exceeded> {
        let mut row = Self::default();
        row.add_scaled(self, factor, budget)?;
        Ok(row)
    }

    /// A column replaced by what it equals.
    pub(super) fn put(
        &mut self,
        column: Column,
        value: &Self,
        budget: &Budget,
    ) -> Result<(), Exceeded> {
        match self.0.remove(&column) {
            Some(factor) => self.add_scaled(value, &factor, budget),
            None => Ok(()),
        }
    }

    /// Takes one column out of `self = 0` and gives what it equals.
    pub(super) fn solved_for(mut self, column: Column, budget: &Budget) -> Result<Self, Exceeded> {
        let own = self.0.remove(&column).unwrap_or_else(Fraction::zero);
        match own.neg().recip() {
            Some(factor) => self.scaled(&factor, budget),
            None => Ok(self),
        }
    }

    /// s · self, where `rates` are s times the states.
    pub(super) fn times_s(&self, rates: &[Self], budget: &Budget) -> Result<Self, Exceeded> {
        let mut product = Self::default();
        for (&column, value) in &self.0 {
            match column {
                Column::State(state) => product.add_scaled(&rates[state], value, budget)?,
                Column::Input { input, power } => {
                    let raised = Column::Input {
                        input,
                        power: power + 1,
                    };
                    product.add(raised, value, budget)?;
                }
                Column::Unknown(_) => product.add(column, value, budget)?,
            }
        }
        Ok(product)
    }

    /// The unknown that is best eliminated: a number before it, or the shortest coefficient.
    pub(super) fn simplest_unknown(&self) -> Option<Column> {
        self.0
            .iter()
            .filter(|(column, _)| matches!(column, Column::Unknown(_)))
            .min_by_key(|(column, value)| {
                (
                    value.numerator().len() + value.denominator().len(),
                    value.symbols().len(),
                    **column,
                )
            })
            .map(|(column, _)| *column)
    }

    /// The last of its states.
    pub(super) fn last_state(&self) -> Option<usize> {
        self.0.keys().rev().find_map(|column| match column {
            Column::State(state) => Some(*state),
            _ => None,
        })
    }

    /// Number of unknowns, and terms in all: how costly it is as a pivot row.
    pub(super) fn cost(&self) -> Option<(usize, usize)> {
        let unknowns = self
            .0
            .keys()
            .filter(|column| matches!(column, Column::Unknown(_)))
            .count();
        let terms = self
            .0
            .values()
            .map(|it| it.numerator().len() + it.denominator().len());
        (unknowns > 0).then(|| (unknowns, terms.sum()))
    }
}
