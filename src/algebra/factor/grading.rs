//! Variables that a grading determines are set to one and restored in the factors.
//!
//! If all terms have one weight Σ w_i·e_i, so have those of every factor.

use crate::algebra::monomial::Monomial;
use crate::algebra::polynomial::Polynomial;
use crate::algebra::symbol::Symbol;

/// A variable set to one, and the weights (of it and of the others) that restore it.
#[derive(Clone, Debug)]
pub(super) struct Grade {
    variable: Symbol,
    /// Exponent of the variable is constant − Σ weight·exponent.
    weights: Vec<(Symbol, i64)>,
}

/// Removes variables one after the other.
pub(super) fn reduce(polynomial: &Polynomial) -> (Polynomial, Vec<Grade>) {
    let mut grades = Vec::new();
    let mut small = polynomial.clone();
    while let Some(grade) = find(&small) {
        small = Polynomial::from_terms(small.terms().iter().map(|(monomial, coefficient)| {
            (monomial.without(grade.variable).0, coefficient.clone())
        }));
        grades.push(grade);
    }
    (small, grades)
}

/// Puts the variables back, with the least exponents that are not negative.
pub(super) fn restore(factor: &Polynomial, grades: &[Grade]) -> Polynomial {
    let mut full = factor.clone();
    for grade in grades.iter().rev() {
        let weight = |monomial: &Monomial| -> i64 {
            grade
                .weights
                .iter()
                .map(|&(symbol, weight)| weight * i64::from(monomial.exponent(symbol)))
                .sum()
        };
        let least = full
            .terms()
            .iter()
            .map(|(monomial, _)| weight(monomial))
            .min()
            .unwrap_or(0);
        full = Polynomial::from_terms(full.terms().iter().map(|(monomial, coefficient)| {
            let exponent = u32::try_from(weight(monomial) - least).unwrap_or(0);
            let power = Monomial::power(grade.variable, exponent);
            (monomial.mul(&power), coefficient.clone())
        }));
    }
    full
}

/// A variable whose exponent is an integer combination of the others' plus a constant, in every term.
fn find(polynomial: &Polynomial) -> Option<Grade> {
    let symbols = polynomial.symbols();
    if symbols.len() < 2 {
        return None;
    }
    symbols.iter().find_map(|&variable| {
        let others: Vec<Symbol> = symbols.iter().copied().filter(|&s| s != variable).collect();
        let weights = solve(polynomial, variable, &others)?;
        Some(Grade {
            variable,
            weights: others.into_iter().zip(weights).collect(),
        })
    })
}

/// Integers w with e_variable = constant + Σ w_i·e_i for all terms, by fraction-free elimination.
fn solve(polynomial: &Polynomial, variable: Symbol, others: &[Symbol]) -> Option<Vec<i64>> {
    let first = &polynomial.terms().first()?.0;
    let difference = |monomial: &Monomial, symbol: Symbol| {
        i64::from(monomial.exponent(symbol)) - i64::from(first.exponent(symbol))
    };
    // Rows: exponent differences of the others, then of the variable.
    let mut basis: Vec<(usize, Vec<i64>)> = Vec::new();
    for (monomial, _) in &polynomial.terms()[1..] {
        let mut row: Vec<i64> = others
            .iter()
            .chain([&variable])
            .map(|&symbol| difference(monomial, symbol))
            .collect();
        for (pivot, known) in &basis {
            let (a, b) = (known[*pivot], row[*pivot]);
            if b != 0 {
                for (target, value) in row.iter_mut().zip(known) {
                    *target = target.checked_mul(a)?.checked_sub(value.checked_mul(b)?)?;
                }
            }
        }
        match row.iter().position(|&value| value != 0) {
            None => {}
            Some(pivot) if pivot == others.len() => return None,
            Some(pivot) => basis.push((pivot, row)),
        }
    }
    let mut weights = vec![0_i64; others.len()];
    for (pivot, row) in basis.iter().rev() {
        let mut rest = row[others.len()];
        for (index, weight) in weights.iter().enumerate() {
            if index != *pivot {
                rest = rest.checked_sub(weight.checked_mul(row[index])?)?;
            }
        }
        if rest % row[*pivot] != 0 {
            return None;
        }
        weights[*pivot] = rest / row[*pivot];
    }
    Some(weights)
}
