//! A question as a quotient of determinants, evaluated over any layer of values.

use std::collections::BTreeSet;
use std::convert::Infallible;

use crate::algebra::univariate::Univariate;
use crate::algebra::{
    Polynomial, PolynomialRing, PrimeField, Ring, Series, SeriesRing, Symbol, UnivariateRing,
};
use crate::analysis::built::Built;
use crate::analysis::contraction::Singular;
use crate::analysis::determinant::Values;
use crate::analysis::point::{Choice, Point, Terms};
use crate::analysis::setup::{Frame, Insertion, Response};
use crate::budget::{Budget, Exceeded};
use crate::network::{Ask, ElementId, Network, RelationId};

/// Numerator and denominator of a question before anything cancels.
pub(crate) struct Pairing {
    upper: Side,
    lower: Side,
    /// Order of the network the question is asked in is the degree of the lower determinant.
    field: PrimeField,
    /// Whole polynomials in s would take too long; see [`Pairing::extremes`].
    large: bool,
}

/// A difference of determinants times a polynomial. A determinant that is zero whatever the values is
/// `None`.
struct Side {
    plus: Option<Built>,
    minus: Option<Built>,
    factor: Polynomial,
}

/// N and D at a point, as polynomials in s modulo the prime.
#[derive(Clone, Debug)]
pub(crate) struct Sample {
    /// Numerator.
    pub(crate) numerator: Univariate,
    /// Denominator.
    pub(crate) denominator: Univariate,
    /// The lower determinant alone.
    pub(crate) network: Univariate,
}

/// Degree and multiplicity of s = 0, where polynomials are too long to be computed.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Extremes {
    /// Of the numerator; `None` for zero.
    pub(crate) numerator: Option<(u32, u32)>,
    /// Of the denominator.
    pub(crate) denominator: (u32, u32),
}

/// Terms that series keep, one attempt after the other.
const KEPT: [usize; 3] = [2, 8, 64];

/// The determinants of a question, or the contradiction that makes the lower one vanish.
pub(crate) enum Paired {
    /// Both sides.
    Pairing(Box<Pairing>),
    /// The network of the question has no unique solution.
    Singular(Singular),
}

impl Pairing {
    /// The determinants of a question that is asked of the network itself.
    pub(crate) fn of(
        network: &Network,
        ask: &Ask,
        without: &[ElementId],
        budget: &Budget,
    ) -> Result<Option<Paired>, Exceeded> {
        let Some(frame) = Frame::of(ask, without) else {
            return Ok(None);
        };
        let build = |insertion: &Insertion| Built::new(network, &frame, insertion, budget);
        let respond = |combination| {
            let response = Response::new(combination);
            let denominator = response.denominator.clone();
            let built = build(&Insertion::Response(response))?;
            Ok::<_, Exceeded>((built, denominator))
        };
        let one = Polynomial::one;
        let (upper, lower) = match ask {
            Ask::Transfer { response, .. } => {
                let (upper, denominator) = respond(response)?;
                (
                    Side::of(upper.ok(), one()),
                    (build(&Insertion::None)?, denominator),
                )
            }
            Ask::Ratio { upper, lower, .. } => {
                let (above, above_denominator) = respond(upper)?;
                let (below, below_denominator) = respond(lower)?;
                (
                    Side::of(above.ok(), below_denominator),
                    (below, above_denominator),
                )
            }
            Ask::Impedance(port) => (
                Side::of(build(&Insertion::Short(*port))?.ok(), one()),
                (build(&Insertion::None)?, one()),
            ),
            Ask::Admittance(port) => (
                Side::of(build(&Insertion::None)?.ok(), one()),
                (build(&Insertion::Short(*port))?, one()),
            ),
            Ask::ReturnRatio(parts) => {
                let quiet: BTreeSet<ElementId> = parts.iter().copied().collect();
                let still = build(&Insertion::Quiet(quiet))?;
                let mut upper = Side::of(build(&Insertion::None)?.ok(), one());
                upper.minus = still.clone().ok();
                (upper, (still, one()))
            }
            Ask::Function(_) | Ask::Limit { .. } | Ask::FirstOrder { .. } => return Ok(None),
        };
        let (built, factor) = lower;
        let reactive = reactive(network);
        budget.time()?;
        let mut determinants = built.iter().chain(&upper.plus).chain(&upper.minus);
        let large = determinants.any(|determinant| is_large(determinant, reactive));
        Ok(Some(match built {
            Ok(determinant) => Paired::Pairing(Box::new(Self {
                upper,
                lower: Side::of(Some(determinant), factor),
                field: PrimeField::default_prime(),
                large,
            })),
            Err(singular) => Paired::Singular(singular),
        }))
    }

    /// The network alone: its determinant over 1.
    pub(crate) fn network(
        network: &Network,
        without: &[ElementId],
        budget: &Budget,
    ) -> Result<Paired, Exceeded> {
        let frame = Frame::without(without);
        let built = Built::new(network, &frame, &Insertion::None, budget)?;
        budget.time()?;
        let large = built
            .as_ref()
            .is_ok_and(|determinant| is_large(determinant, reactive(network)));
        Ok(match built {
            Ok(determinant) => Paired::Pairing(Box::new(Self {
                upper: Side::of(None, Polynomial::one()),
                lower: Side::of(Some(determinant), Polynomial::one()),
                field: PrimeField::default_prime(),
                large,
            })),
            Err(singular) => Paired::Singular(singular),
        })
    }

    /// The field of all samples.
    pub(crate) fn field(&self) -> &PrimeField {
        &self.field
    }

    /// N and D at a point; `None` at an unlucky one.
    pub(crate) fn sample(&self, network: &Network, choice: &Choice<'_>) -> Option<Sample> {
        let point = Point::new(network, &self.field, choice)?;
        Some(self.at(&point))
    }

    /// N and D at a point.
    pub(crate) fn at(&self, point: &Point) -> Sample {
        let network = match &self.lower.plus {
            Some(determinant) => determinant.sample(&self.field, point),
            None => Univariate::zero(),
        };
        let (factor, below) = match Values::<UnivariateRing>::polynomial(point, &self.lower.factor)
        {
            Ok(pair) => pair,
            Err(never) => match never {},
        };
        let upper = self.upper.sample(&self.field, point);
        Sample {
            numerator: upper.mul(&below, &self.field),
            denominator: network.mul(&factor, &self.field),
            network,
        }
    }

    /// Whether only [`Pairing::extremes`] are to be had.
    pub(crate) fn is_large(&self) -> bool {
        self.large
    }

    /// The ends of numerator, denominator and lower determinant at a point of a large pairing; `None`
    /// where they are not decided.
    pub(crate) fn extremes(&self, network: &Network, seed: u64) -> Option<Extremes> {
        let choice = Choice {
            seed,
            shift: 0,
            released: &|_| false,
            salt: None,
        };
        let point = Point::new(network, &self.field, &choice)?;
        let of = |side: &Side| {
            let degree = side.lowest(&self.field, &point, true)?;
            let valuation = side.lowest(&self.field, &point, false)?;
            let number = |power: i64| u32::try_from(power).ok();
            Some(match (degree, valuation) {
                (Some(degree), Some(valuation)) => Some((number(-degree)?, number(valuation)?)),
                _ => None,
            })
        };
        Some(Extremes {
            numerator: of(&self.upper)?,
            denominator: of(&self.lower)??,
        })
    }

    /// Some sample at the given relations, at the first lucky seed from `seed` on.
    pub(crate) fn lucky(
        &self,
        network: &Network,
        seed: u64,
        shift: u64,
        released: &dyn Fn(RelationId) -> bool,
    ) -> Option<Sample> {
        (seed..seed + 64).find_map(|seed| {
            let choice = Choice {
                seed,
                shift,
                released,
                salt: None,
            };
            self.sample(network, &choice)
        })
    }

    /// N and D as polynomials.
    pub(crate) fn expand(
        &self,
        ring: &PolynomialRing<'_>,
        values: &dyn for<'b> Values<PolynomialRing<'b>>,
    ) -> Result<(Polynomial, Polynomial), Exceeded> {
        let numerator = self.upper.expand(ring, values)?;
        let denominator = self.lower.expand(ring, values)?;
        Ok((numerator, denominator))
    }

    /// Terms of N and D before like terms are gathered.
    pub(crate) fn term_counts(&self) -> (crate::algebra::Integer, crate::algebra::Integer) {
        let count = |side: &Side| {
            [&side.plus, &side.minus]
                .into_iter()
                .flatten()
                .filter_map(Built::term_count)
                .fold(crate::algebra::Integer::zero(), |sum, count| sum + count)
        };
        (count(&self.upper), count(&self.lower))
    }

    /// The symbols of all values.
    pub(crate) fn symbols(&self) -> BTreeSet<Symbol> {
        [&self.upper, &self.lower]
            .into_iter()
            .flat_map(|side| {
                let determinants = [&side.plus, &side.minus].into_iter().flatten();
                let values = determinants.flat_map(Built::symbols);
                values.chain(side.factor.symbols()).collect::<Vec<_>>()
            })
            .collect()
    }

    /// Fails where it is plain from the number of spanning trees that an expanded determinant would
    /// pass the budget. Tells nothing where relations let terms merge.
    pub(crate) fn writable(&self, network: &Network, budget: &Budget) -> Result<(), Exceeded> {
        if network.relations().len() > 0 {
            return Ok(());
        }
        for determinant in [&self.upper.plus, &self.lower.plus].into_iter().flatten() {
            if let Some(count) = determinant.diagram(budget)?.distinct_terms() {
                budget.terms(
                    count
                        .to_i64()
                        .and_then(|count| usize::try_from(count).ok())
                        .unwrap_or(usize::MAX),
                )?;
            }
        }
        Ok(())
    }

    /// The determinants of both sides: (plus, minus, factor).
    pub(crate) fn sides(&self) -> [(Option<&Built>, Option<&Built>, &Polynomial); 2] {
        [&self.upper, &self.lower]
            .map(|side| (side.plus.as_ref(), side.minus.as_ref(), &side.factor))
    }
}

/// Multiplications one sweep over polynomials in s may take.
const SWEEP: usize = 200_000_000;

/// Sweeps take about one multiplication for each state and power of s.
fn is_large(determinant: &Built, reactive: usize) -> bool {
    match determinant {
        Built::Diagram(diagram) => diagram.states().saturating_mul(reactive + 1) > SWEEP,
        Built::Sampled(_) => false,
    }
}

fn reactive(network: &Network) -> usize {
    network
        .elements()
        .filter(|(_, element)| element.is_reactive())
        .count()
}

impl Side {
    fn of(plus: Option<Built>, factor: Polynomial) -> Self {
        Self {
            plus,
            minus: None,
            factor,
        }
    }

    /// The lowest power of s, or of 1/s; `Some(None)` for zero, `None` where it is not decided.
    fn lowest(&self, field: &PrimeField, point: &Point, inverse: bool) -> Option<Option<i64>> {
        for terms in KEPT {
            let ring = SeriesRing {
                field: *field,
                terms,
                inverse,
            };
            let found = match self.series(ring, point)? {
                Ok(found) => found,
                Err(never) => match never {},
            };
            if found.low().is_some() || found.is_zero() {
                return Some(found.low());
            }
        }
        None
    }

    /// The value as a series; `None` without a diagram.
    fn series(&self, ring: SeriesRing, point: &Point) -> Option<Result<Series, Infallible>> {
        let values = Terms { point, ring };
        let one = |side: &Option<Built>| match side {
            Some(Built::Diagram(diagram)) => Some(diagram.value(&ring, &values)),
            Some(Built::Sampled(_)) => None,
            None => Some(Ok(ring.zero())),
        };
        let (plus, minus) = (one(&self.plus)?, one(&self.minus)?);
        let (Ok(plus), Ok(minus), Ok((factor, _))) = (plus, minus, values.polynomial(&self.factor));
        let Ok(sum) = ring.add(&plus, &ring.neg(&minus));
        Some(ring.mul(&sum, &factor))
    }

    fn sample(&self, field: &PrimeField, point: &Point) -> Univariate {
        let one = |side: &Option<Built>| match side {
            Some(determinant) => determinant.sample(field, point),
            None => Univariate::zero(),
        };
        let sum = one(&self.plus).sub(&one(&self.minus), field);
        match Values::<UnivariateRing>::polynomial(point, &self.factor) {
            Ok((factor, _)) => sum.mul(&factor, field),
            Err(never) => match never {},
        }
    }

    fn expand(
        &self,
        ring: &PolynomialRing<'_>,
        values: &dyn for<'b> Values<PolynomialRing<'b>>,
    ) -> Result<Polynomial, Exceeded> {
        let one = |side: &Option<Built>| match side {
            Some(determinant) => determinant.expand(ring, values),
            None => Ok(ring.zero()),
        };
        let minus = ring.neg(&one(&self.minus)?);
        let sum = ring.add(&one(&self.plus)?, &minus)?;
        if self.factor.is_one() {
            return Ok(sum);
        }
        ring.mul(&sum, &values.polynomial(&self.factor)?.0)
    }
}
