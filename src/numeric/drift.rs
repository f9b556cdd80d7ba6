//! What breaks a cancellation: how pole and zero move apart when one part alone drifts.

use std::collections::BTreeSet;

use nalgebra::Complex;

use crate::algebra::{Polynomial, PolynomialRing, Rational, Symbol};
use crate::analysis::pairing::{Paired, Pairing};
use crate::analysis::report::{Cancellation, Expanded, FunctionReport};
use crate::budget::{Budget, Exceeded};
use crate::network::{CancellationClass, Network, Origin};
use crate::numeric::big::Big;
use crate::numeric::layer::{Layer, deviation};
use crate::numeric::near::{Side, derivative, settled};
use crate::numeric::nominal::Nominals;
use crate::numeric::quotient::{Quotient, numbers};
use crate::numeric::roots::{Root, roots, value_at};

/// The drift that is looked at.
const PERCENT: f64 = 0.01;

/// Bits of slopes.
const BITS: u64 = 160;

/// Where pole and zero of a cancelled mode go when one part drifts by one per cent.
#[derive(Clone, Debug)]
pub struct Drift {
    /// The part.
    pub part: String,
    /// Shift of the pole in rad/s per 1 % of the part, to first order.
    pub pole: Complex<f64>,
    /// Shift of the zero.
    pub zero: Complex<f64>,
    /// The root is multiple on one side: it splits, and the shift is the farthest at 1 %, not a slope.
    pub splits: bool,
    /// Size of the tail that the broken pair leaves in the step response, as a fraction of the final
    /// value, to first order; `None` where there is no final value.
    pub tail: Option<f64>,
}

/// What is known of a cancelled factor in numbers.
#[derive(Clone, Debug, Default)]
pub struct Cancelled {
    /// The natural frequencies it stands for, in rad/s.
    pub modes: Vec<Root>,
    /// For each of them with an imaginary part ≥ 0, the responsible parts.
    pub drifts: Vec<Vec<Drift>>,
}

/// The modes of a cancelled factor and what breaks it. Empty where nominals are missing.
///
/// # Errors
/// When the budget is reached.
pub(super) fn cancelled(
    it: &Cancellation,
    result: &FunctionReport,
    expanded: Option<&Expanded>,
    quotient: Option<&Quotient>,
    nominals: &Nominals<'_>,
    budget: &Budget,
) -> Result<Cancelled, Exceeded> {
    if !nominals.missing([&it.factor]).is_empty() {
        return Ok(Cancelled::default());
    }
    let factor = nominals.in_s(&it.factor).0.primitive();
    let modes = roots(&factor, budget)?;
    let upper: Vec<&Root> = modes
        .iter()
        .filter(|mode| mode.centre.im.signum() >= 0)
        .collect();
    let drifts = match it.class {
        CancellationClass::Structural => Vec::new(),
        CancellationClass::Matched => {
            let parts = responsible(it, nominals.network());
            released(&parts, &factor, &upper, result, nominals, budget)?
        }
        CancellationClass::Coincidental => match expanded {
            Some(expanded) if simple(&factor, quotient) => {
                coincidental(it, &upper, expanded, nominals, budget)?
            }
            _ => Vec::new(),
        },
    };
    let drifts = match quotient {
        Some(quotient) => with_tails(drifts, &upper, &quotient.reduced(budget)?),
        None => drifts,
    };
    Ok(Cancelled { modes, drifts })
}

/// Whether a factor stands once on each side: slopes of multiple roots are infinite.
fn simple(factor: &Polynomial, quotient: Option<&Quotient>) -> bool {
    let Some(quotient) = quotient else {
        return false;
    };
    let once = |side: &Polynomial| {
        let rest = side.div_exact(factor);
        rest.is_some_and(|rest| rest.div_exact(factor).is_none())
    };
    once(&quotient.numerator) && once(&quotient.denominator)
}

/// Parts, options and parameters that stand in the relations a matched factor rests on.
fn responsible(it: &Cancellation, network: &Network) -> Vec<Symbol> {
    let mut parts = BTreeSet::new();
    for id in it.because.iter().chain(it.also_because.iter().flatten()) {
        let relation = network.relation(*id);
        for (symbol, value) in &relation.sets {
            if !relation.has_s() {
                parts.insert(*symbol);
            }
            let stands = |symbol: &Symbol| {
                let origin = network.facts(*symbol).map(|facts| facts.origin);
                relation.has_s() || matches!(origin, Some(Origin::Part | Origin::Option))
            };
            parts.extend(value.symbols().into_iter().filter(stands));
        }
    }
    let hidden = |symbol: &Symbol| {
        let origin = network.facts(*symbol).map(|facts| facts.origin);
        matches!(origin, None | Some(Origin::Coefficient | Origin::Derived))
    };
    parts.retain(|symbol| !hidden(symbol));
    let mut parts: Vec<Symbol> = parts.into_iter().collect();
    parts.sort_by_key(|symbol| network.facts(*symbol).map(|facts| facts.place));
    parts
}

/// Every relation released, one part after the other.
fn released(
    parts: &[Symbol],
    factor: &Polynomial,
    modes: &[&Root],
    result: &FunctionReport,
    nominals: &Nominals<'_>,
    budget: &Budget,
) -> Result<Vec<Vec<Drift>>, Exceeded> {
    let network = nominals.network();
    let question = &network.questions()[result.question];
    let paired = Pairing::of(network, &question.ask, &question.without, budget)?;
    let Some(Paired::Pairing(pairing)) = paired else {
        return Ok(Vec::new());
    };
    let mut drifts: Vec<Vec<Drift>> = vec![Vec::new(); modes.len()];
    let mut table = network.symbols().clone();
    let open = deviation(&mut table);
    let ring = PolynomialRing { budget };
    for &part in parts {
        let layer = Layer::new(nominals, part, open, budget)?;
        let (above, below) = pairing.expand(&ring, &layer)?;
        let strange = |side: &Polynomial| {
            let known = |symbol: &Symbol| *symbol == Symbol::S || *symbol == open;
            !side.symbols().iter().all(known)
        };
        if strange(&above) || strange(&below) {
            // A part that left the cancelled function has no nominal.
            return Ok(Vec::new());
        }
        let (above, below) = (
            Moving::new(&above, open, factor),
            Moving::new(&below, open, factor),
        );
        for (mode, list) in modes.iter().zip(&mut drifts) {
            let (pole, zero) = (below.shift(mode, budget)?, above.shift(mode, budget)?);
            if pole.norm() == 0.0 && zero.norm() == 0.0 {
                continue;
            }
            list.push(Drift {
                part: network.symbols().name(part).to_owned(),
                pole,
                zero,
                splits: above.multiplicity > 1 || below.multiplicity > 1,
                tail: None,
            });
        }
    }
    Ok(drifts)
}

/// A polynomial in s and the deviation of a part, around a root of multiplicity m.
struct Moving {
    still: Vec<Big>,
    slope: Vec<Big>,
    at_one_percent: Polynomial,
    multiplicity: u32,
}

impl Moving {
    fn new(polynomial: &Polynomial, open: Symbol, factor: &Polynomial) -> Self {
        let by_deviation = polynomial.coefficients(open);
        let still = by_deviation.first().cloned().unwrap_or_default();
        let slope = by_deviation.get(1).cloned().unwrap_or_default();
        let mut rest = still.clone();
        let mut multiplicity = 0;
        while let Some(next) = rest.div_exact(factor).filter(|_| !rest.is_zero()) {
            rest = next;
            multiplicity += 1;
        }
        let percent = Rational::new(1.into(), 100.into());
        let (at_one_percent, _) =
            polynomial.evaluate(&|symbol| percent.clone().filter(|_| symbol == open));
        Self {
            still: numbers(&still),
            slope: numbers(&slope),
            at_one_percent,
            multiplicity,
        }
    }

    /// Shift of the root per 1 %.
    fn shift(&self, mode: &Root, budget: &Budget) -> Result<Complex<f64>, Exceeded> {
        if self.multiplicity <= 1 {
            let below = value_at(&derivative(&self.still), &mode.centre);
            let above = value_at(&self.slope, &mode.centre);
            return Ok(settled(-above.div(&below, BITS).to_f64() * PERCENT, mode));
        }
        let mut shifts: Vec<Complex<f64>> = Vec::new();
        for root in roots(&self.at_one_percent, budget)? {
            let shift = (&root.centre - &mode.centre).to_f64();
            shifts.extend(std::iter::repeat_n(shift, root.multiplicity as usize));
        }
        shifts.sort_by(|a, b| a.norm().total_cmp(&b.norm()));
        let farthest = shifts
            .into_iter()
            .take(self.multiplicity as usize)
            .next_back();
        Ok(farthest.unwrap_or_default())
    }
}

/// The relations kept: the parts the function itself holds.
fn coincidental(
    it: &Cancellation,
    modes: &[&Root],
    expanded: &Expanded,
    nominals: &Nominals<'_>,
    budget: &Budget,
) -> Result<Vec<Vec<Drift>>, Exceeded> {
    let above = Side::new(&expanded.numerator, nominals, budget)?;
    let below = Side::new(&expanded.denominator, nominals, budget)?;
    let mut symbols: BTreeSet<Symbol> =
        it.conditions.iter().flat_map(Polynomial::symbols).collect();
    if symbols.is_empty() {
        symbols = above
            .slopes
            .keys()
            .chain(below.slopes.keys())
            .copied()
            .collect();
    }
    symbols.remove(&Symbol::S);
    let name = |symbol: Symbol| nominals.network().symbols().name(symbol).to_owned();
    let of_mode = |mode: &&Root| {
        let of_part = |&symbol: &Symbol| Drift {
            part: name(symbol),
            pole: below.shift(symbol, mode) * PERCENT,
            zero: above.shift(symbol, mode) * PERCENT,
            splits: false,
            tail: None,
        };
        let moves = |drift: &Drift| drift.pole.norm() > 0.0 || drift.zero.norm() > 0.0;
        let mut list: Vec<Drift> = symbols.iter().map(of_part).filter(moves).collect();
        list.sort_by(|a, b| a.part.cmp(&b.part));
        list
    };
    Ok(modes.iter().map(of_mode).collect())
}

/// Residue of the broken pair: the function that is left, at the mode, times the distance.
fn with_tails(mut drifts: Vec<Vec<Drift>>, modes: &[&Root], reduced: &Quotient) -> Vec<Vec<Drift>> {
    let settled = reduced.final_value().filter(|value| *value != 0.0);
    for (list, mode) in drifts.iter_mut().zip(modes) {
        let (Some(settled), Some(value)) = (settled, reduced.value(&mode.centre)) else {
            continue;
        };
        let place = mode.centre.to_f64();
        if place.re >= 0.0 {
            continue;
        }
        let sides = if mode.is_real() { 1.0 } else { 2.0 };
        for drift in list.iter_mut().filter(|drift| !drift.splits) {
            let size = sides * (value * (drift.pole - drift.zero) / place).norm();
            drift.tail = Some(size / settled.abs());
        }
    }
    drifts
}
