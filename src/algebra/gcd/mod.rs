//! Greatest common divisors of polynomials over the integers.
//!
//! First the variables the divisor can contain are found modulo a prime; the others are set to
//! integers. Up to three variables are evaluated at one large integer each (Char, Geddes & Gonnet 1989);
//! more are found sparsely modulo primes (Zippel 1979). Exact division proves every divisor.

use crate::algebra::integer::Integer;
use crate::algebra::polynomial::Polynomial;
use crate::algebra::prime_field::PrimeField;
use crate::algebra::symbol::Symbol;
use crate::algebra::univariate::Univariate;
use crate::budget::{Budget, Exceeded};

mod heuristic;
mod sparse;

/// gcd(a, b), its number included, leading coefficient positive; gcd(0, 0) = 0.
///
/// # Errors
/// When the budget is reached.
pub fn gcd(a: &Polynomial, b: &Polynomial, budget: &Budget) -> Result<Polynomial, Exceeded> {
    if a.is_zero() || b.is_zero() {
        let other = if a.is_zero() { b } else { a };
        return Ok(positive(other.clone()));
    }
    let number = a.content().gcd(&b.content());
    let monomial = a.monomial_content().gcd(&b.monomial_content());
    let common = Polynomial::monomial(number, monomial);
    if a.is_constant() || b.is_constant() {
        return Ok(common);
    }
    let strip = |polynomial: &Polynomial| {
        let monomial = Polynomial::monomial(Integer::one(), polynomial.monomial_content());
        polynomial
            .primitive()
            .div_exact(&monomial)
            .unwrap_or_else(|| polynomial.primitive())
    };
    let (left, right) = (strip(a), strip(b));
    if left.is_constant() || right.is_constant() {
        return Ok(common);
    }
    let rest = without_content(&left, &right, budget)?;
    Ok(positive(&rest * &common))
}

/// gcd, and what is left of both: (g, a/g, b/g).
///
/// # Errors
/// When the budget is reached.
pub fn cofactors(
    a: &Polynomial,
    b: &Polynomial,
    budget: &Budget,
) -> Result<(Polynomial, Polynomial, Polynomial), Exceeded> {
    let common = gcd(a, b, budget)?;
    let divide = |polynomial: &Polynomial| {
        polynomial
            .div_exact(&common)
            .unwrap_or_else(|| polynomial.clone())
    };
    let (left, right) = (divide(a), divide(b));
    Ok((common, left, right))
}

fn positive(polynomial: Polynomial) -> Polynomial {
    if polynomial.lead().signum() < 0 {
        -polynomial
    } else {
        polynomial
    }
}

/// gcd of primitive polynomials without monomial content.
fn without_content(
    a: &Polynomial,
    b: &Polynomial,
    budget: &Budget,
) -> Result<Polynomial, Exceeded> {
    if a == b {
        return Ok(a.clone());
    }
    for attempt in 0.. {
        budget.time()?;
        let variables = shared_variables(a, b, attempt);
        if variables.is_empty() {
            return Ok(Polynomial::one());
        }
        let small = |polynomial: &Polynomial| {
            polynomial
                .evaluate(&|symbol| {
                    (!variables.contains(&symbol)).then(|| {
                        let number = spread(attempt, symbol) % 97 + 2;
                        Integer::from(number).into()
                    })
                })
                .0
        };
        let (left, right) = (small(a), small(b));
        if left.is_zero() || right.is_zero() {
            continue;
        }
        let found = heuristic::gcd(&left.primitive(), &right.primitive(), &variables, budget)?;
        let found = positive(found.primitive());
        if a.div_exact(&found).is_some() && b.div_exact(&found).is_some() {
            return Ok(found);
        }
    }
    Ok(Polynomial::one())
}

/// The variables in which the gcd has positive degree, found one at a time at a random point modulo a
/// prime. A variable too many is possible at an unlucky point, one too few is not.
fn shared_variables(a: &Polynomial, b: &Polynomial, attempt: u64) -> Vec<Symbol> {
    let field = PrimeField::default_prime();
    let others = b.symbols();
    let shared: Vec<Symbol> = a
        .symbols()
        .into_iter()
        .filter(|symbol| others.binary_search(symbol).is_ok())
        .collect();
    let left = along_each(a, &shared, attempt, &field);
    let right = along_each(b, &shared, attempt, &field);
    shared
        .into_iter()
        .zip(left.iter().zip(&right))
        .filter(|(symbol, (left, right))| {
            // At an unlucky point a degree drops; the variable then counts as shared.
            let full = |image: &Univariate, polynomial: &Polynomial| {
                image.degree() == Some(polynomial.degree(*symbol) as usize)
            };
            !full(left, a) || !full(right, b) || left.gcd(right, &field).degree() != Some(0)
        })
        .map(|(symbol, _)| symbol)
        .collect()
}

/// For each variable the polynomial in it at random values of all others; one pass over the terms.
fn along_each(
    polynomial: &Polynomial,
    variables: &[Symbol],
    attempt: u64,
    field: &PrimeField,
) -> Vec<Univariate> {
    let symbols = polynomial.symbols();
    let values: Vec<(u64, u64)> = symbols
        .iter()
        .map(|&symbol| {
            let value = (spread(attempt, symbol) % field.prime()).max(1);
            (value, field.inv(value).unwrap_or(1))
        })
        .collect();
    let place = |symbol: Symbol| symbols.binary_search(&symbol).unwrap_or(0);
    let wanted: Vec<Option<usize>> = symbols
        .iter()
        .map(|symbol| variables.binary_search(symbol).ok())
        .collect();
    let mut lists: Vec<Vec<u64>> = variables
        .iter()
        .map(|&variable| vec![0; polynomial.degree(variable) as usize + 1])
        .collect();
    let mut totals = 0;
    for (monomial, coefficient) in polynomial.terms() {
        let mut value = field.from_integer(coefficient);
        for (symbol, exponent) in monomial.factors() {
            value = field.mul(
                value,
                field.pow(values[place(symbol)].0, u64::from(exponent)),
            );
        }
        totals = field.add(totals, value);
        for (symbol, exponent) in monomial.factors() {
            let at = place(symbol);
            if let Some(index) = wanted[at] {
                let without = field.mul(value, field.pow(values[at].1, u64::from(exponent)));
                let target = &mut lists[index][exponent as usize];
                *target = field.add(*target, without);
                // What holds the variable does not stand in the constant coefficient.
                lists[index][0] = field.sub(lists[index][0], value);
            }
        }
    }
    for list in &mut lists {
        list[0] = field.add(list[0], totals);
    }
    lists.into_iter().map(Univariate::new).collect()
}

/// Fixed pseudo-random words (SplitMix64).
fn spread(attempt: u64, symbol: Symbol) -> u64 {
    let mut word = (symbol.index() as u64 + 1)
        .wrapping_mul(0x9E37_79B9_7F4A_7C15)
        .wrapping_add(attempt.wrapping_mul(0xD1B5_4A32_D192_ED03));
    word = (word ^ (word >> 30)).wrapping_mul(0xBF58_476D_1CE4_E5B9);
    word = (word ^ (word >> 27)).wrapping_mul(0x94D0_49BB_1331_11EB);
    word ^ (word >> 31)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::algebra::SymbolTable;

    /// A small random polynomial in the given symbols.
    fn random(seed: &mut u64, symbols: &[Polynomial], terms: usize) -> Polynomial {
        let mut next = |below: u64| {
            *seed ^= *seed << 13;
            *seed ^= *seed >> 7;
            *seed ^= *seed << 17;
            *seed % below
        };
        let mut sum = Polynomial::zero();
        for _ in 0..terms {
            let mut term = Polynomial::constant(i64::try_from(next(19)).unwrap_or(0) - 9);
            for symbol in symbols {
                term = &term * &symbol.pow(u32::try_from(next(3)).unwrap_or(0));
            }
            sum = &sum + &term;
        }
        sum
    }

    #[test]
    fn a_product_gives_its_common_factor_back() {
        let mut table = SymbolTable::new();
        let symbols: Vec<Polynomial> = ["s", "a", "b", "c", "d"]
            .iter()
            .map(|name| Polynomial::symbol(table.intern(name)))
            .collect();
        let budget = Budget::unlimited();
        let mut seed = 20_261_201;
        for round in 0..60 {
            let count = 2 + round % 4;
            let mut make = |terms| random(&mut seed, &symbols[..count], terms);
            let (f, g, h) = (make(4), make(4), make(3));
            if f.is_zero() || g.is_zero() || h.is_zero() {
                continue;
            }
            let (common, left, right) = cofactors(&(&f * &h), &(&g * &h), &budget).expect("budget");
            assert_eq!(&common * &left, &f * &h, "round {round}");
            assert_eq!(&common * &right, &g * &h, "round {round}");
            assert!(
                common.div_exact(&positive(h.clone())).is_some(),
                "round {round}"
            );
            assert!(
                gcd(&left, &right, &budget).expect("budget").is_one(),
                "round {round}"
            );
        }
    }

    #[test]
    fn zero_and_numbers() {
        let budget = Budget::unlimited();
        let six = Polynomial::constant(6);
        let four = Polynomial::constant(-4);
        assert_eq!(gcd(&six, &four, &budget), Ok(Polynomial::constant(2)));
        assert_eq!(
            gcd(&Polynomial::zero(), &four, &budget),
            Ok(Polynomial::constant(4))
        );
        assert!(
            gcd(&Polynomial::zero(), &Polynomial::zero(), &budget)
                .expect("ok")
                .is_zero()
        );
    }
}
