//! Evaluation at large integers, one variable at a time, proven by division; where the integers would
//! grow beyond reason, the primitive remainder sequence.

use super::sparse;
use crate::algebra::integer::Integer;
use crate::algebra::monomial::Monomial;
use crate::algebra::polynomial::Polynomial;
use crate::algebra::rational::Rational;
use crate::algebra::symbol::Symbol;
use crate::budget::{Budget, Exceeded};

/// Bits beyond which evaluation stops to pay.
const BITS: u64 = 40_000;

/// gcd of two polynomials in `variables`, up to sign.
pub(super) fn gcd(
    a: &Polynomial,
    b: &Polynomial,
    variables: &[Symbol],
    budget: &Budget,
) -> Result<Polynomial, Exceeded> {
    if variables.len() <= 3
        && let Some(found) = evaluated(a, b, variables)
    {
        return Ok(found);
    }
    if let Some(found) = sparse::gcd(a, b, variables, budget)? {
        return Ok(found);
    }
    remainders(a, b, variables, budget)
}

fn evaluated(a: &Polynomial, b: &Polynomial, variables: &[Symbol]) -> Option<Polynomial> {
    let number = a.content().gcd(&b.content());
    let Some((&variable, rest)) = variables.split_first() else {
        return Some(Polynomial::constant(number));
    };
    let (a, b) = (a.primitive(), b.primitive());
    let mut point = Integer::from(2) * height(&a).min(height(&b)) + Integer::from(29);
    for _ in 0..6 {
        let degree = u64::from(a.degree(variable).max(b.degree(variable)));
        if point.bits() * degree > BITS {
            return None;
        }
        let at = |polynomial: &Polynomial| {
            let value = Rational::from(point.clone());
            polynomial
                .evaluate(&|symbol| (symbol == variable).then(|| value.clone()))
                .0
        };
        let (left, right) = (at(&a), at(&b));
        if !left.is_zero() && !right.is_zero() {
            let image = evaluated(&left, &right, rest)?;
            let found = expand(image, variable, &point).primitive();
            if a.div_exact(&found).is_some() && b.div_exact(&found).is_some() {
                return Some(found.scale(&number));
            }
        }
        point = (point * Integer::from(73_794)).div_floor(&Integer::from(27_011));
    }
    None
}

/// Largest absolute coefficient.
fn height(polynomial: &Polynomial) -> Integer {
    polynomial
        .terms()
        .iter()
        .map(|(_, coefficient)| coefficient.abs())
        .max()
        .unwrap_or_default()
}

/// The polynomial in `variable` whose value at `point` is `image`, with small coefficients.
fn expand(image: Polynomial, variable: Symbol, point: &Integer) -> Polynomial {
    let half = point.div_floor(&Integer::from(2));
    let mut rest = image;
    let mut sum = Polynomial::zero();
    let mut power = 0;
    while !rest.is_zero() {
        let digit = Polynomial::from_terms(rest.terms().iter().map(|(monomial, coefficient)| {
            let quotient = coefficient.div_floor(point);
            let mut low = coefficient - &(&quotient * point);
            if low > half {
                low -= point;
            }
            (monomial.clone(), low)
        }));
        sum = &sum + &digit.mul_monomial(&Monomial::power(variable, power));
        rest = (&rest - &digit).div_integer(point).unwrap_or_default();
        power += 1;
    }
    sum
}

/// Primitive pseudo-remainder sequence in the first variable (Collins; Brown).
fn remainders(
    a: &Polynomial,
    b: &Polynomial,
    variables: &[Symbol],
    budget: &Budget,
) -> Result<Polynomial, Exceeded> {
    let Some((&variable, rest)) = variables.split_first() else {
        return Ok(Polynomial::constant(a.content().gcd(&b.content())));
    };
    let (content_a, mut a) = split(a, variable, rest, budget)?;
    let (content_b, mut b) = split(b, variable, rest, budget)?;
    let content = gcd(&content_a, &content_b, rest, budget)?;
    if a.degree(variable) < b.degree(variable) {
        std::mem::swap(&mut a, &mut b);
    }
    while b.degree(variable) > 0 {
        budget.time()?;
        let remainder = pseudo_remainder(&a, &b, variable, budget)?;
        a = b;
        if remainder.is_zero() {
            return Ok(&a * &content);
        }
        b = split(&remainder, variable, rest, budget)?.1;
    }
    Ok(if b.is_zero() { &a * &content } else { content })
}

/// Content with respect to a variable, and the primitive part.
fn split(
    polynomial: &Polynomial,
    variable: Symbol,
    rest: &[Symbol],
    budget: &Budget,
) -> Result<(Polynomial, Polynomial), Exceeded> {
    let mut content = Polynomial::zero();
    for coefficient in polynomial.coefficients(variable) {
        content = if content.is_zero() {
            coefficient
        } else if coefficient.is_zero() {
            content
        } else {
            gcd(&content, &coefficient, rest, budget)?
        };
        if content.is_one() {
            break;
        }
    }
    let primitive = polynomial
        .div_exact(&content)
        .unwrap_or_else(|| polynomial.clone());
    Ok((content, primitive))
}

fn pseudo_remainder(
    a: &Polynomial,
    b: &Polynomial,
    variable: Symbol,
    budget: &Budget,
) -> Result<Polynomial, Exceeded> {
    let lead = b.leading_coefficient(variable);
    let degree = b.degree(variable);
    let mut rest = a.clone();
    while !rest.is_zero() && rest.degree(variable) >= degree {
        let shift = Monomial::power(variable, rest.degree(variable) - degree);
        let top = rest.leading_coefficient(variable).mul_monomial(&shift);
        rest = &rest.product(&lead, budget)? - &top.product(b, budget)?;
    }
    Ok(rest)
}
