//! A question as a quotient of determinants, and its value at points modulo a prime.

use std::collections::BTreeSet;

use crate::algebra::univariate::Univariate;
use crate::algebra::{Polynomial, PrimeField, Symbol};
use crate::analysis::determinant::{Determinant, Singular};
use crate::analysis::point::{Choice, Point};
use crate::analysis::setup::{Insertion, Scale, Setup};
use crate::budget::{Budget, Exceeded};
use crate::network::{Ask, Network, Question, RelationId};

/// Numerator and denominator of a question before anything cancels.
pub(crate) struct Pairing {
    upper: Side,
    lower: Side,
}

/// A signed sum of determinants times a polynomial.
struct Side {
    terms: Vec<(bool, Determinant)>,
    factor: Polynomial,
}

/// N and D at a point, as polynomials in s modulo the prime.
pub(crate) struct Sample {
    /// Numerator.
    pub(crate) numerator: Univariate,
    /// Denominator.
    pub(crate) denominator: Univariate,
}

