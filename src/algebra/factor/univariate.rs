//! Factors of square-free polynomials in one variable, modulo one prime beyond the coefficient bound.

use num_bigint::BigInt;
use num_integer::Integer as _;
use num_traits::{One, Signed, Zero};

use crate::algebra::integer::Integer;
use crate::algebra::monomial::Monomial;
use crate::algebra::polynomial::Polynomial;
use crate::algebra::symbol::Symbol;
use crate::budget::{Budget, Exceeded};

type Dense = Vec<BigInt>;

/// Modular factors beyond which products are not tried.
const MAX_PIECES: usize = 18;

/// Irreducible factors of a primitive square-free polynomial in `symbol`.
pub(super) fn factors(
    polynomial: &Polynomial,
    symbol: Symbol,
    budget: &Budget,
) -> Result<Vec<Polynomial>, Exceeded> {
    let degree = polynomial.degree(symbol);
    if degree <= 1 {
        return Ok(vec![polynomial.clone()]);
    }
    let coefficients: Dense = polynomial
        .coefficients(symbol)
        .iter()
        .map(|part| part.as_constant().unwrap_or_default().to_bigint())
        .collect();
    let field = prime_above(&bound(&coefficients));
    let field = Modulus { prime: field };
    let monic = field.monic(&field.reduce(&coefficients));
    let pieces = field.split(&monic, budget)?;
    if pieces.len() > MAX_PIECES {
        return Err(Exceeded::Terms(budget.limits().terms));
    }
    let mut found = Vec::new();
    let mut rest = coefficients;
    let mut pieces = pieces;
    let mut size = 1;
    while 2 * size <= pieces.len() {
        budget.time()?;
        let hit = crate::algebra::choice::choices(pieces.len(), size).find_map(|choice| {
            let lead = rest.last()?.clone();
            let product = choice.iter().fold(vec![lead], |product, &index| {
                field.mul(&product, &pieces[index])
            });
            let candidate = primitive(field.symmetric(&product));
            let quotient = divide(&rest, &candidate)?;
            Some((choice, candidate, quotient))
        });
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
    if rest.len() > 1 {
        found.push(primitive(rest));
    }
    Ok(found
        .iter()
        .map(|dense| polynomial_of(dense, symbol))
        .collect())
}

fn polynomial_of(dense: &Dense, symbol: Symbol) -> Polynomial {
    Polynomial::from_terms(dense.iter().enumerate().map(|(power, coefficient)| {
        let power = u32::try_from(power).unwrap_or(u32::MAX);
        (
            Monomial::power(symbol, power),
            Integer::from(coefficient.clone()),
        )
    }))
}

/// Twice the leading coefficient times Mignotte's bound on the coefficients of a factor.
fn bound(coefficients: &Dense) -> BigInt {
    let sum: BigInt = coefficients.iter().map(|value| value * value).sum();
    let norm = sum.sqrt() + BigInt::one();
    let lead = coefficients.last().map_or_else(BigInt::one, Signed::abs);
    (norm * lead) << (coefficients.len() + 2)
}

/// A probable prime above a bound (Miller–Rabin with twelve bases); a composite would be found out by
/// the exact division that proves every factor.
fn prime_above(bound: &BigInt) -> BigInt {
    let mut candidate: BigInt = bound | BigInt::one();
    loop {
        candidate += 2;
        if is_probable_prime(&candidate) {
            return candidate;
        }
    }
}

fn is_probable_prime(candidate: &BigInt) -> bool {
    let one = BigInt::one();
    let less = candidate - &one;
    let twos = less.trailing_zeros().unwrap_or(0);
    let odd = &less >> twos;
    [2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37]
        .iter()
        .all(|&base: &i32| {
            let base = BigInt::from(base);
            if (candidate % &base).is_zero() {
                return *candidate == base;
            }
            let mut power = base.modpow(&odd, candidate);
            if power == one || power == less {
                return true;
            }
            (1..twos).any(|_| {
                power = &power * &power % candidate;
                power == less
            })
        })
}

fn primitive(dense: Dense) -> Dense {
    let mut content = dense
        .iter()
        .fold(BigInt::zero(), |gcd, value| gcd.gcd(value));
    if dense.last().is_some_and(Signed::is_negative) {
        content = -content;
    }
    if content.is_zero() {
        return dense;
    }
    dense.into_iter().map(|value| value / &content).collect()
}

/// Exact quotient.
fn divide(dividend: &Dense, divisor: &Dense) -> Option<Dense> {
    if divisor.len() < 2 || divisor.len() > dividend.len() {
        return None;
    }
    let lead = divisor.last()?;
    let mut rest = dividend.clone();
    let mut quotient = vec![BigInt::zero(); dividend.len() - divisor.len() + 1];
    for at in (0..quotient.len()).rev() {
        let (factor, left) = rest[at + divisor.len() - 1].div_rem(lead);
        if !left.is_zero() {
            return None;
        }
        for (offset, value) in divisor.iter().enumerate() {
            rest[at + offset] -= &factor * value;
        }
        quotient[at] = factor;
    }
    rest.iter().all(Zero::is_zero).then_some(quotient)
}

/// Polynomials modulo a large prime.
struct Modulus {
    prime: BigInt,
}

impl Modulus {
    fn trim(mut dense: Dense) -> Dense {
        while dense.last().is_some_and(Zero::is_zero) {
            dense.pop();
        }
        dense
    }

    fn reduce(&self, dense: &Dense) -> Dense {
        Self::trim(
            dense
                .iter()
                .map(|value| value.mod_floor(&self.prime))
                .collect(),
        )
    }

    fn symmetric(&self, dense: &Dense) -> Dense {
        let half = &self.prime >> 1;
        dense
            .iter()
            .map(|value| {
                if *value > half {
                    value - &self.prime
                } else {
                    value.clone()
                }
            })
            .collect()
    }

    fn mul(&self, a: &Dense, b: &Dense) -> Dense {
        if a.is_empty() || b.is_empty() {
            return Vec::new();
        }
        let mut product = vec![BigInt::zero(); a.len() + b.len() - 1];
        for (i, x) in a.iter().enumerate() {
            for (j, y) in b.iter().enumerate() {
                product[i + j] += x * y;
            }
        }
        self.reduce(&product)
    }

    fn inverse(&self, value: &BigInt) -> BigInt {
        value.modpow(&(&self.prime - 2), &self.prime)
    }

    fn monic(&self, dense: &Dense) -> Dense {
        let Some(lead) = dense.last() else {
            return Vec::new();
        };
        let inverse = self.inverse(lead);
        self.reduce(&dense.iter().map(|value| value * &inverse).collect())
    }

    fn div_rem(&self, dividend: &Dense, divisor: &Dense) -> (Dense, Dense) {
        let mut rest = dividend.clone();
        if rest.len() < divisor.len() {
            return (Vec::new(), rest);
        }
        let Some(lead) = divisor.last() else {
            return (Vec::new(), rest);
        };
        let inverse = self.inverse(lead);
        let mut quotient = vec![BigInt::zero(); rest.len() - divisor.len() + 1];
        for at in (0..quotient.len()).rev() {
            let factor = (&rest[at + divisor.len() - 1] * &inverse).mod_floor(&self.prime);
            if factor.is_zero() {
                continue;
            }
            for (offset, value) in divisor.iter().enumerate() {
                let change = (&rest[at + offset] - &factor * value).mod_floor(&self.prime);
                rest[at + offset] = change;
            }
            quotient[at] = factor;
        }
        rest.truncate(divisor.len() - 1);
        (Self::trim(quotient), Self::trim(rest))
    }

    fn gcd(&self, a: &Dense, b: &Dense) -> Dense {
        let (mut a, mut b) = (a.clone(), b.clone());
        while !b.is_empty() {
            let rest = self.div_rem(&a, &b).1;
            a = b;
            b = rest;
        }
        self.monic(&a)
    }

    fn power(&self, base: &Dense, exponent: &BigInt, modulus: &Dense) -> Dense {
        let mut power = vec![BigInt::one()];
        let bits = exponent.bits();
        for bit in (0..bits).rev() {
            power = self.div_rem(&self.mul(&power, &power), modulus).1;
            if exponent.bit(bit) {
                power = self.div_rem(&self.mul(&power, base), modulus).1;
            }
        }
        power
    }

    fn minus(&self, a: &Dense, b: &Dense) -> Dense {
        let length = a.len().max(b.len());
        let zero = BigInt::zero();
        let at = |dense: &Dense, index: usize| dense.get(index).unwrap_or(&zero).clone();
        self.reduce(
            &(0..length)
                .map(|index| at(a, index) - at(b, index))
                .collect(),
        )
    }

    /// Monic irreducible factors of a monic polynomial; repeated ones stay together, which only makes
    /// the recombination fail to split what is square-free over the integers anyway.
    fn split(&self, monic: &Dense, budget: &Budget) -> Result<Vec<Dense>, Exceeded> {
        let x = vec![BigInt::zero(), BigInt::one()];
        let mut rest = monic.clone();
        let mut found = Vec::new();
        let mut power = x.clone();
        let mut degree = 0;
        while rest.len() > 1 {
            budget.time()?;
            degree += 1;
            if 2 * degree > rest.len() - 1 {
                found.push(rest);
                break;
            }
            power = self.power(&power, &self.prime, &rest);
            let part = self.gcd(&rest, &self.minus(&power, &x));
            if part.len() > 1 {
                rest = self.div_rem(&rest, &part).0;
                power = self.div_rem(&power, &rest).1;
                self.equal_degree(part, degree, &mut found, budget)?;
            }
        }
        Ok(found)
    }

    /// Factors of one degree (Cantor & Zassenhaus 1981).
    fn equal_degree(
        &self,
        product: Dense,
        degree: usize,
        found: &mut Vec<Dense>,
        budget: &Budget,
    ) -> Result<(), Exceeded> {
        let mut work = vec![product];
        let mut seed = 1_u64;
        let exponent = (num_traits::pow(self.prime.clone(), degree) - 1_u32) >> 1;
        while let Some(product) = work.pop() {
            if product.len() - 1 == degree {
                found.push(product);
                continue;
            }
            budget.time()?;
            let random: Dense = (0..product.len() - 1)
                .map(|_| {
                    seed = seed
                        .wrapping_mul(6_364_136_223_846_793_005)
                        .wrapping_add(1_442_695_040_888_963_407);
                    BigInt::from(seed >> 16)
                })
                .collect();
            let power = self.power(&Self::trim(random), &exponent, &product);
            let part = self.gcd(&product, &self.minus(&power, &vec![BigInt::one()]));
            if part.len() > 1 && part.len() < product.len() {
                let other = self.div_rem(&product, &part).0;
                work.push(part);
                work.push(other);
            } else {
                work.push(product);
            }
        }
        Ok(())
    }
}
