//! Figures at the nominals in words: modes, near pairs, and what one per cent of a part does.

use nalgebra::Complex;

use crate::numeric::drift::{Cancelled, Drift};
use crate::numeric::near::Near;
use crate::render::engineering::{percent, place, plain, quantity};

const RADIANS: &str = "rad/s";

/// `at the nominal values: −8.33 krad/s (1.33 kHz)`; `None` without nominals.
#[must_use]
pub fn modes(cancelled: &Cancelled) -> Option<String> {
    let upper = cancelled
        .modes
        .iter()
        .filter(|mode| mode.centre.im.signum() >= 0);
    let places: Vec<String> = upper.map(|mode| mode_place(mode.centre.to_f64())).collect();
    if places.is_empty() {
        return None;
    }
    Some(format!("at the nominal values {}", places.join(", ")))
}

/// A natural frequency with its frequency in hertz: |p|/2π.
fn mode_place(value: Complex<f64>) -> String {
    let size = value.norm();
    if size == 0.0 {
        return "0".to_owned();
    }
    let hertz = quantity(size / std::f64::consts::TAU, "Hz");
    format!("{} ({hertz})", place(value, RADIANS, true))
}

/// A near pair in clauses.
#[must_use]
pub fn near(it: &Near) -> Vec<String> {
    let mut clauses = vec![format!(
        "pole {}, zero {}: {} apart",
        place(it.pole, RADIANS, true),
        place(it.zero, RADIANS, true),
        percent(it.apart.abs())
    )];
    match it.over_tolerance {
        Some((low, high)) if it.can_meet() => clauses.push(format!(
            "at the corners of the tolerances {} to {} apart: they can meet",
            percent(low),
            percent(high)
        )),
        Some((low, high)) => clauses.push(format!(
            "at the corners of the tolerances {} to {} apart",
            percent(low),
            percent(high)
        )),
        None => {}
    }
    let mut left = Vec::new();
    if let Some(residue) = it.residue {
        left.push(format!("residue {}", rate(residue)));
    }
    if let Some(tail) = &it.tail {
        let size = match tail.of_final {
            Some(fraction) => format!("{} of the final value", percent(fraction)),
            None => format!("{} (the final value is 0)", quantity(tail.size, "")),
        };
        let time = quantity(tail.time_constant, "s");
        left.push(format!("a step leaves a tail of {size}, τ = {time}"));
    }
    if !left.is_empty() {
        clauses.push(left.join("; "));
    }
    if !it.assumed.is_empty() {
        let which = if it.stated {
            format!("the tolerance of {} is", it.assumed.join(", "))
        } else {
            "tolerances are".to_owned()
        };
        clauses.push(format!("{which} not stated: 1 % is taken"));
    }
    clauses
}

/// A residue, in 1/s: without prefixes, which would read as metres.
fn rate(value: Complex<f64>) -> String {
    if value.im == 0.0 {
        return format!("{}\u{a0}1/s", plain(value.re));
    }
    let sign = if value.im < 0.0 { "−" } else { "+" };
    let (re, im) = (plain(value.re), plain(value.im.abs()));
    format!("({re}\u{a0}{sign}\u{a0}j\u{a0}{im})\u{a0}1/s")
}

/// Heading and rows of the table of drifts of one mode.
#[must_use]
pub fn drifts(list: &[Drift]) -> Option<Vec<[String; 4]>> {
    if list.is_empty() {
        return None;
    }
    let head = ["1 % of", "pole moves", "zero moves", "tail of a step"];
    let mut rows = vec![head.map(str::to_owned)];
    for drift in list {
        let shift = |value: Complex<f64>| {
            let text = place(value, RADIANS, false);
            if drift.splits && value.norm() > 0.0 {
                format!("{text} (splits)")
            } else {
                text
            }
        };
        rows.push([
            drift.part.clone(),
            shift(drift.pole),
            shift(drift.zero),
            drift.tail.map_or_else(|| "–".to_owned(), percent),
        ]);
    }
    Some(rows)
}
