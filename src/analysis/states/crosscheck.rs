//! The state equations against the nodal equations of the witness and the natural polynomial, at
//! random points.

use std::collections::BTreeMap;

use crate::algebra::Fraction;
use crate::analysis::equations::point::{Numbers, random};
use crate::analysis::equations::{At, Residue, solve};
use crate::analysis::solve::{Setting, natural_determinant};
use crate::analysis::states::row::{Column, Row};
use crate::analysis::states::tableau::Acts;
use crate::analysis::states::{Found, Group};
use crate::analysis::witness;
use crate::budget::Exceeded;
use crate::network::Ask;

/// Points that are compared.
const POINTS: u32 = 8;
/// Points that may be unlucky.
const ATTEMPTS: u64 = 32;

type Sparse = Vec<BTreeMap<usize, Residue>>;

/// s·I − A at a point.
fn pencil(found: &Found, numbers: &Numbers<'_>) -> Option<Sparse> {
    let mut rows = vec![BTreeMap::new(); found.chosen.rates.len()];
    for (index, (row, rate)) in rows.iter_mut().zip(&found.chosen.rates).enumerate() {
        row.insert(index, numbers.s());
        for (&column, value) in &rate.0 {
            if let Column::State(state) = column {
                let value = numbers.formula(value, &|_| None)?;
                let sum = row.get(&state).copied().unwrap_or(Residue::ZERO).sub(value);
                row.insert(state, sum);
            }
        }
        row.retain(|_, value| !value.is_zero());
    }
    Some(rows)
}

/// What one input alone makes of a row.
fn driven(row: &Row, input: usize, numbers: &Numbers<'_>) -> Option<Residue> {
    let mut sum = Residue::ZERO;
    for (&column, value) in &row.0 {
        if let Column::Input { input: own, power } = column
            && own == input
        {
            let value = numbers.formula(value, &|_| None)?;
            sum = sum.add(value.mul(numbers.s().power(u64::from(power))));
        }
    }
    Some(sum)
}

fn response(found: &Found, output: usize, input: usize, numbers: &Numbers<'_>) -> Option<Residue> {
    let rows = pencil(found, numbers)?;
    let right: Option<Vec<Residue>> = found
        .chosen
        .rates
        .iter()
        .map(|rate| driven(rate, input, numbers))
        .collect();
    let row = &found.outputs[output];
    let mut sum = driven(row, input, numbers)?;
    if rows.is_empty() {
        return Some(sum);
    }
    let solution = solve(&rows, &[right?]);
    let states = solution.solutions.first()?;
    for (&column, value) in &row.0 {
        if let Column::State(state) = column {
            let value = numbers.formula(value, &|_| None)?;
            sum = sum.add(value.mul(states[state]));
        }
    }
    Some(sum)
}

/// Compares every output with the nodal equations; gives the number of points.
pub(super) fn agree(setting: &Setting<'_>, group: &Group, found: &Found) -> Result<u32, String> {
    let network = setting.network;
    let mut fewest = POINTS;
    for (output, &question) in group.questions.iter().enumerate() {
        let asked = &network.questions()[question];
        let acts = match &asked.ask {
            Ask::Transfer { drive, .. } => Acts::Drive(*drive),
            Ask::Impedance(port) => Acts::CurrentInto(*port),
            Ask::Admittance(port) => Acts::VoltageAcross(*port),
            _ => continue,
        };
        let Some(input) = found.frame.acts.iter().position(|it| *it == acts) else {
            continue;
        };
        let mut agreed = 0;
        for attempt in 0..ATTEMPTS {
            if agreed == POINTS {
                break;
            }
            let seed = 9_001 + attempt;
            let s = random(seed, u64::MAX);
            let Some(numbers) = Numbers::related(network, setting.couplings, seed, s) else {
                continue;
            };
            let Some(solved) = witness::value(network, question, &numbers, 0) else {
                continue;
            };
            let Some(own) = response(found, output, input, &numbers) else {
                continue;
            };
            if solved != own {
                return Err(format!(
                    "the state equations of {} and the nodal equations differ at point {attempt}",
                    asked.name
                ));
            }
            agreed += 1;
        }
        if agreed == 0 {
            return Err(format!(
                "the state equations of {} could not be compared at any point",
                asked.name
            ));
        }
        fewest = fewest.min(agreed);
    }
    Ok(if group.questions.is_empty() {
        0
    } else {
        fewest
    })
}

/// Whether det(sI − A) is the natural polynomial up to a factor free of s, at one more value of s than
/// the degree has; true where that polynomial is too long to be written.
pub(super) fn natural(setting: &Setting<'_>, found: &Found) -> Result<bool, Exceeded> {
    let budget = setting.expansion;
    let expansion = Setting { budget, ..*setting };
    let Ok(Some(natural)) = natural_determinant(&expansion) else {
        return Ok(true);
    };
    let natural = Fraction::from(natural);
    let order = found.chosen.rates.len();
    let mut ratio: Option<Residue> = None;
    for place in 0..order as u64 + 2 {
        let s = random(77, place);
        let network = setting.network;
        let Some(numbers) = Numbers::related(network, setting.couplings, 9_101, s) else {
            continue;
        };
        let Some(rows) = pencil(found, &numbers) else {
            continue;
        };
        let own = if rows.is_empty() {
            Residue::ONE
        } else {
            solve(&rows, &[]).determinant
        };
        let Some(value) = numbers.formula(&natural, &|_| None) else {
            continue;
        };
        let Some(inverse) = own.inverse() else {
            continue;
        };
        let found = value.mul(inverse);
        if ratio.is_some_and(|known| known != found) {
            return Ok(false);
        }
        ratio = Some(found);
    }
    Ok(true)
}
