//! What starting values do: the states right after t = 0, and the response to them alone.

use crate::algebra::{Fraction, Symbol};
use crate::analysis::report::states::{Affine, Start, State};
use crate::analysis::states::Writer;
use crate::analysis::states::row::{Column, Row};
use crate::analysis::states::tableau::Acts;
use crate::budget::Exceeded;

/// The findings about starting values.
pub(super) fn start(writer: &Writer<'_>) -> Result<Start, Exceeded> {
    let responses = responses(writer)?;
    let after = after(writer)?;
    Ok(Start { after, responses })
}

/// The stated value behind an input; `None` for sources.
fn stated(writer: &Writer<'_>, input: usize) -> Result<Option<Fraction>, Exceeded> {
    let setting = writer.setting;
    let Acts::Start(index) = writer.found.frame.acts[input] else {
        return Ok(None);
    };
    let value = &setting.network.starts()[index].value;
    let value = setting.rooted.apply(value, setting.budget)?;
    Ok(Some(value.unwrap_or_else(Fraction::zero)))
}

/// What the starting values make of a row, as a polynomial in s.
fn excited(writer: &Writer<'_>, row: &Row) -> Result<Fraction, Exceeded> {
    let budget = writer.setting.budget;
    let mut sum = Fraction::zero();
    for (&column, value) in &row.0 {
        let Column::Input { input, power } = column else {
            continue;
        };
        let Some(stated) = stated(writer, input)? else {
            continue;
        };
        let power = i32::try_from(power).unwrap_or(i32::MAX);
        let Some(power) = Fraction::symbol(Symbol::S).pow(power, budget)? else {
            continue;
        };
        let term = value.mul(&stated, budget)?.mul(&power, budget)?;
        sum = sum.add(&term, budget)?;
    }
    Ok(sum)
}

/// The response of each output to the starting values alone: `(sI − A)·p = b(s)` solved over s.
fn responses(writer: &Writer<'_>) -> Result<Vec<Fraction>, Exceeded> {
    let budget = writer.setting.budget;
    let (rates, outputs) = (&writer.found.chosen.rates, &writer.found.outputs);
    // One column stands for what the starting values add.
    let whole = Column::Input { input: 0, power: 0 };
    let over = |row: &Row| -> Result<Row, Exceeded> {
        let mut result = Row::default();
        for (&column, value) in &row.0 {
            if let Column::State(state) = column {
                result.add(Column::Unknown(state), value, budget)?;
            }
        }
        result.add(whole, &excited(writer, row)?, budget)?;
        Ok(result)
    };
    let mut waiting = Vec::new();
    for (state, rate) in rates.iter().enumerate() {
        let mut row = over(rate)?;
        let own = Fraction::symbol(Symbol::S).neg();
        row.add(Column::Unknown(state), &own, budget)?;
        waiting.push(row);
    }
    let mut outputs = outputs.iter().map(over).collect::<Result<Vec<_>, _>>()?;
    while let Some((_, index)) = (0..waiting.len())
        .filter_map(|index| Some((waiting[index].cost()?, index)))
        .min()
    {
        let row = waiting.swap_remove(index);
        let Some(column) = row.simplest_unknown() else {
            continue;
        };
        let value = row.solved_for(column, budget)?;
        for row in waiting.iter_mut().chain(&mut outputs) {
            row.put(column, &value, budget)?;
        }
    }
    outputs
        .iter()
        .map(|row| writer.fraction(&row.get(whole)))
        .collect()
}

/// The states right after t = 0. A state with `s·p = A·p + Σ s^k·b_k` starts at b_0 + A·b_1 + A²·b_2 …
/// from impulses (the starting values), at b_1 + A·b_2 + … from steps (the inputs).
fn after(writer: &Writer<'_>) -> Result<Vec<(State, Affine)>, Exceeded> {
    let budget = writer.setting.budget;
    let chosen = &writer.found.chosen;
    let size = chosen.rates.len();
    let acts = &writer.found.frame.acts;
    let most = chosen
        .rates
        .iter()
        .flat_map(|rate| rate.0.keys())
        .filter_map(|it| match it {
            Column::Input { power, .. } => Some(*power),
            _ => None,
        });
    let most = most.max().unwrap_or(0);
    // Each state over inputs at power 0.
    let mut values = vec![Row::default(); size];
    for power in (0..=most).rev() {
        let mut next = Vec::with_capacity(size);
        for rate in &chosen.rates {
            let mut row = Row::default();
            for (&column, factor) in &rate.0 {
                match column {
                    Column::State(state) if power < most => {
                        // Steps begin one derivative later.
                        row.add_scaled(&values[state], factor, budget)?;
                    }
                    Column::Input { input, power: own } if own == power => {
                        row.add(Column::Input { input, power: 0 }, factor, budget)?;
                    }
                    _ => {}
                }
            }
            next.push(row);
        }
        if power == 0 {
            // At power 0 only starting values act; what inputs have made stays.
            for (row, before) in next.iter_mut().zip(&values) {
                row.0.retain(|column, _| !is_source(acts, *column));
                for (&column, value) in &before.0 {
                    if is_source(acts, column) {
                        row.add(column, value, budget)?;
                    }
                }
            }
        }
        values = next;
    }
    let mut list: Vec<(State, Row)> = chosen
        .vector
        .iter()
        .copied()
        .zip(values.iter().cloned())
        .collect();
    for (state, row) in &chosen.dependent {
        let mut value = Row::default();
        for (&column, factor) in &row.0 {
            match column {
                Column::State(state) => value.add_scaled(&values[state], factor, budget)?,
                Column::Input { power: 0, .. } if is_source(acts, column) => {
                    value.add(column, factor, budget)?;
                }
                _ => {}
            }
        }
        list.push((*state, value));
    }
    list.into_iter()
        .map(|(state, row)| {
            let mut affine = writer.affine(&row)?;
            affine.constant = writer.fraction(&excited(writer, &row)?)?;
            Ok((state, affine))
        })
        .collect()
}

fn is_source(acts: &[Acts], column: Column) -> bool {
    matches!(column, Column::Input { input, .. } if !matches!(acts[input], Acts::Start(_)))
}
