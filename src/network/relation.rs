//! Exact relations between symbols, releasable one by one.

use crate::algebra::{Fraction, Symbol};
use crate::network::value::Tolerance;
use crate::source::Span;

/// One exact relation of the file.
///
/// `R1 = R2 = R` is two relations. The line of a controlled source is one relation that sets a
/// symbol for each of its coefficients. Relations contain no cycle.
#[derive(Clone, Debug)]
pub struct Relation {
    /// What it sets: symbol and its value over other symbols, `s` included.
    pub sets: Vec<(Symbol, Fraction)>,
    /// As a note writes it: `R2 = R1`.
    pub text: String,
    /// Deviation allowed in tolerance work (`R2 = R1 ± 0.1 %`).
    pub tolerance: Option<Tolerance>,
    /// States inside the relation: for each thing it sets, the larger of the degrees in s of numerator and
    /// denominator, summed.
    pub device_states: u32,
    /// Where.
    pub place: Span,
}

impl Relation {
    /// Whether the complex frequency stands in it; such a relation keeps its form when released and
    /// only its parameters become independent.
    #[must_use]
    pub fn has_s(&self) -> bool {
        self.sets.iter().any(|(_, value)| value.contains(Symbol::S))
    }
}
