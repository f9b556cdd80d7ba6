//! A function at the nominal values: a quotient of polynomials in s with integer coefficients.

use nalgebra::Complex;

use crate::algebra::gcd::gcd;
use crate::algebra::{Polynomial, Rational, Symbol};
use crate::analysis::report::Expanded;
use crate::budget::{Budget, Exceeded};
use crate::numeric::big::{Big, BigComplex};
use crate::numeric::nominal::Nominals;
use crate::numeric::roots::{Root, roots, value_at};

/// Bits of values that are divided.
const BITS: u64 = 160;

/// H = N/D with its poles and zeros.
#[derive(Clone, Debug)]
pub struct Quotient {
    /// Numerator in s.
    pub numerator: Polynomial,
    /// Denominator in s.
    pub denominator: Polynomial,
    /// Roots of the denominator.
    pub poles: Vec<Root>,
    /// Roots of the numerator; empty for the zero function.
    pub zeros: Vec<Root>,
}

impl Quotient {
    /// Roots of both sides.
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn new(
        numerator: Polynomial,
        denominator: Polynomial,
        budget: &Budget,
    ) -> Result<Self, Exceeded> {
        let poles = roots(&denominator, budget)?;
        let zeros = roots(&numerator, budget)?;
        Ok(Self {
            numerator,
            denominator,
            poles,
            zeros,
        })
    }

    /// The function with `value` put in for its symbols; `None` where its denominator vanishes.
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn at(
        expanded: &Expanded,
        value: &dyn Fn(Symbol) -> Option<Rational>,
        budget: &Budget,
    ) -> Result<Option<Self>, Exceeded> {
        let side = |coefficients: &[Polynomial]| {
            Polynomial::from_coefficients(Symbol::S, coefficients).evaluate(value)
        };
        let (above, above_scale) = side(&expanded.numerator);
        let (below, below_scale) = side(&expanded.denominator);
        if below.is_zero() {
            return Ok(None);
        }
        let (above, below) = (above.scale(&below_scale), below.scale(&above_scale));
        Self::new(above, below, budget).map(Some)
    }

    /// The function at the nominals; the names that have none otherwise.
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn at_nominals(
        expanded: &Expanded,
        nominals: &Nominals<'_>,
        budget: &Budget,
    ) -> Result<Result<Self, Vec<String>>, Exceeded> {
        let missing = nominals.missing(expanded.numerator.iter().chain(&expanded.denominator));
        if !missing.is_empty() {
            return Ok(Err(missing));
        }
        let found = Self::at(expanded, &|symbol| nominals.value(symbol).cloned(), budget)?;
        Ok(found.ok_or_else(Vec::new))
    }

    /// The same function without the factors that its sides share at these values.
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn reduced(&self, budget: &Budget) -> Result<Self, Exceeded> {
        let common = gcd(&self.numerator, &self.denominator, budget)?;
        if common.degree(Symbol::S) == 0 {
            return Ok(self.clone());
        }
        let divide = |side: &Polynomial| side.div_exact(&common).unwrap_or_else(|| side.clone());
        Self::new(divide(&self.numerator), divide(&self.denominator), budget)
    }

    /// H at a point; `None` at a pole.
    #[must_use]
    pub fn value(&self, at: &BigComplex) -> Option<Complex<f64>> {
        let below = value_at(&numbers(&self.denominator), at);
        if below == BigComplex::zero() {
            return None;
        }
        let above = value_at(&numbers(&self.numerator), at);
        Some(above.div(&below, BITS).to_f64())
    }

    /// The value that a step response of height one settles to, H(0); `None` where there is none: a
    /// pole at s = 0 or in the right half plane.
    #[must_use]
    pub fn final_value(&self) -> Option<f64> {
        let settles = self.poles.iter().all(|pole| pole.centre.re.signum() < 0);
        let value = self.value(&BigComplex::zero()).filter(|_| settles)?;
        Some(value.re)
    }

    /// The residue at a simple pole, N(p)/D′(p); `None` at a multiple one.
    #[must_use]
    pub fn residue(&self, pole: &Root) -> Option<Complex<f64>> {
        if pole.multiplicity > 1 {
            return None;
        }
        let slope = self.denominator.derivative(Symbol::S);
        let below = value_at(&numbers(&slope), &pole.centre);
        let above = value_at(&numbers(&self.numerator), &pole.centre);
        Some(above.div(&below, BITS).to_f64())
    }

    /// What a pole adds to the step response; see [`Tail`].
    #[must_use]
    pub fn tail(&self, pole: Complex<f64>, residue: Complex<f64>) -> Option<Tail> {
        if pole.re >= 0.0 {
            return None;
        }
        let sides = if pole.im == 0.0 { 1.0 } else { 2.0 };
        let size = sides * (residue / pole).norm();
        let settled = self.final_value().filter(|value| *value != 0.0);
        Some(Tail {
            size,
            of_final: settled.map(|value| size / value.abs()),
            time_constant: -1.0 / pole.re,
        })
    }
}

/// The term r/p·e^(p·t) that a simple pole p with residue r adds to the step response; the amplitude of
/// the pair for a complex one.
#[derive(Clone, Copy, Debug)]
pub struct Tail {
    /// Its size at t = 0, in units of the response.
    pub size: f64,
    /// The same as a fraction of the final value, where that is not zero.
    pub of_final: Option<f64>,
    /// The time in which it falls to 1/e, in seconds.
    pub time_constant: f64,
}

/// Integer coefficients of s^0, s^1, ….
#[must_use]
pub fn numbers(polynomial: &Polynomial) -> Vec<Big> {
    let coefficients = polynomial.coefficients(Symbol::S);
    let number = |it: &Polynomial| Big::from(&it.as_constant().unwrap_or_default());
    coefficients.iter().map(number).collect()
}
