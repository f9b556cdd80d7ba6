//! Which voltages and currents are the states.

use std::collections::BTreeMap;

use crate::algebra::{Fraction, Symbol};
use crate::analysis::report::states::{Inside, State};
use crate::analysis::states::reduction::{Origin, Reduced};
use crate::analysis::states::row::{Column, Row};
use crate::analysis::states::tableau::{Tableau, voltage};
use crate::budget::{Budget, Exceeded};
use crate::network::{ElementId, Kind, Network};

/// Everything over the chosen states.
pub(super) struct Chosen {
    /// The states.
    pub(super) vector: Vec<State>,
    /// s times each state.
    pub(super) rates: Vec<Row>,
    /// Each unknown.
    pub(super) unknowns: BTreeMap<usize, Row>,
    /// Capacitor voltages and inductor currents that depend on the states.
    pub(super) dependent: Vec<(State, Row)>,
}

/// A quantity that may be a state, over unknowns or over a state of the reduction.
struct Candidate {
    state: State,
    row: Row,
}

/// Candidates in order, each taken where it does not depend on those before it.
pub(super) fn choose(
    network: &Network,
    tableau: &Tableau,
    origins: &[Origin],
    reduced: Reduced,
    budget: &Budget,
) -> Result<Chosen, Exceeded> {
    let mut taken: Vec<(State, Row)> = Vec::new();
    let mut rest: Vec<(State, Row)> = Vec::new();
    // Each state of the reduction over the chosen ones, as far as it is known.
    let mut solved: BTreeMap<usize, Row> = BTreeMap::new();
    for (place, origin) in origins.iter().enumerate() {
        let candidate = candidate(network, tableau, origins, place, *origin, budget)?;
        let mut row = put(&candidate.row, &reduced.unknowns, budget)?;
        for (state, value) in reduced.states.iter().enumerate() {
            if value != &Row::one(Column::State(state)) {
                row.put(Column::State(state), value, budget)?;
            }
        }
        let over_old = row.clone();
        // Old states stand as unknowns here, chosen ones as states.
        let mut equation = Row::default();
        for (&column, value) in &row.0 {
            match column {
                Column::State(old) => equation.add(Column::Unknown(old), value, budget)?,
                other => equation.add(other, value, budget)?,
            }
        }
        for (old, value) in &solved {
            equation.put(Column::Unknown(*old), value, budget)?;
        }
        let Some(pivot) = equation.simplest_unknown() else {
            rest.push((candidate.state, over_old));
            continue;
        };
        let own = Column::State(taken.len());
        equation.add(own, &Fraction::one().neg(), budget)?;
        let value = equation.solved_for(pivot, budget)?;
        for known in solved.values_mut() {
            known.put(pivot, &value, budget)?;
        }
        if let Column::Unknown(old) = pivot {
            solved.insert(old, value);
        }
        taken.push((candidate.state, over_old));
    }
    let renamed = |row: &Row| -> Result<Row, Exceeded> {
        let mut new = Row::default();
        for (&column, factor) in &row.0 {
            match column {
                Column::State(old) => match solved.get(&old) {
                    Some(value) => new.add_scaled(value, factor, budget)?,
                    None => new.add(column, factor, budget)?,
                },
                other => new.add(other, factor, budget)?,
            }
        }
        Ok(new)
    };
    let size = reduced.states.len();
    let mut old_rates = vec![Row::default(); size];
    for (&state, rate) in &reduced.rates {
        old_rates[state] = rate.clone();
    }
    let rates = taken
        .iter()
        .map(|(_, row)| renamed(&row.times_s(&old_rates, budget)?))
        .collect::<Result<_, _>>()?;
    let unknowns = reduced
        .unknowns
        .iter()
        .map(|(unknown, row)| Ok((*unknown, renamed(row)?)))
        .collect::<Result<_, Exceeded>>()?;
    let dependent = rest
        .iter()
        .filter(|(state, _)| !matches!(state, State::Inside { .. }))
        .map(|(state, row)| Ok((*state, renamed(row)?)))
        .collect::<Result<_, Exceeded>>()?;
    Ok(Chosen {
        vector: taken.iter().map(|(state, _)| *state).collect(),
        rates,
        unknowns,
        dependent,
    })
}

impl Chosen {
    /// A row over unknowns and inputs, over states and inputs.
    pub(super) fn put_into(&self, row: &Row, budget: &Budget) -> Result<Row, Exceeded> {
        put(row, &self.unknowns, budget)
    }
}

fn put(row: &Row, unknowns: &BTreeMap<usize, Row>, budget: &Budget) -> Result<Row, Exceeded> {
    let mut result = Row::default();
    for (&column, factor) in &row.0 {
        match column {
            Column::Unknown(unknown) => match unknowns.get(&unknown) {
                Some(value) => result.add_scaled(value, factor, budget)?,
                None => result.add(column, factor, budget)?,
            },
            other => result.add(other, factor, budget)?,
        }
    }
    Ok(result)
}

/// The quantity that stands for a state of the reduction.
fn candidate(
    network: &Network,
    tableau: &Tableau,
    origins: &[Origin],
    place: usize,
    origin: Origin,
    budget: &Budget,
) -> Result<Candidate, Exceeded> {
    let own = Row::one(Column::State(place));
    let Some(element) = tableau.owner[origin.equation] else {
        return Ok(Candidate {
            state: inside(tableau, ElementId::at(0), origin, origins, Inside::Other),
            row: own,
        });
    };
    let powers = &tableau.equations[origin.equation];
    let top = powers.len() - 1;
    let (state, row) = match &network.element(element).kind {
        Kind::Capacitor(port, _) if top == 1 => (State::Voltage(element), voltage(*port)),
        Kind::Inductor(..) if top == 1 => {
            let current = tableau.current[&element];
            (State::Current(element), Row::one(Column::Unknown(current)))
        }
        kind => {
            let value = |value| inside(tableau, element, origin, origins, value);
            if origin.number < top {
                return Ok(Candidate {
                    state: value(Inside::Other),
                    row: own,
                });
            }
            let port = match kind {
                Kind::Amplifier { output, .. } => Some(*output),
                _ => network.element(element).port(),
            };
            let current = tableau.current.get(&element);
            let read = port.map(voltage);
            let flow = current.map(|it| Row::one(Column::Unknown(*it)));
            if is_multiple(&powers[top], read.as_ref(), budget)? {
                (value(Inside::Voltage), read.unwrap_or(own))
            } else if is_multiple(&powers[top], flow.as_ref(), budget)? {
                (value(Inside::Current), flow.unwrap_or(own))
            } else {
                (value(Inside::Other), own)
            }
        }
    };
    Ok(Candidate { state, row })
}

/// Numbered within the part.
fn inside(
    tableau: &Tableau,
    element: ElementId,
    origin: Origin,
    origins: &[Origin],
    value: Inside,
) -> State {
    let owner = tableau.owner[origin.equation];
    let own = || {
        origins
            .iter()
            .filter(|it| tableau.owner[it.equation] == owner)
    };
    State::Inside {
        element,
        number: 1 + own().filter(|it| **it < origin).count(),
        of: own().count(),
        value,
    }
}

/// Whether a row is another times something free of s.
fn is_multiple(row: &Row, other: Option<&Row>, budget: &Budget) -> Result<bool, Exceeded> {
    let Some(other) = other else {
        return Ok(false);
    };
    let Some((column, value)) = other.0.iter().next() else {
        return Ok(false);
    };
    let Some(inverse) = value.recip() else {
        return Ok(false);
    };
    let factor = row.get(*column).mul(&inverse, budget)?;
    Ok(!factor.is_zero() && !factor.contains(Symbol::S) && other.scaled(&factor, budget)? == *row)
}
