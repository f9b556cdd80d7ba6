//! From `Σ s^k · row_k = 0` to `s·w = F·w + B(s)·u`, `x = X·w + Y(s)·u`, by exact elimination.
//!
//! An equation of degree m keeps m values: `w_m = row_m`, `s·w_k = w_(k−1) − row_(k−1)`, `w_0 = 0`.
//! The unknowns are eliminated first. Where an equation between states and inputs alone is left, one
//! state depends on the others; its own rate then is a new equation (Luenberger's shuffle, 1977, for
//! singular systems). Every step takes one state away, so that at the end there are as many states as
//! the determinant has degrees.

use std::collections::BTreeMap;

use crate::algebra::Fraction;
use crate::analysis::states::row::{Column, Row};
use crate::analysis::states::tableau::Powers;
use crate::budget::{Budget, Exceeded};

/// Unknowns and rates over the states that are left.
pub(super) struct Reduced {
    /// Each unknown over states and inputs.
    pub(super) unknowns: BTreeMap<usize, Row>,
    /// Each state over the independent ones; an independent one is itself.
    pub(super) states: Vec<Row>,
    /// s times each independent state.
    pub(super) rates: BTreeMap<usize, Row>,
}

/// The equation a state belongs to, and which of its states it is, 1 …
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub(super) struct Origin {
    /// Index of the equation.
    pub(super) equation: usize,
    /// Number within the equation.
    pub(super) number: usize,
}

/// The states of equations, those of `first` before the others.
pub(super) fn origins(equations: &[Powers], rank: &dyn Fn(usize) -> u8) -> Vec<Origin> {
    let mut list: Vec<Origin> = Vec::new();
    for (equation, powers) in equations.iter().enumerate() {
        list.extend((1..powers.len()).map(|number| Origin { equation, number }));
    }
    list.sort_by_key(|origin| (rank(origin.equation), *origin));
    list
}

struct Reduction<'a> {
    budget: &'a Budget,
    waiting: Vec<Row>,
    unknowns: BTreeMap<usize, Row>,
    states: Vec<Row>,
    rates: BTreeMap<usize, Row>,
}

/// Eliminates; `None` when the equations have no unique solution.
pub(super) fn reduce(
    equations: &[Powers],
    origins: &[Origin],
    budget: &Budget,
) -> Result<Option<Reduced>, Exceeded> {
    let mut reduction = Reduction {
        budget,
        waiting: Vec::new(),
        unknowns: BTreeMap::new(),
        states: (0..origins.len())
            .map(|it| Row::one(Column::State(it)))
            .collect(),
        rates: BTreeMap::new(),
    };
    let place: BTreeMap<Origin, usize> = origins
        .iter()
        .enumerate()
        .map(|(index, it)| (*it, index))
        .collect();
    let minus = Fraction::one().neg();
    for (equation, powers) in equations.iter().enumerate() {
        let state = |number: usize| place.get(&Origin { equation, number }).copied();
        let top = powers.len() - 1;
        let mut algebraic = powers[top].clone();
        if let Some(own) = state(top) {
            algebraic.add(Column::State(own), &minus, budget)?;
        }
        reduction.waiting.push(algebraic);
        for number in 1..=top {
            let mut rate = powers[number - 1].scaled(&minus, budget)?;
            if let Some(before) = state(number - 1) {
                rate.add(Column::State(before), &Fraction::one(), budget)?;
            }
            if let Some(own) = state(number) {
                reduction.rates.insert(own, rate);
            }
        }
    }
    if !reduction.run()? {
        return Ok(None);
    }
    Ok(Some(Reduced {
        unknowns: reduction.unknowns,
        states: reduction.states,
        rates: reduction.rates,
    }))
}

impl Reduction<'_> {
    fn run(&mut self) -> Result<bool, Exceeded> {
        loop {
            self.budget.time()?;
            let shortest = (0..self.waiting.len())
                .filter_map(|index| Some((self.waiting[index].cost()?, index)))
                .min();
            if let Some((_, index)) = shortest {
                let row = self.waiting.swap_remove(index);
                if let Some(column) = row.simplest_unknown() {
                    let value = row.solved_for(column, self.budget)?;
                    self.put(column, &value)?;
                    if let Column::Unknown(unknown) = column {
                        self.unknowns.insert(unknown, value);
                    }
                }
                continue;
            }
            let Some(row) = self.waiting.pop() else {
                return Ok(true);
            };
            let Some(state) = row.last_state() else {
                return Ok(false);
            };
            self.remove(state, row)?;
        }
    }

    /// Puts a value in everywhere.
    fn put(&mut self, column: Column, value: &Row) -> Result<(), Exceeded> {
        let rows = self
            .waiting
            .iter_mut()
            .chain(self.unknowns.values_mut())
            .chain(self.rates.values_mut())
            .chain(&mut self.states);
        for row in rows {
            row.put(column, value, self.budget)?;
        }
        Ok(())
    }

    /// A state that depends on others leaves; what is left of its rate is a new equation.
    fn remove(&mut self, state: usize, row: Row) -> Result<(), Exceeded> {
        let value = row.solved_for(Column::State(state), self.budget)?;
        self.put(Column::State(state), &value)?;
        let Some(rate) = self.rates.remove(&state) else {
            return Ok(());
        };
        let mut equation = rate.scaled(&Fraction::one().neg(), self.budget)?;
        for (&column, factor) in &value.0 {
            match column {
                Column::State(other) => {
                    if let Some(rate) = self.rates.get(&other) {
                        equation.add_scaled(rate, factor, self.budget)?;
                    }
                }
                Column::Input { input, power } => {
                    let raised = Column::Input {
                        input,
                        power: power + 1,
                    };
                    equation.add(raised, factor, self.budget)?;
                }
                Column::Unknown(_) => {}
            }
        }
        self.waiting.push(equation);
        Ok(())
    }
}
