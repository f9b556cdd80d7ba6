//! The common factor under some of the relations, followed to a point where all of them hold.
//!
//! On a line that leaves the set where all relations hold (t = 0), the greatest common divisor for
//! general t is a polynomial in t up to a factor without s; its value at t = 0 tells which factors
//! cancel by the kept relations alone. All modulo a prime.

use std::collections::BTreeSet;

use crate::algebra::univariate::Univariate;
use crate::algebra::{Polynomial, Symbol};
use crate::analysis::pairing::Pairing;
use crate::analysis::point::{Choice, Point};
use crate::analysis::solve::{SEED, Setting};
use crate::network::{Network, RelationId};

/// Points on the line that are tried at most.
const MAX_POINTS: u64 = 400;

/// Degree of the common factor at a general point where only `kept` relations hold.
pub(crate) fn common_at(
    pairing: &Pairing,
    network: &Network,
    kept: &BTreeSet<RelationId>,
) -> Option<u32> {
    let sample = pairing.lucky(network, SEED, 1, &|id| !kept.contains(&id))?;
    let common = sample.numerator.gcd(&sample.denominator, pairing.field());
    u32::try_from(common.degree()?).ok()
}

/// How often `factor` (relations put in) divides the common factor under the kept relations, where
/// all relations hold.
pub(crate) fn multiplicity_at(
    pairing: &Pairing,
    network: &Network,
    factor: &Polynomial,
    setting: &Setting<'_>,
    kept: &BTreeSet<RelationId>,
) -> Option<u32> {
    let field = pairing.field();
    (SEED..SEED + 16).find_map(|seed| {
        let limit = common_on_line(pairing, network, kept, seed)?;
        let choice = Choice {
            seed,
            shift: 0,
            released: &|_| false,
            salt: None,
        };
        let point = Point::new(network, field, &choice)?;
        let value = factor_at(factor, &point, setting, pairing)?;
        Some(limit.multiplicity(&value.monic(field), field))
    })
}

/// A factor in s at a point.
fn factor_at(
    factor: &Polynomial,
    point: &Point,
    setting: &Setting<'_>,
    pairing: &Pairing,
) -> Option<Univariate> {
    let field = pairing.field();
    let roots = setting.couplings.roots();
    let mut coefficients = vec![0; factor.degree(Symbol::S) as usize + 1];
    for (monomial, coefficient) in factor.terms() {
        let mut value = field.from_integer(coefficient);
        let mut power = 0;
        for (symbol, exponent) in monomial.factors() {
            if symbol == Symbol::S {
                power = exponent as usize;
                continue;
            }
            let inductance = roots.iter().find(|(_, root)| **root == symbol);
            let base = match inductance {
                Some((inductance, _)) => {
                    let square = point.value(*inductance, field).numerator.lead();
                    field.square_root(square)?
                }
                None => point.value(symbol, field).numerator.lead(),
            };
            value = field.mul(value, field.pow(base, u64::from(exponent)));
        }
        coefficients[power] = field.add(coefficients[power], value);
    }
    Some(Univariate::new(coefficients))
}

/// The common factor for general t at t → 0, up to a constant.
fn common_on_line(
    pairing: &Pairing,
    network: &Network,
    kept: &BTreeSet<RelationId>,
    seed: u64,
) -> Option<Univariate> {
    let field = pairing.field();
    let released = |id: RelationId| !kept.contains(&id);
    let at = |shift: u64| {
        let choice = Choice {
            seed,
            shift,
            released: &released,
            salt: None,
        };
        let sample = pairing.sample(network, &choice)?;
        let common = sample.numerator.gcd(&sample.denominator, field);
        // The leading coefficient of the numerator clears what made the divisor monic.
        Some((
            common.degree()?,
            common.scale(sample.numerator.lead(), field),
        ))
    };
    let mut points: Vec<(u64, Univariate)> = Vec::new();
    let mut least = usize::MAX;
    let mut next_check = 8;
    for shift in 1..=MAX_POINTS {
        // A unit step would be as good; odd multiples avoid small coincidences.
        let shift = shift * 7919;
        let Some((degree, common)) = at(shift) else {
            continue;
        };
        if degree < least {
            least = degree;
            points.clear();
            next_check = 8;
        }
        if degree > least {
            continue;
        }
        points.push((shift, common));
        if least == 0 {
            return Some(Univariate::constant(1));
        }
        if points.len() >= next_check {
            if let Some(found) = interpolate(&points, least, pairing) {
                return Some(found);
            }
            next_check = points.len() * 3 / 2;
        }
    }
    None
}

/// The coefficients as polynomials in t through all points but two, which must agree; their lowest
/// powers of t.
fn interpolate(
    points: &[(u64, Univariate)],
    degree: usize,
    pairing: &Pairing,
) -> Option<Univariate> {
    let field = pairing.field();
    let (through, checks) = points.split_at(points.len() - 2);
    let mut curves = Vec::with_capacity(degree + 1);
    for power in 0..=degree {
        let value = |common: &Univariate| common.coefficients().get(power).copied().unwrap_or(0);
        let list: Vec<(u64, u64)> = through
            .iter()
            .map(|(at, common)| (*at, value(common)))
            .collect();
        let curve = Univariate::interpolate(&list, field);
        let fits = checks
            .iter()
            .all(|(at, common)| curve.evaluate(*at, field) == value(common));
        if !fits {
            return None;
        }
        curves.push(curve);
    }
    let low = curves.iter().filter_map(Univariate::valuation).min()?;
    Some(Univariate::new(
        curves
            .iter()
            .map(|curve| curve.coefficients().get(low).copied().unwrap_or(0))
            .collect(),
    ))
}
