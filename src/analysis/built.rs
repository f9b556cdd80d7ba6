//! A determinant by the route that its network allows: a diagram, or values modulo a prime.

use std::convert::Infallible;

use crate::algebra::univariate::Univariate;
use crate::algebra::{Integer, Polynomial, PolynomialRing, PrimeField, Symbol, UnivariateRing};
use crate::analysis::assembly::assemble;
use crate::analysis::contraction::{Singular, SingularKind};
use crate::analysis::determinant::{Determinant, Values, slot_symbols};
use crate::analysis::point::Point;
use crate::analysis::sampled::Sampled;
use crate::analysis::setup::{Frame, Insertion};
use crate::budget::{Budget, Exceeded};
use crate::network::Network;

/// A determinant that can be evaluated.
#[derive(Clone, Debug)]
pub(crate) enum Built {
    /// All its terms, shared.
    Diagram(Box<Determinant>),
    /// Its values modulo a prime.
    Sampled(Box<Sampled>),
}

/// Parts from which on a matrix is no way out.
const MANY: usize = 200_000;

impl Built {
    /// The diagram, or where that is too wide the matrix.
    pub(crate) fn new(
        network: &Network,
        frame: &Frame,
        insertion: &Insertion,
        budget: &Budget,
    ) -> Result<Result<Self, Singular>, Exceeded> {
        // Every part takes a state at least, and so many are too many for a matrix, too.
        let parts = network.elements().len();
        if parts > MANY {
            budget.states(parts)?;
        }
        match Determinant::build(network, frame, insertion, budget) {
            Ok(built) => Ok(built.map(|diagram| Self::Diagram(Box::new(diagram)))),
            Err(Exceeded::States(_)) => {
                let assembly = assemble(network, frame, insertion);
                match Sampled::build(assembly, budget) {
                    Ok(Some(sampled)) => Ok(Ok(Self::Sampled(Box::new(sampled)))),
                    Ok(None) => Ok(Err(Singular {
                        elements: Vec::new(),
                        kind: SingularKind::NoTree,
                    })),
                    Err(Exceeded::States(_)) if budget.width() < u64::MAX => {
                        let whole = budget.with_width(u64::MAX);
                        Self::new(network, frame, insertion, &whole)
                    }
                    Err(other) => Err(other),
                }
            }
            Err(other) => Err(other),
        }
    }

    /// The polynomial in s at a point.
    pub(crate) fn sample(&self, field: &PrimeField, point: &Point) -> Univariate {
        match self {
            Self::Diagram(diagram) => {
                let found: Result<Univariate, Infallible> =
                    diagram.value(&UnivariateRing { field: *field }, point);
                match found {
                    Ok(value) => value,
                    Err(never) => match never {},
                }
            }
            Self::Sampled(sampled) => sampled.value(field, point),
        }
    }

    /// The polynomial in all symbols.
    ///
    /// # Errors
    /// When a budget is reached, and where there is no diagram.
    pub(crate) fn expand(
        &self,
        ring: &PolynomialRing<'_>,
        values: &dyn for<'b> Values<PolynomialRing<'b>>,
    ) -> Result<Polynomial, Exceeded> {
        self.diagram(ring.budget)?.value(ring, values)
    }

    /// The diagram.
    ///
    /// # Errors
    /// Where it would have passed the budget.
    pub(crate) fn diagram(&self, budget: &Budget) -> Result<&Determinant, Exceeded> {
        match self {
            Self::Diagram(diagram) => Ok(diagram),
            Self::Sampled(_) => Err(Exceeded::States(budget.limits().states)),
        }
    }

    /// The symbols its values are made of.
    pub(crate) fn symbols(&self) -> Vec<Symbol> {
        slot_symbols(match self {
            Self::Diagram(diagram) => diagram.slots(),
            Self::Sampled(sampled) => sampled.slots(),
        })
    }

    /// Terms before like terms are gathered; `None` where they were not counted.
    pub(crate) fn term_count(&self) -> Option<Integer> {
        match self {
            Self::Diagram(diagram) => Some(diagram.term_count()),
            Self::Sampled(_) => None,
        }
    }
}
