//! Sparse modular gcd (Zippel 1979): univariate images modulo a prime, one further variable at a time
//! with the monomials known so far, primes joined by the Chinese remainder theorem. A proposal only: the
//! caller proves it by exact division.

use num_bigint::BigInt;

use crate::algebra::integer::Integer;
use crate::algebra::monomial::Monomial;
use crate::algebra::polynomial::Polynomial;
use crate::algebra::prime_field::PrimeField;
use crate::algebra::symbol::Symbol;
use crate::algebra::univariate::Univariate;
use crate::budget::{Budget, Exceeded};

/// Primes of 62 bits tried before giving up.
const PRIMES: usize = 24;

/// gcd of two polynomials in `variables` alone, up to sign; nothing when luck fails.
pub(super) fn gcd(
    a: &Polynomial,
    b: &Polynomial,
    variables: &[Symbol],
    budget: &Budget,
) -> Result<Option<Polynomial>, Exceeded> {
    let Some((&main, others)) = variables.split_first() else {
        return Ok(Some(Polynomial::constant(a.content().gcd(&b.content()))));
    };
    let (content_a, a) = split(a, main, budget)?;
    let (content_b, b) = split(b, main, budget)?;
    let content = super::gcd(&content_a, &content_b, budget)?;
    let lead = super::gcd(
        &a.leading_coefficient(main),
        &b.leading_coefficient(main),
        budget,
    )?;
    let problem = Problem {
        a: &a,
        b: &b,
        lead: &lead,
        main,
        others,
    };
    let mut sum: Vec<(Monomial, BigInt)> = Vec::new();
    let mut modulus = BigInt::from(1);
    let mut before = Polynomial::zero();
    for (attempt, field) in PrimeField::primes().take(PRIMES).enumerate() {
        budget.time()?;
        let Some(image) = problem.image(&field, attempt as u64, budget)? else {
            continue;
        };
        join(&mut sum, &mut modulus, &image, &field);
        let lifted = symmetric(&sum, &modulus);
        // One prime is enough for most; more are needed until nothing changes.
        if attempt > 0 && lifted != before {
            before = lifted;
            continue;
        }
        let found = split(&lifted, main, budget)?.1;
        if a.div_exact(&found).is_some() && b.div_exact(&found).is_some() {
            return Ok(Some(&found * &content));
        }
        before = lifted;
    }
    Ok(None)
}

/// Content in a variable, and the rest.
fn split(
    polynomial: &Polynomial,
    main: Symbol,
    budget: &Budget,
) -> Result<(Polynomial, Polynomial), Exceeded> {
    let mut parts = polynomial.coefficients(main);
    parts.retain(|part| !part.is_zero());
    parts.sort_by_key(Polynomial::len);
    let mut content = Polynomial::zero();
    for part in parts {
        content = super::gcd(&content, &part, budget)?;
        if content.is_one() {
            break;
        }
    }
    let rest = polynomial
        .div_exact(&content)
        .unwrap_or_else(|| polynomial.clone());
    Ok((content, rest))
}

/// Chinese remainders, coefficient by coefficient.
fn join(
    sum: &mut Vec<(Monomial, BigInt)>,
    modulus: &mut BigInt,
    image: &[(Monomial, u64)],
    field: &PrimeField,
) {
    let residue = |value: &BigInt| field.from_integer(&Integer::from(value.clone()));
    let inverse = field.inv(residue(modulus)).unwrap_or(1);
    for (monomial, _) in image {
        if !sum.iter().any(|(known, _)| known == monomial) {
            sum.push((monomial.clone(), BigInt::from(0)));
        }
    }
    for (monomial, value) in sum {
        let target = image
            .iter()
            .find(|(known, _)| known == monomial)
            .map_or(0, |(_, target)| *target);
        let step = field.mul(field.sub(target, residue(value)), inverse);
        *value += &*modulus * step;
    }
    *modulus *= field.prime();
}

fn symmetric(sum: &[(Monomial, BigInt)], modulus: &BigInt) -> Polynomial {
    let half = modulus >> 1;
    Polynomial::from_terms(sum.iter().map(|(monomial, value)| {
        let small = if *value > half {
            value - modulus
        } else {
            value.clone()
        };
        (monomial.clone(), Integer::from(small))
    }))
}

struct Problem<'a> {
    a: &'a Polynomial,
    b: &'a Polynomial,
    /// gcd of the leading coefficients in the main variable; that of the image.
    lead: &'a Polynomial,
    main: Symbol,
    others: &'a [Symbol],
}

/// The monomials in the other variables beside one power of the main one, with their coefficients.
type Row = Vec<(Monomial, u64)>;

impl Problem<'_> {
    /// The multiple of the gcd with leading coefficient `lead`, modulo a prime; nothing at an unlucky
    /// point.
    fn image(
        &self,
        field: &PrimeField,
        attempt: u64,
        budget: &Budget,
    ) -> Result<Option<Vec<(Monomial, u64)>>, Exceeded> {
        let word = |index: usize, salt: u64| {
            super::spread(attempt * 64 + salt, self.others[index]) % field.prime()
        };
        let anchor: Vec<u64> = (0..self.others.len()).map(|at| word(at, 1)).collect();
        let ratios: Vec<u64> = (0..self.others.len()).map(|at| word(at, 2)).collect();
        let Some(first) = self.images(field, &anchor, &ratios, 0, 1).pop().flatten() else {
            return Ok(None);
        };
        let degree = first.degree().unwrap_or(0);
        let mut rows: Vec<Row> = first
            .coefficients()
            .iter()
            .map(|&value| vec![(Monomial::one(), value)])
            .collect();
        for row in &mut rows {
            row.retain(|(_, value)| *value != 0);
        }
        for stage in 0..self.others.len() {
            let Some(next) =
                self.extend(field, &anchor, &ratios, stage, (&rows, degree), budget)?
            else {
                return Ok(None);
            };
            rows = next;
        }
        let mut image = Vec::new();
        for (power, row) in rows.into_iter().enumerate() {
            let power = Monomial::power(self.main, u32::try_from(power).unwrap_or(u32::MAX));
            image.extend(row.into_iter().map(|(m, value)| (m.mul(&power), value)));
        }
        Ok(Some(image))
    }

    /// One more variable set free.
    fn extend(
        &self,
        field: &PrimeField,
        anchor: &[u64],
        ratios: &[u64],
        stage: usize,
        (rows, degree): (&[Row], usize),
        budget: &Budget,
    ) -> Result<Option<Vec<Row>>, Exceeded> {
        let variable = self.others[stage];
        let bound =
            self.a.degree(variable).min(self.b.degree(variable)) + self.lead.degree(variable);
        let count = rows.iter().map(Vec::len).max().unwrap_or(0);
        // Values of every monomial's coefficient at points of the new variable.
        let mut values: Vec<Vec<Vec<(u64, u64)>>> =
            rows.iter().map(|row| vec![Vec::new(); row.len()]).collect();
        for at in 0..=u64::from(bound) {
            budget.time()?;
            let point = if at == 0 {
                anchor[stage]
            } else {
                super::spread(at.wrapping_mul(977) + 13, variable) % field.prime()
            };
            if at == 0 {
                for (row, values) in rows.iter().zip(&mut values) {
                    for ((_, value), list) in row.iter().zip(values) {
                        list.push((point, *value));
                    }
                }
                continue;
            }
            let mut place = anchor.to_vec();
            place[stage] = point;
            let images = self.images(field, &place, ratios, stage, count);
            let images: Option<Vec<Univariate>> = images
                .into_iter()
                .map(|image| image.filter(|found| found.degree() == Some(degree)))
                .collect();
            let Some(images) = images else {
                return Ok(None);
            };
            for (power, (row, values)) in rows.iter().zip(&mut values).enumerate() {
                let sides: Vec<u64> = images[..row.len()]
                    .iter()
                    .map(|image| image.coefficients().get(power).copied().unwrap_or(0))
                    .collect();
                let nodes: Vec<u64> = row
                    .iter()
                    .map(|(monomial, _)| self.at(field, monomial, ratios))
                    .collect();
                let Some(solved) = vandermonde(field, &nodes, &sides) else {
                    return Ok(None);
                };
                for (list, value) in values.iter_mut().zip(solved) {
                    list.push((point, value));
                }
            }
        }
        Ok(Some(spread_out(field, variable, rows, &values)))
    }

    fn at(&self, field: &PrimeField, monomial: &Monomial, values: &[u64]) -> u64 {
        monomial.factors().fold(1, |product, (symbol, exponent)| {
            let value = self
                .others
                .binary_search(&symbol)
                .map_or(1, |index| values[index]);
            field.mul(product, field.pow(value, u64::from(exponent)))
        })
    }

    /// `count` images: the first `free` variables at the powers 1, 2, … of their ratios, the others fixed.
    fn images(
        &self,
        field: &PrimeField,
        place: &[u64],
        ratios: &[u64],
        free: usize,
        count: usize,
    ) -> Vec<Option<Univariate>> {
        let mut ones = place.to_vec();
        ones[..free].fill(1);
        let mut steps = vec![1; place.len()];
        steps[..free].copy_from_slice(&ratios[..free]);
        let mut walks = [self.a, self.b, self.lead]
            .map(|polynomial| self.walk(field, polynomial, &ones, &steps));
        (0..count)
            .map(|_| {
                let [a, b, lead] = walks.each_mut().map(|walk| walk.next(field));
                let scale = lead.evaluate(0, field);
                if a.degree() != Some(self.a.degree(self.main) as usize)
                    || b.degree() != Some(self.b.degree(self.main) as usize)
                    || scale == 0
                {
                    return None;
                }
                Some(a.gcd(&b, field).scale(scale, field))
            })
            .collect()
    }

    fn walk(
        &self,
        field: &PrimeField,
        polynomial: &Polynomial,
        start: &[u64],
        steps: &[u64],
    ) -> Walk {
        let terms = polynomial
            .terms()
            .iter()
            .map(|(monomial, coefficient)| {
                let value = field.from_integer(coefficient);
                (
                    monomial.exponent(self.main) as usize,
                    field.mul(value, self.at(field, monomial, start)),
                    self.at(field, monomial, steps),
                )
            })
            .collect();
        Walk {
            terms,
            length: polynomial.degree(self.main) as usize + 1,
        }
    }
}

/// Values of a polynomial along a geometric progression, one product a term and step.
struct Walk {
    /// Power of the main variable, present value, ratio.
    terms: Vec<(usize, u64, u64)>,
    length: usize,
}

impl Walk {
    fn next(&mut self, field: &PrimeField) -> Univariate {
        let mut sums = vec![0; self.length];
        for (power, value, ratio) in &mut self.terms {
            *value = field.mul(*value, *ratio);
            sums[*power] = field.add(sums[*power], *value);
        }
        Univariate::new(sums)
    }
}

/// The rows with the new variable, interpolated coefficient by coefficient.
fn spread_out(
    field: &PrimeField,
    variable: Symbol,
    rows: &[Row],
    values: &[Vec<Vec<(u64, u64)>>],
) -> Vec<Row> {
    rows.iter()
        .zip(values)
        .map(|(row, values)| {
            let mut wide = Row::new();
            for ((monomial, _), points) in row.iter().zip(values) {
                let found = Univariate::interpolate(points, field);
                for (power, &value) in found.coefficients().iter().enumerate() {
                    if value != 0 {
                        let power = u32::try_from(power).unwrap_or(u32::MAX);
                        wide.push((monomial.mul(&Monomial::power(variable, power)), value));
                    }
                }
            }
            wide
        })
        .collect()
}

/// c with Σ `c_i`·`node_i^t` = `side_t` for t = 1, 2, …; nothing when nodes coincide or vanish.
fn vandermonde(field: &PrimeField, nodes: &[u64], sides: &[u64]) -> Option<Vec<u64>> {
    let master = nodes
        .iter()
        .fold(Univariate::constant(1), |product, &node| {
            product.mul(&Univariate::new(vec![field.neg(node), 1]), field)
        });
    nodes
        .iter()
        .map(|&node| {
            let quotient = master
                .div_rem(&Univariate::new(vec![field.neg(node), 1]), field)
                .0;
            let weight = field.mul(node, quotient.evaluate(node, field));
            let sum = quotient
                .coefficients()
                .iter()
                .zip(sides)
                .fold(0, |sum, (&a, &b)| field.add(sum, field.mul(a, b)));
            Some(field.mul(sum, field.inv(weight)?))
        })
        .collect()
}
