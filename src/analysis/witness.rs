//! Every formula against the untouched equations at random points.

use std::collections::BTreeMap;

use crate::algebra::{Fraction, Symbol};
use crate::analysis::couplings::Couplings;
use crate::analysis::equations::point::{Numbers, random};
use crate::analysis::equations::{Equations, Residue, Shape, solve};
use crate::network::{Ask, Network};

/// Points at which a formula is compared.
const POINTS: u32 = 8;
/// Points that may be unlucky (a singular matrix, a vanishing denominator).
const ATTEMPTS: u64 = 64;

/// Compares the formula of a question with the solution of the equations; gives the number of points.
///
/// # Errors
/// A sentence when the two differ, or when no point could be solved.
pub(crate) fn check(
    network: &Network,
    question: usize,
    known: &BTreeMap<Symbol, Fraction>,
    couplings: &Couplings,
) -> Result<u32, String> {
    let name = &network.questions()[question].name;
    let symbol = network.questions()[question].symbol;
    let Some(formula) = known.get(&symbol) else {
        return Ok(0);
    };
    let mut agreed = 0;
    for attempt in 0..ATTEMPTS {
        if agreed == POINTS {
            break;
        }
        let seed = 7_001 + attempt;
        let Some(numbers) = Numbers::related(network, couplings, seed, random(seed, u64::MAX))
        else {
            continue;
        };
        let Some(solved) = value(network, question, &numbers, 0) else {
            continue;
        };
        let Some(written) = numbers.formula(formula, &|_| None) else {
            continue;
        };
        if solved != written {
            return Err(format!(
                "the formula of {name} and the solution of the equations differ at point {attempt}"
            ));
        }
        agreed += 1;
    }
    if agreed == 0 {
        return Err(format!(
            "the equations of {name} could not be solved at any point"
        ));
    }
    Ok(agreed)
}

/// The value of a question by the equations.
pub(crate) fn value(
    network: &Network,
    question: usize,
    numbers: &Numbers<'_>,
    depth: usize,
) -> Option<Residue> {
    let asked = &network.questions()[question];
    let shape = |ports: &[crate::network::Port]| Shape {
        without: asked.without.clone(),
        ports: ports.to_vec(),
        ..Shape::default()
    };
    match &asked.ask {
        Ask::Transfer { response, drive } => {
            let ports = ports_of(response);
            respond(network, &shape(&ports), response, *drive, numbers)
        }
        Ask::Ratio {
            upper,
            lower,
            drive,
        } => {
            let ports = [ports_of(upper), ports_of(lower)].concat();
            let above = respond(network, &shape(&ports), upper, *drive, numbers)?;
            let below = respond(network, &shape(&ports), lower, *drive, numbers)?;
            Some(above.mul(below.inverse()?))
        }
        Ask::Impedance(port) => {
            let equations = Equations::new(network, &shape(&[*port]), numbers);
            let right = equations.current_into(*port);
            let solution = solve(&equations.rows, &[right]);
            let found = solution.solutions.first()?;
            let at = |node: crate::network::NodeId| {
                node.index()
                    .checked_sub(1)
                    .map_or(Residue::ZERO, |index| found[index])
            };
            Some(at(port.from).sub(at(port.to)))
        }
        Ask::Admittance(port) => {
            let with_source = Shape {
                probe_source: Some(*port),
                ..shape(&[*port])
            };
            let equations = Equations::new(network, &with_source, numbers);
            let (right, current) = equations.probe()?;
            let solution = solve(&equations.rows, &[right]);
            Some(solution.solutions.first()?[current].neg())
        }
        Ask::ReturnRatio(parts) => {
            let full = Equations::new(network, &shape(&[]), numbers);
            let quiet = Shape {
                quiet: parts.clone(),
                ..shape(&[])
            };
            let still = Equations::new(network, &quiet, numbers);
            let full = solve(&full.rows, &[]).determinant;
            let still = solve(&still.rows, &[]).determinant;
            Some(full.sub(still).mul(still.inverse()?))
        }
        Ask::Function(fraction) => {
            if depth > 64 {
                return None;
            }
            let mut inner: BTreeMap<Symbol, Residue> = BTreeMap::new();
            for symbol in fraction.symbols() {
                if let Some(index) = network.question_of(symbol) {
                    inner.insert(symbol, value(network, index, numbers, depth + 1)?);
                }
            }
            numbers.formula(fraction, &|symbol| inner.get(&symbol).copied())
        }
        Ask::Limit { .. } | Ask::FirstOrder { .. } => None,
    }
}

/// Equations, excitation and response of a transfer function, impedance or admittance.
pub(crate) fn system<'a>(
    network: &'a Network,
    question: usize,
    numbers: &Numbers<'_>,
) -> Option<(Equations<'a>, Vec<Residue>, Vec<Residue>)> {
    let asked = &network.questions()[question];
    let mut shape = Shape {
        without: asked.without.clone(),
        ..Shape::default()
    };
    match &asked.ask {
        Ask::Transfer { response, drive } => {
            shape.ports = ports_of(response);
            let equations = Equations::new(network, &shape, numbers);
            let right = equations.drive(*drive, numbers);
            let row = equations.response(response, &|fraction| numbers.value_of(fraction))?;
            Some((equations, right, row))
        }
        Ask::Impedance(port) => {
            shape.ports = vec![*port];
            let equations = Equations::new(network, &shape, numbers);
            let right = equations.current_into(*port);
            // The same numbers read the voltage of the port.
            let row = right.clone();
            Some((equations, right, row))
        }
        Ask::Admittance(port) => {
            shape.ports = vec![*port];
            shape.probe_source = Some(*port);
            let equations = Equations::new(network, &shape, numbers);
            let (right, current) = equations.probe()?;
            let mut row = vec![Residue::ZERO; right.len()];
            row[current] = Residue::ONE;
            Some((equations, right, row))
        }
        Ask::Ratio { .. }
        | Ask::ReturnRatio(_)
        | Ask::Function(_)
        | Ask::Limit { .. }
        | Ask::FirstOrder { .. } => None,
    }
}

fn ports_of(combination: &crate::network::Combination) -> Vec<crate::network::Port> {
    combination
        .terms
        .iter()
        .filter_map(|(_, probe)| match probe {
            crate::network::Probe::Voltage(port) => Some(*port),
            crate::network::Probe::Current(_) => None,
        })
        .collect()
}

fn respond(
    network: &Network,
    shape: &Shape,
    response: &crate::network::Combination,
    drive: crate::network::DriveId,
    numbers: &Numbers<'_>,
) -> Option<Residue> {
    let equations = Equations::new(network, shape, numbers);
    let right = equations.drive(drive, numbers);
    let row = equations.response(response, &|fraction| numbers.value_of(fraction))?;
    let solution = solve(&equations.rows, &[right]);
    let found = solution.solutions.first()?;
    Some(
        row.iter()
            .zip(found)
            .fold(Residue::ZERO, |sum, (weight, value)| {
                sum.add(weight.mul(*value))
            }),
    )
}
