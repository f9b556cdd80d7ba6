//! The network a determinant is taken of.

use std::collections::BTreeSet;

use crate::algebra::Polynomial;
use crate::network::{Ask, Combination, DriveId, ElementId, Port, Probe};

/// What is common to numerator and denominator of a question.
#[derive(Clone, Debug, Default)]
pub struct Frame {
    /// Parts taken out (opened).
    pub without: BTreeSet<ElementId>,
    /// Parts whose current is read by the responses.
    pub sensed: BTreeSet<ElementId>,
    /// The drive whose sources are kept alive, on a node of its own.
    pub drive: Option<DriveId>,
    /// Node pairs the question touches; they tie islands together.
    pub ports: Vec<Port>,
}

/// One determinant of a frame.
#[derive(Clone, Debug)]
pub enum Insertion {
    /// Every independent source zeroed.
    None,
    /// The drive's row replaced by a response: N of response/drive.
    Response(Response),
    /// A short across a port.
    Short(Port),
    /// Gains of these parts set to zero.
    Quiet(BTreeSet<ElementId>),
}

/// A response with polynomial coefficients, all over one denominator that is kept outside.
#[derive(Clone, Debug)]
pub struct Response {
    /// Coefficient and response.
    pub terms: Vec<(Polynomial, Probe)>,
    /// Common denominator of the coefficients.
    pub denominator: Polynomial,
}

impl Response {
    /// The response of a combination.
    #[must_use]
    pub fn new(combination: &Combination) -> Self {
        let mut denominator = Polynomial::one();
        for (coefficient, _) in &combination.terms {
            if denominator.div_exact(coefficient.denominator()).is_none() {
                denominator = &denominator * coefficient.denominator();
            }
        }
        let terms = combination
            .terms
            .iter()
            .map(|(coefficient, probe)| {
                let factor = denominator
                    .div_exact(coefficient.denominator())
                    .unwrap_or_else(Polynomial::one);
                (coefficient.numerator() * &factor, *probe)
            })
            .collect();
        Self { terms, denominator }
    }
}

impl Frame {
    /// The network as it stands, with parts taken out.
    #[must_use]
    pub fn without(parts: &[ElementId]) -> Self {
        let mut frame = Self::default();
        frame.without.extend(parts.iter().copied());
        frame
    }

    /// The frame of a question; functions of functions have none.
    #[must_use]
    pub fn of(ask: &Ask, without: &[ElementId]) -> Option<Self> {
        let mut frame = Self::without(without);
        match ask {
            Ask::Transfer { response, drive } => {
                frame.drive = Some(*drive);
                frame.read(response);
            }
            Ask::Ratio {
                upper,
                lower,
                drive,
            } => {
                frame.drive = Some(*drive);
                frame.read(upper);
                frame.read(lower);
            }
            Ask::Impedance(port) | Ask::Admittance(port) => frame.ports.push(*port),
            Ask::ReturnRatio(_) => {}
            Ask::Function(_) | Ask::Limit { .. } | Ask::FirstOrder { .. } => return None,
        }
        Some(frame)
    }

    fn read(&mut self, combination: &Combination) {
        for (_, probe) in &combination.terms {
            match probe {
                Probe::Voltage(port) => self.ports.push(*port),
                Probe::Current(element) => {
                    self.sensed.insert(*element);
                }
            }
        }
    }
}
