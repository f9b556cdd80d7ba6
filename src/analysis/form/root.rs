//! Square roots of positive quotients, squares taken out.

use crate::algebra::gcd::cofactors;
use crate::algebra::{Fraction, Integer, Monomial, Polynomial, Symbol};
use crate::analysis::form::tree::Form;
use crate::analysis::form::write::Writer;
use crate::budget::{Budget, Exceeded};
use crate::network::{Network, Sign};

/// √square/divisor, proven by its square; `None` where the proof fails. The root is the one with a
/// positive leading coefficient, which for a positive polynomial is the positive one.
///
/// # Errors
/// When the budget is reached.
pub(crate) fn root(
    square: &Polynomial,
    divisor: &Polynomial,
    writer: &Writer<'_>,
    budget: &Budget,
) -> Result<Option<Form>, Exceeded> {
    let (outer, under) = without_squares(square);
    let Some(front) = Fraction::new(outer, divisor.clone(), budget)? else {
        return Ok(None);
    };
    // √ρ/(c·d) = √(ρ/c²)/d
    let (common, rest, below) = cofactors(&under, front.denominator(), budget)?;
    let outer = writer.ratio(front.numerator(), &below)?;
    let inner = match writer.ratio(&rest, &common)? {
        form if form.is_one() => Form::one(),
        Form::Quotient(over, under) if over.is_one() => {
            Form::quotient(Form::one(), Form::Root(under))
        }
        form => Form::Root(Box::new(form)),
    };
    let form = Form::product([outer, inner]);
    let Some((outer, under)) = form.surd(budget)? else {
        return Ok(None);
    };
    let outer = outer.mul(&Fraction::from(divisor.clone()), budget)?;
    let found = outer.mul(&outer, budget)?.mul(&under, budget)?;
    Ok((found == Fraction::from(square.clone())).then_some(form))
}

/// √value where that is a fraction, with a positive leading coefficient.
pub(crate) fn exact_root(value: &Fraction, budget: &Budget) -> Result<Option<Fraction>, Exceeded> {
    let (above, above_root) = without_squares(value.numerator());
    let (below, below_root) = without_squares(value.denominator());
    if !above_root.is_one() || !below_root.is_one() {
        return Ok(None);
    }
    Fraction::new(above, below, budget)
}

/// Whether every term is positive by what was stated for its symbols.
pub(crate) fn positive(network: &Network, value: &Polynomial) -> bool {
    let stated = |symbol: Symbol| {
        let facts = network.facts(symbol);
        symbol == Symbol::PI || facts.is_some_and(|facts| facts.sign == Sign::Positive)
    };
    let terms = value.terms();
    !terms.is_empty()
        && terms.iter().all(|(_, number)| number.signum() > 0)
        && value.symbols().into_iter().all(stated)
}

/// A positive polynomial as square and rest: the root of the former, and the latter.
fn without_squares(value: &Polynomial) -> (Polynomial, Polynomial) {
    let content = value.content();
    let (outer_number, inner_number) = match content.square_root() {
        Some(number) => (number, Integer::one()),
        None => (Integer::one(), content.clone()),
    };
    let (mut outer, mut inner) = (Monomial::one(), Monomial::one());
    for (symbol, exponent) in value.monomial_content().factors() {
        outer = outer.mul(&Monomial::power(symbol, exponent / 2));
        inner = inner.mul(&Monomial::power(symbol, exponent % 2));
    }
    let shared = Polynomial::monomial(content, value.monomial_content());
    let sum = value.div_exact(&shared).unwrap_or_else(Polynomial::one);
    let (whole, under) = match square_root(&sum) {
        Some(whole) => (whole, Polynomial::one()),
        None => (Polynomial::one(), sum),
    };
    let under = &under * &Polynomial::monomial(inner_number, inner);
    let front = &whole * &Polynomial::monomial(outer_number, outer);
    (front, under)
}

/// The polynomial whose square this is: term after term from the leading one.
fn square_root(square: &Polynomial) -> Option<Polynomial> {
    let (monomial, coefficient) = square.terms().first()?;
    let mut half = Monomial::one();
    for (symbol, exponent) in monomial.factors() {
        if exponent % 2 == 1 {
            return None;
        }
        half = half.mul(&Monomial::power(symbol, exponent / 2));
    }
    let lead = coefficient.square_root()?;
    let mut root = Polynomial::monomial(lead.clone(), half.clone());
    let double = &lead + &lead;
    for _ in 0..=square.len() {
        let rest = square - &(&root * &root);
        let Some((monomial, coefficient)) = rest.terms().first() else {
            return Some(root);
        };
        let next = Polynomial::monomial(coefficient.div_exact(&double)?, monomial.div(&half)?);
        root = &root + &next;
    }
    None
}
