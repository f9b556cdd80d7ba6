//! Irreducible factors of polynomials over the integers.
//!
//! Contents first, one variable at a time; a polynomial linear in a variable with coprime coefficients
//! is irreducible, which settles nearly all polynomials of networks. What is left is made square-free,
//! freed of variables that a grading determines, and brought to one variable (Kronecker); univariate
//! polynomials are factored modulo one large prime (Zassenhaus; Cantor & Zassenhaus 1981).

mod grading;
mod univariate;

use crate::algebra::choice::choices;
use crate::algebra::gcd::gcd;
use crate::algebra::integer::Integer;
use crate::algebra::monomial::Monomial;
use crate::algebra::polynomial::Polynomial;
use crate::algebra::symbol::Symbol;
use crate::budget::{Budget, Exceeded};

/// A polynomial as a product: unit · Π factor^power.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Factorisation {
    /// The number in front, with the sign.
    pub unit: Integer,
    /// Irreducible primitive factors with positive leading coefficients, sorted.
    pub factors: Vec<(Polynomial, u32)>,
}

/// Highest degree that is brought to one variable.
const MAX_DEGREE: u32 = 160;

/// Factors a polynomial; zero has unit 0 and no factors.
///
/// # Errors
/// When the budget is reached, or when the factors cannot be told within reason.
pub fn factor(polynomial: &Polynomial, budget: &Budget) -> Result<Factorisation, Exceeded> {
    if polynomial.is_zero() {
        return Ok(Factorisation {
            unit: Integer::zero(),
            factors: Vec::new(),
        });
    }
    let mut unit = polynomial.content();
    if polynomial.lead().signum() < 0 {
        unit = -unit;
    }
    let monomial = polynomial.monomial_content();
    let mut found: Vec<(Polynomial, u32)> = monomial
        .factors()
        .map(|(symbol, power)| (Polynomial::symbol(symbol), power))
        .collect();
    let rest = polynomial
        .div_exact(&Polynomial::monomial(unit.clone(), monomial))
        .unwrap_or_else(|| polynomial.clone());
    split(&rest, 1, &mut found, budget)?;
    Ok(Factorisation {
        unit,
        factors: gather(found),
    })
}

/// Equal factors together, sorted.
fn gather(found: Vec<(Polynomial, u32)>) -> Vec<(Polynomial, u32)> {
    let mut factors: Vec<(Polynomial, u32)> = Vec::new();
    for (factor, power) in found {
        let factor = positive(factor.primitive());
        if factor.is_constant() {
            continue;
        }
        match factors.iter_mut().find(|(known, _)| *known == factor) {
            Some((_, count)) => *count += power,
            None => factors.push((factor, power)),
        }
    }
    factors.sort_by(|a, b| {
        let key = |p: &Polynomial| (p.total_degree(), p.len());
        key(&a.0)
            .cmp(&key(&b.0))
            .then_with(|| a.0.terms().cmp(b.0.terms()))
    });
    factors
}

fn positive(polynomial: Polynomial) -> Polynomial {
    if polynomial.lead().signum() < 0 {
        -polynomial
    } else {
        polynomial
    }
}

type Found = Vec<(Polynomial, u32)>;

/// Factors of a primitive polynomial without monomial content, each to a power times `power`.
fn split(
    polynomial: &Polynomial,
    power: u32,
    found: &mut Found,
    budget: &Budget,
) -> Result<(), Exceeded> {
    let mut work = vec![(polynomial.clone(), power)];
    while let Some((polynomial, power)) = work.pop() {
        budget.time()?;
        if polynomial.is_constant() {
            continue;
        }
        let symbols = polynomial.symbols();
        if let Some((content, rest)) = content_in_some(&polynomial, &symbols, budget)? {
            work.push((content, power));
            work.push((rest, power));
            continue;
        }
        if symbols.iter().any(|&symbol| polynomial.degree(symbol) == 1) {
            found.push((polynomial, power));
            continue;
        }
        if let Some(parts) = square_free(&polynomial, symbols[0], budget)? {
            for (part, times) in parts {
                work.push((part, power * times));
            }
            continue;
        }
        for factor in irreducible(&polynomial, budget)? {
            found.push((factor, power));
        }
    }
    Ok(())
}

/// A content in one of the variables, if it is not a number: (content, rest).
fn content_in_some(
    polynomial: &Polynomial,
    symbols: &[Symbol],
    budget: &Budget,
) -> Result<Option<(Polynomial, Polynomial)>, Exceeded> {
    for &symbol in symbols {
        let mut content = Polynomial::zero();
        let mut parts = polynomial.coefficients(symbol);
        parts.sort_by_key(Polynomial::len);
        for part in parts.iter().filter(|part| !part.is_zero()) {
            content = gcd(&content, part, budget)?;
            if content.is_constant() {
                break;
            }
        }
        if !content.is_constant()
            && let Some(rest) = polynomial.div_exact(&content)
        {
            return Ok(Some((content, rest)));
        }
    }
    Ok(None)
}

/// Square-free parts with their multiplicities (Yun 1976), or nothing when it is square-free.
fn square_free(
    polynomial: &Polynomial,
    symbol: Symbol,
    budget: &Budget,
) -> Result<Option<Vec<(Polynomial, u32)>>, Exceeded> {
    let derivative = polynomial.derivative(symbol);
    let common = gcd(polynomial, &derivative, budget)?;
    if common.is_constant() {
        return Ok(None);
    }
    let divide = |a: &Polynomial, b: &Polynomial| a.div_exact(b).unwrap_or_else(|| a.clone());
    let mut parts = Vec::new();
    let mut rest = divide(polynomial, &common);
    let mut slope = &divide(&derivative, &common) - &rest.derivative(symbol);
    let mut times = 1;
    while !rest.is_constant() {
        let part = gcd(&rest, &slope, budget)?;
        rest = divide(&rest, &part);
        slope = &divide(&slope, &part) - &rest.derivative(symbol);
        if !part.is_constant() {
            parts.push((part, times));
        }
        times += 1;
    }
    Ok(Some(parts))
}

/// Irreducible factors of a square-free primitive polynomial.
fn irreducible(polynomial: &Polynomial, budget: &Budget) -> Result<Vec<Polynomial>, Exceeded> {
    let (small, grades) = grading::reduce(polynomial);
    let symbols = small.symbols();
    let factors = match symbols.as_slice() {
        [] => vec![small],
        [symbol] => univariate::factors(&small, *symbol, budget)?,
        _ => kronecker(&small, &symbols, budget)?,
    };
    let restored: Vec<Polynomial> = factors
        .iter()
        .map(|factor| grading::restore(factor, &grades))
        .collect();
    Ok(restored)
}

/// Brings all variables to powers of one, factors, and recombines by trial division.
fn kronecker(
    polynomial: &Polynomial,
    symbols: &[Symbol],
    budget: &Budget,
) -> Result<Vec<Polynomial>, Exceeded> {
    let main = symbols[0];
    let mut weights = Vec::new();
    let mut weight = 1_u32;
    for &symbol in symbols {
        weights.push((symbol, weight));
        weight = weight.saturating_mul(polynomial.degree(symbol) + 1);
    }
    if weight > MAX_DEGREE {
        return unproven(polynomial, symbols, budget);
    }
    let image = Polynomial::from_terms(polynomial.terms().iter().map(|(monomial, coefficient)| {
        let power = weights
            .iter()
            .map(|&(symbol, weight)| monomial.exponent(symbol) * weight)
            .sum();
        (Monomial::power(main, power), coefficient.clone())
    }));
    let mut pieces = Vec::new();
    for (piece, times) in factor_one(&image, main, budget)? {
        pieces.extend(std::iter::repeat_n(piece, times as usize));
    }
    let back = |image: &Polynomial| {
        Polynomial::from_terms(image.terms().iter().map(|(monomial, coefficient)| {
            let mut power = monomial.exponent(main);
            let mut result = Monomial::one();
            for &(symbol, _) in &weights {
                let base = polynomial.degree(symbol) + 1;
                result = result.mul(&Monomial::power(symbol, power % base));
                power /= base;
            }
            (result, coefficient.clone())
        }))
    };
    recombine(polynomial, pieces, &back, budget)
}

/// All factors of a univariate image, with powers, the variable itself included.
fn factor_one(
    image: &Polynomial,
    symbol: Symbol,
    budget: &Budget,
) -> Result<Vec<(Polynomial, u32)>, Exceeded> {
    let mut found = Vec::new();
    let low = image.valuation(symbol);
    if low > 0 {
        found.push((Polynomial::symbol(symbol), low));
    }
    let rest = image
        .div_exact(&Polynomial::monomial(
            Integer::one(),
            Monomial::power(symbol, low),
        ))
        .unwrap_or_else(|| image.clone())
        .primitive();
    let parts = match square_free(&rest, symbol, budget)? {
        Some(parts) => parts,
        None => vec![(rest, 1)],
    };
    for (part, times) in parts {
        for factor in univariate::factors(&part, symbol, budget)? {
            found.push((factor, times));
        }
    }
    Ok(found)
}

/// Smallest products of pieces whose counterparts divide.
fn recombine(
    polynomial: &Polynomial,
    mut pieces: Vec<Polynomial>,
    back: &dyn Fn(&Polynomial) -> Polynomial,
    budget: &Budget,
) -> Result<Vec<Polynomial>, Exceeded> {
    let mut rest = polynomial.clone();
    let mut found = Vec::new();
    let mut size = 1;
    while 2 * size <= pieces.len() {
        let mut hit = None;
        for choice in choices(pieces.len(), size) {
            budget.time()?;
            let image = choice.iter().fold(Polynomial::one(), |product, &index| {
                &product * &pieces[index]
            });
            let candidate = back(&image).primitive();
            if candidate.is_constant() {
                continue;
            }
            if let Some(quotient) = rest.div_exact(&candidate) {
                hit = Some((choice, candidate, quotient));
                break;
            }
        }
        match hit {
            Some((choice, candidate, quotient)) => {
                found.push(candidate);
                rest = quotient;
                for index in choice.into_iter().rev() {
                    pieces.remove(index);
                }
            }
            None => size += 1,
        }
    }
    if !rest.is_constant() {
        found.push(rest);
    }
    Ok(found)
}

/// A polynomial too large for one variable: irreducible when it is so at integer values of all
/// variables but one (Hilbert); else the factors are not told.
fn unproven(
    polynomial: &Polynomial,
    symbols: &[Symbol],
    budget: &Budget,
) -> Result<Vec<Polynomial>, Exceeded> {
    for &main in symbols {
        for attempt in 0..6_i64 {
            let image = polynomial
                .evaluate(&|symbol| {
                    let index = i64::try_from(symbol.index()).unwrap_or(1);
                    (symbol != main)
                        .then(|| Integer::from(2 + (index * 7 + attempt * 5) % 23).into())
                })
                .0
                .primitive();
            if image.degree(main) != polynomial.degree(main) {
                continue;
            }
            let factors = factor_one(&image, main, budget)?;
            if let [(_, 1)] = factors.as_slice() {
                return Ok(vec![polynomial.clone()]);
            }
        }
    }
    Err(Exceeded::Terms(budget.limits().terms))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::algebra::SymbolTable;

    fn product(factorisation: &Factorisation) -> Polynomial {
        let unit = Polynomial::constant(factorisation.unit.clone());
        factorisation
            .factors
            .iter()
            .fold(unit, |product, (factor, power)| {
                &product * &factor.pow(*power)
            })
    }

    #[test]
    fn tied_ladders_split_into_what_they_are() {
        // 1 + 3x + x² is irreducible, 1 + 4x + 3x² = (1 + x)(1 + 3x); x = R·C·s.
        let mut table = SymbolTable::new();
        let x = ["R", "C"]
            .iter()
            .fold(Polynomial::symbol(Symbol::S), |product, name| {
                &product * &Polynomial::symbol(table.intern(name))
            });
        let budget = Budget::unlimited();
        let one = Polynomial::one();
        let poly = |a: i64, b: i64| {
            &(&one + &(&Polynomial::constant(a) * &x)) + &(&Polynomial::constant(b) * &(&x * &x))
        };
        assert_eq!(factor(&poly(3, 1), &budget).expect("ok").factors.len(), 1);
        assert_eq!(factor(&poly(4, 3), &budget).expect("ok").factors.len(), 2);
        let squared = &poly(3, 1) * &poly(3, 1);
        let found = factor(&squared, &budget).expect("ok");
        assert_eq!(found.factors, vec![(poly(3, 1), 2)]);
    }

    #[test]
    fn products_come_apart() {
        let mut table = SymbolTable::new();
        let symbols: Vec<Polynomial> = ["s", "a", "b"]
            .iter()
            .map(|name| Polynomial::symbol(table.intern(name)))
            .collect();
        let (s, a, b) = (&symbols[0], &symbols[1], &symbols[2]);
        let c = |value: i64| Polynomial::constant(value);
        let f = &(&(s * s) * a) + &(&(a * a) + &c(2));
        let g = &(&(s * s) + &(b * b)) + &c(1);
        let h = &(&(a * a) * &(b * b)) - &c(3);
        let budget = Budget::unlimited();
        let all = &(&(&f * &g) * &h) * &c(-6);
        let found = factor(&all, &budget).expect("ok");
        assert_eq!(product(&found), all);
        assert_eq!(found.factors.len(), 3);
        let square_difference = &(a * a) - &(b * b);
        assert_eq!(
            factor(&square_difference, &budget)
                .expect("ok")
                .factors
                .len(),
            2
        );
    }
}
