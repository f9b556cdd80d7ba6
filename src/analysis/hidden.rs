//! Which side hides a mode: the source does not drive it, the output does not see it, or both.
//!
//! A power f^m that cancels is not driven when it divides every response to the source, not seen when
//! it divides the response at the output to every injection. Tested with random combinations of
//! responses and of injections, as polynomials in s modulo a prime.

use crate::algebra::univariate::Univariate;
use crate::algebra::{Fraction, Polynomial, PrimeField, Symbol};
use crate::analysis::couplings::Couplings;
use crate::analysis::equations::point::{Numbers, random};
use crate::analysis::equations::{Equations, Residue, Shape, solve};
use crate::analysis::report::Hides;
use crate::network::{Ask, Combination, Network, Port, Probe};

/// What was found for a power that cancels.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) enum Hidden {
    /// One word for the whole power.
    One(Hides),
    /// One word for each copy.
    Each(Vec<Hides>),
    /// The point was unlucky.
    Unknown,
}

/// Decides for factor^multiplicity of a transfer function or impedance.
pub(crate) fn hides(
    network: &Network,
    couplings: &Couplings,
    question: usize,
    factor: &Polynomial,
    multiplicity: u32,
) -> Hidden {
    for seed in 9_001..9_009 {
        if let Some(found) = at_point(network, couplings, question, factor, multiplicity, seed) {
            return found;
        }
    }
    Hidden::Unknown
}

fn at_point(
    network: &Network,
    couplings: &Couplings,
    question: usize,
    factor: &Polynomial,
    multiplicity: u32,
    seed: u64,
) -> Option<Hidden> {
    let field = PrimeField::default_prime();
    let asked = &network.questions()[question];
    let ports = match &asked.ask {
        Ask::Transfer { response, .. } => ports_of(response),
        Ask::Impedance(port) => vec![*port],
        _ => return None,
    };
    let shape = Shape {
        without: asked.without.clone(),
        ports,
        ..Shape::default()
    };
    let points = degree_bound(network) + 2;
    let (mut driven, mut seen) = (Vec::new(), Vec::new());
    let mut value = Vec::new();
    let mut step = 0;
    while driven.len() < points {
        step += 1;
        if step > 4 * points + 40 {
            return None;
        }
        let s = Residue::new(step as u64 * 104_729 + 17);
        let numbers = Numbers::related(network, couplings, seed, s)?;
        let equations = Equations::new(network, &shape, &numbers);
        let size = equations.rows.len();
        let (right, response) = match &asked.ask {
            Ask::Transfer { response, drive } => (
                equations.drive(*drive, &numbers),
                equations.response(response, &|fraction| numbers.value_of(fraction))?,
            ),
            Ask::Impedance(port) => {
                let whole = Combination {
                    terms: vec![(Fraction::one(), Probe::Voltage(*port))],
                };
                (
                    equations.current_into(*port),
                    equations.response(&whole, &|fraction| numbers.value_of(fraction))?,
                )
            }
            _ => return None,
        };
        let injection: Vec<Residue> = (0..size).map(|row| random(seed + 77, row as u64)).collect();
        let listener: Vec<Residue> = (0..size).map(|row| random(seed + 78, row as u64)).collect();
        let solution = solve(&equations.rows, &[right, injection]);
        if solution.determinant.is_zero() {
            continue;
        }
        let dot = |weights: &[Residue], values: &[Residue]| {
            let sum = weights
                .iter()
                .zip(values)
                .fold(Residue::ZERO, |sum, (a, b)| sum.add(a.mul(*b)));
            sum.mul(solution.determinant)
        };
        driven.push((s.get(), dot(&listener, &solution.solutions[0]).get()));
        seen.push((s.get(), dot(&response, &solution.solutions[1]).get()));
        if value.len() <= factor.degree(Symbol::S) as usize {
            let fraction = Fraction::from(factor.clone());
            value.push((s.get(), numbers.formula(&fraction, &|_| None)?.get()));
        }
    }
    let f = Univariate::interpolate(&value, &field).monic(&field);
    let count = |list: &[(u64, u64)]| {
        let polynomial = Univariate::interpolate(list, &field);
        if polynomial.is_zero() {
            multiplicity
        } else {
            polynomial.multiplicity(&f, &field).min(multiplicity)
        }
    };
    let (not_driven, not_seen) = (count(&driven), count(&seen));
    Some(
        match (not_driven == multiplicity, not_seen == multiplicity) {
            (true, true) => Hidden::One(Hides::Both),
            (true, false) => Hidden::One(Hides::NotDriven),
            (false, true) => Hidden::One(Hides::NotSeen),
            (false, false) => Hidden::Each(
                (0..multiplicity)
                    .map(|copy| {
                        if copy < not_driven {
                            Hides::NotDriven
                        } else {
                            Hides::NotSeen
                        }
                    })
                    .collect(),
            ),
        },
    )
}

/// No determinant of the equations has a higher degree in s.
fn degree_bound(network: &Network) -> usize {
    let reactive = network
        .elements()
        .filter(|(_, element)| element.is_reactive())
        .count();
    let states: u32 = network
        .relations()
        .map(|(_, relation)| {
            let degree = |polynomial: &Polynomial| polynomial.degree(Symbol::S);
            relation
                .sets
                .iter()
                .map(|(_, value)| degree(value.numerator()) + degree(value.denominator()))
                .sum::<u32>()
        })
        .sum();
    reactive + states as usize * 2
}

fn ports_of(combination: &Combination) -> Vec<Port> {
    combination
        .terms
        .iter()
        .filter_map(|(_, probe)| match probe {
            Probe::Voltage(port) => Some(*port),
            Probe::Current(_) => None,
        })
        .collect()
}
