//! Roots of exact polynomials with proven inclusion radii and exact multiplicities.
//!
//! Square-free parts give the multiplicities. Their roots are found by the simultaneous iteration of
//! Ehrlich (1967) and Aberth (1973) from starts on the circles of the Newton polygon (Bini 1996), with
//! growing precision, until the discs of Smith (1970) around them are small and apart: centre z_i,
//! radius n·|p(z_i) / (a_n · Π_{j≠i}(z_i − z_j))|; discs that touch no other hold one root each.

use crate::algebra::gcd::gcd;
use crate::algebra::{Polynomial, Symbol};
use crate::budget::{Budget, Exceeded};
use crate::numeric::big::{Big, BigComplex};

/// Bits of a root that are asked for: radius ≤ 2^−BITS · |root|.
const BITS: i64 = 110;

/// Most bits of an approximation.
const MOST_BITS: u64 = 1 << 15;

/// Rounds of the iteration at one precision.
const ROUNDS: usize = 60;

/// Relative safety of rounded comparisons: far above all rounding errors, far below what matters.
const SLACK: i64 = -40;

/// Bits of rounded products of distances.
const SHORT: u64 = 96;

/// A root of a polynomial: within `radius` of `centre`, alone there.
#[derive(Clone, Debug)]
pub struct Root {
    /// Centre of the disc; exactly real for a real root, conjugates in pairs.
    pub centre: BigComplex,
    /// Radius of the disc; 0 for a root that is exact.
    pub radius: Big,
    /// How often it is a root.
    pub multiplicity: u32,
}

impl Root {
    /// Whether it is proven to be real.
    #[must_use]
    pub fn is_real(&self) -> bool {
        self.centre.im.is_zero()
    }
}

/// The roots of a polynomial in s with integer coefficients, by size, upper half plane first.
/// Empty for constants.
///
/// # Errors
/// When the budget is reached, or the roots are not apart within the longest precision.
pub fn roots(polynomial: &Polynomial, budget: &Budget) -> Result<Vec<Root>, Exceeded> {
    let mut found = Vec::new();
    let zeros = polynomial.valuation(Symbol::S);
    if zeros > 0 && !polynomial.is_zero() {
        found.push(Root {
            centre: BigComplex::zero(),
            radius: Big::zero(),
            multiplicity: zeros,
        });
    }
    let coefficients = polynomial.coefficients(Symbol::S);
    let rest = coefficients.get(zeros as usize..).unwrap_or_default();
    let rest = Polynomial::from_coefficients(Symbol::S, rest);
    for (part, multiplicity) in square_free(&rest.primitive(), budget)? {
        for symmetric in by_symmetry(&part, budget)? {
            for (centre, radius) in simple_roots(&symmetric, budget)? {
                found.push(Root {
                    centre,
                    radius,
                    multiplicity,
                });
            }
        }
    }
    found.sort_by(|a, b| {
        let key = |root: &Root| root.centre.square_norm();
        let sizes = key(a).cmp(&key(b));
        let then = sizes.then_with(|| a.centre.re.cmp(&b.centre.re));
        then.then_with(|| b.centre.im.cmp(&a.centre.im))
    });
    Ok(found)
}

/// Square-free parts with their multiplicities (Yun 1976).
fn square_free(
    polynomial: &Polynomial,
    budget: &Budget,
) -> Result<Vec<(Polynomial, u32)>, Exceeded> {
    let mut parts = Vec::new();
    if polynomial.degree(Symbol::S) == 0 {
        return Ok(parts);
    }
    let divide = |a: &Polynomial, b: &Polynomial| a.div_exact(b).unwrap_or_else(|| a.clone());
    let derivative = polynomial.derivative(Symbol::S);
    let common = gcd(polynomial, &derivative, budget)?;
    let mut rest = divide(polynomial, &common);
    let mut slope = divide(&derivative, &common);
    let mut multiplicity = 1;
    while rest.degree(Symbol::S) > 0 {
        let difference = &slope - &rest.derivative(Symbol::S);
        let part = gcd(&rest, &difference, budget)?;
        if part.degree(Symbol::S) > 0 {
            parts.push((part.clone(), multiplicity));
        }
        rest = divide(&rest, &part);
        slope = divide(&difference, &part);
        multiplicity += 1;
    }
    Ok(parts)
}

/// The part whose roots are those of p(s) and of p(−s) as well, and the rest. Roots on the imaginary
/// axis are all in the first, which is even.
fn by_symmetry(polynomial: &Polynomial, budget: &Budget) -> Result<Vec<Polynomial>, Exceeded> {
    let mirrored: Vec<Polynomial> = polynomial
        .coefficients(Symbol::S)
        .into_iter()
        .enumerate()
        .map(|(power, it)| if power % 2 == 0 { it } else { -it })
        .collect();
    let mirrored = Polynomial::from_coefficients(Symbol::S, &mirrored);
    let even = gcd(polynomial, &mirrored, budget)?;
    if even.degree(Symbol::S) == 0 {
        return Ok(vec![polynomial.clone()]);
    }
    let rest = polynomial.div_exact(&even).unwrap_or_else(Polynomial::one);
    let mut parts = vec![even, rest];
    parts.retain(|part| part.degree(Symbol::S) > 0);
    Ok(parts)
}

/// Centre and radius of each root of a square-free polynomial that does not vanish at 0.
fn simple_roots(
    polynomial: &Polynomial,
    budget: &Budget,
) -> Result<Vec<(BigComplex, Big)>, Exceeded> {
    let coefficients: Vec<Big> = polynomial
        .coefficients(Symbol::S)
        .iter()
        .map(|it| Big::from(&it.as_constant().unwrap_or_default()))
        .collect();
    let degree = coefficients.len() - 1;
    if degree == 1 {
        let root = -coefficients[0].div(&coefficients[1], 192);
        let radius = root.abs().shift(-190);
        return Ok(vec![(BigComplex::real(root), radius)]);
    }
    let mut points = starts(&coefficients);
    let mut precision = 64;
    while precision <= MOST_BITS {
        iterate(&coefficients, &mut points, precision, budget)?;
        if precision > 64 {
            if is_even(&coefficients) {
                points
                    .iter_mut()
                    .for_each(|point| near_axis(point, precision));
            }
            let snapped = conjugate_pairs(&points);
            if let Some(discs) = snapped.and_then(|centres| proven(&coefficients, centres)) {
                return Ok(discs);
            }
        }
        precision *= 2;
    }
    Err(Exceeded::Bits(MOST_BITS))
}

fn is_even(coefficients: &[Big]) -> bool {
    coefficients.iter().skip(1).step_by(2).all(Big::is_zero)
}

/// Puts a point beside the imaginary axis on it. A disc that is symmetric to the axis holds the mirror
/// image of its root too; where it holds one root of an even polynomial, that root is on the axis.
fn near_axis(point: &mut BigComplex, precision: u64) {
    let margin = i64::try_from(precision / 2).unwrap_or(0);
    let beside = match (point.re.magnitude(), point.im.magnitude()) {
        (Some(re), Some(im)) => re < im - margin,
        _ => false,
    };
    if beside {
        point.re = Big::zero();
    }
}

/// Points on the circles of the Newton polygon: an edge from k to l of the upper hull of log|a| stands
/// for l − k roots of about the same size.
fn starts(coefficients: &[Big]) -> Vec<BigComplex> {
    let logs: Vec<Option<f64>> = coefficients.iter().map(logarithm).collect();
    let mut hull: Vec<(f64, f64)> = Vec::new();
    for (power, log) in logs.iter().enumerate() {
        let Some(log) = *log else { continue };
        let point = (index_to_f64(power), log);
        while let [.., a, b] = hull.as_slice()
            && (b.1 - a.1) * (point.0 - a.0) <= (point.1 - a.1) * (b.0 - a.0)
        {
            hull.pop();
        }
        hull.push(point);
    }
    let mut points = Vec::with_capacity(coefficients.len());
    for (edge, pair) in hull.windows(2).enumerate() {
        let (a, b) = (pair[0], pair[1]);
        let count = b.0 - a.0;
        let size = (a.1 - b.1) / count;
        let (whole, part) = (size.floor(), size - size.floor());
        let mut turn = 0.0;
        while turn < count {
            // An angle that is symmetric to no axis keeps the points apart from their conjugates.
            let angle = std::f64::consts::TAU * turn / count + 0.7 + 0.31 * index_to_f64(edge);
            let unit = part.exp2();
            let place = |value: f64| Big::from_f64(unit * value).shift(float_to_exponent(whole));
            points.push(BigComplex {
                re: place(angle.cos()),
                im: place(angle.sin()),
            });
            turn += 1.0;
        }
    }
    points
}

/// log2|a|; `None` for 0.
fn logarithm(value: &Big) -> Option<f64> {
    let magnitude = value.magnitude()?;
    let unit = value.abs().shift(-magnitude).to_f64();
    Some(unit.log2() + exponent_to_f64(magnitude))
}

#[allow(clippy::cast_precision_loss)]
fn index_to_f64(index: usize) -> f64 {
    index as f64
}

#[allow(clippy::cast_precision_loss)]
fn exponent_to_f64(exponent: i64) -> f64 {
    exponent as f64
}

#[allow(clippy::cast_possible_truncation)]
fn float_to_exponent(value: f64) -> i64 {
    value as i64
}

/// The iteration z ← z − w/(1 − w·Σ 1/(z − z_j)), w = p(z)/p′(z), until it moves little.
fn iterate(
    coefficients: &[Big],
    points: &mut [BigComplex],
    precision: u64,
    budget: &Budget,
) -> Result<(), Exceeded> {
    let one = BigComplex::real(Big::power_of_two(0));
    let settled_at = i64::try_from(precision / 2).unwrap_or(0);
    let mut settled = vec![false; points.len()];
    for _ in 0..ROUNDS {
        budget.time()?;
        for index in 0..points.len() {
            if settled[index] {
                continue;
            }
            let point = points[index].clone();
            let (value, slope) = value_and_slope(coefficients, &point, precision);
            if value == BigComplex::zero() {
                settled[index] = true;
                continue;
            }
            let newton = value.div(&slope, precision);
            let mut sum = BigComplex::zero();
            for (other, place) in points.iter().enumerate() {
                if other != index {
                    let distance = &point - place;
                    sum = (&sum + &one.div(&distance, precision)).round(precision);
                }
            }
            let damped = &one - &(&newton * &sum).round(precision);
            let step = newton.div(&damped, precision);
            points[index] = (&point - &step).round(precision);
            let (moved, size) = (size(&step), size(&points[index]));
            settled[index] = moved < size.saturating_sub(settled_at);
        }
        if settled.iter().all(|settled| *settled) {
            break;
        }
    }
    Ok(())
}

/// The larger magnitude of both parts.
fn size(value: &BigComplex) -> i64 {
    let parts = [value.re.magnitude(), value.im.magnitude()];
    parts.into_iter().flatten().max().unwrap_or(i64::MIN / 2)
}

fn value_and_slope(
    coefficients: &[Big],
    at: &BigComplex,
    precision: u64,
) -> (BigComplex, BigComplex) {
    let (mut value, mut slope) = (BigComplex::zero(), BigComplex::zero());
    for coefficient in coefficients.iter().rev() {
        slope = (&(&slope * at) + &value).round(precision);
        value = &value * at;
        value.re = &value.re + coefficient;
        value = value.round(precision);
    }
    (value, slope)
}

/// Σ c_k · at^k, exactly.
#[must_use]
pub fn value_at(coefficients: &[Big], at: &BigComplex) -> BigComplex {
    let mut value = BigComplex::zero();
    for coefficient in coefficients.iter().rev() {
        value = &value * at;
        value.re = &value.re + coefficient;
    }
    value
}

/// The points with real ones put on the axis and the others in conjugate pairs; `None` where they do
/// not pair.
fn conjugate_pairs(points: &[BigComplex]) -> Option<Vec<BigComplex>> {
    let mut centres: Vec<Option<BigComplex>> = vec![None; points.len()];
    for index in 0..points.len() {
        if centres[index].is_some() {
            continue;
        }
        let mirror = points[index].conjugate();
        let nearest = (0..points.len())
            .filter(|&other| centres[other].is_none())
            .min_by_key(|&other| (&points[other] - &mirror).square_norm())?;
        if nearest == index {
            centres[index] = Some(BigComplex::real(points[index].re.clone()));
        } else {
            centres[nearest] = Some(mirror);
            centres[index] = Some(points[index].clone());
        }
    }
    centres.into_iter().collect()
}

/// Discs around the centres, where all are small and none touches another.
fn proven(coefficients: &[Big], centres: Vec<BigComplex>) -> Option<Vec<(BigComplex, Big)>> {
    let degree = Big::from_f64(index_to_f64(centres.len()));
    let lead = coefficients.last()?;
    let mut radii = Vec::with_capacity(centres.len());
    let mut distances: Vec<Vec<Big>> = vec![Vec::with_capacity(centres.len()); centres.len()];
    for (index, centre) in centres.iter().enumerate() {
        let value = value_at(coefficients, centre);
        let mut product = (lead * lead).round(SHORT);
        for (other, place) in centres.iter().enumerate() {
            let square = if other < index {
                distances[other][index].clone()
            } else {
                (centre - place).square_norm().round(SHORT)
            };
            if other != index {
                if square.is_zero() {
                    return None;
                }
                product = (&product * &square).round(SHORT);
            }
            distances[index].push(square);
        }
        let square = value.square_norm().round(SHORT).div(&product, SHORT);
        let radius = &square.sqrt(SHORT) * &degree;
        let radius = (&radius + &radius.shift(SLACK)).round(SHORT);
        let wanted = size(centre) - BITS;
        if radius.magnitude().is_some_and(|size| size > wanted) {
            return None;
        }
        radii.push(radius);
    }
    for first in 0..centres.len() {
        for second in 0..first {
            let reach = &radii[first] + &radii[second];
            let reach = (&reach + &reach.shift(SLACK)).round(SHORT);
            if &reach * &reach >= distances[first][second] {
                return None;
            }
        }
    }
    Some(centres.into_iter().zip(radii).collect())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::algebra::Integer;
    use nalgebra::Complex;

    fn product(factors: &[(i64, u32)]) -> Polynomial {
        let mut all = Polynomial::one();
        for &(root, multiplicity) in factors {
            let factor = &Polynomial::symbol(Symbol::S) - &Polynomial::constant(root);
            all = &all * &factor.pow(multiplicity);
        }
        all
    }

    fn of(coefficients: &[i64]) -> Polynomial {
        let coefficients: Vec<Polynomial> = coefficients
            .iter()
            .map(|&it| Polynomial::constant(it))
            .collect();
        Polynomial::from_coefficients(Symbol::S, &coefficients)
    }

    fn found(polynomial: &Polynomial) -> Vec<(Complex<f64>, u32)> {
        let found = roots(polynomial, &Budget::unlimited()).expect("apart");
        for root in &found {
            assert!(root.radius.to_f64() <= 1e-30 * root.centre.to_f64().norm());
        }
        found
            .iter()
            .map(|root| (root.centre.to_f64(), root.multiplicity))
            .collect()
    }

    #[test]
    fn multiplicities_are_exact() {
        let polynomial = product(&[(-1, 1), (-2, 3), (5, 2), (0, 4)]);
        let found = found(&polynomial);
        let expected = [(0.0, 4), (-1.0, 1), (-2.0, 3), (5.0, 2)];
        assert_eq!(found.len(), expected.len());
        for ((root, count), (place, multiplicity)) in found.into_iter().zip(expected) {
            assert_eq!((root.re, root.im, count), (place, 0.0, multiplicity));
        }
    }

    #[test]
    fn the_first_twenty_numbers() {
        // Wilkinson 1959: the roots 1 … 20 move by whole units where coefficients move by 2⁻²³.
        let factors: Vec<(i64, u32)> = (1..=20).map(|root| (root, 1)).collect();
        for ((root, _), place) in found(&product(&factors)).iter().zip(1_i32..) {
            assert_eq!((root.re, root.im), (f64::from(place), 0.0));
        }
    }

    #[test]
    fn complex_pairs_are_conjugate() {
        // s⁴ + 1: the eighth roots of unity that are no fourth roots.
        let found = found(&of(&[1, 0, 0, 0, 1]));
        let half = std::f64::consts::FRAC_1_SQRT_2;
        let expected = [(-half, half), (-half, -half), (half, half), (half, -half)];
        for ((root, _), (re, im)) in found.iter().zip(expected) {
            assert_eq!((root.re, root.im), (re, im));
        }
    }

    #[test]
    fn roots_on_the_imaginary_axis_are_exactly_there() {
        // (s² + 2)(s² + 3)²(s + 1)(s² − 5)
        let s = Polynomial::symbol(Symbol::S);
        let plus = |number: i64| &(&s * &s) + &Polynomial::constant(number);
        let step = &s + &Polynomial::one();
        let polynomial = &(&(&plus(2) * &plus(3).pow(2)) * &step) * &plus(-5);
        let found = found(&polynomial);
        let on_axis: Vec<_> = found.iter().filter(|(root, _)| root.im != 0.0).collect();
        assert_eq!(on_axis.len(), 4);
        assert!(on_axis.iter().all(|(root, _)| root.re == 0.0));
        assert_eq!(found.iter().map(|(_, count)| count).sum::<u32>(), 9);
    }

    #[test]
    fn sizes_may_differ_by_thirty_decades() {
        let large = Polynomial::constant(Integer::from(10).pow(15));
        let s = Polynomial::symbol(Symbol::S);
        let one = Polynomial::one();
        let polynomial = &(&(&s + &large) * &(&(&s * &large) + &one)) * &(&s + &one);
        let found = found(&polynomial);
        let places: Vec<f64> = found.iter().map(|(root, _)| root.re).collect();
        assert_eq!(places, [-1e-15, -1.0, -1e15]);
    }

    #[test]
    fn close_roots_are_told_apart() {
        // 2 (1000 s + 1)² = s⁴: two roots near −0.001, some 1e-9 apart (Mignotte).
        let found = found(&of(&[2, 4000, 2_000_000, 0, -1]));
        assert_eq!(found.len(), 4);
        let gap = (found[0].0 - found[1].0).norm();
        assert!(gap > 0.0 && gap < 1e-8);
    }

    #[test]
    fn ladders_have_their_closed_form() {
        // Equal RC sections driven by a source, open at the end: s = −2 + 2·cos((2k − 1)·π/(2n + 1)).
        let (one, s) = (Polynomial::one(), Polynomial::symbol(Symbol::S));
        let step = &s + &Polynomial::constant(2);
        let (mut last, mut now) = (one.clone(), &one + &s);
        let sections = 40_u32;
        for _ in 1..sections {
            let next = &(&step * &now) - &last;
            last = std::mem::replace(&mut now, next);
        }
        let found = found(&now);
        let whole = f64::from(2 * sections + 1);
        for (k, (root, _)) in (1_u32..).zip(&found) {
            let angle = f64::from(2 * k - 1) * std::f64::consts::PI / whole;
            let expected = -4.0 * (angle / 2.0).sin().powi(2);
            assert_eq!(root.im, 0.0);
            assert!((root.re / expected - 1.0).abs() < 1e-14);
        }
    }
}
