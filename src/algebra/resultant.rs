//! Resultants by fraction-free elimination of the Sylvester matrix (Bareiss 1968).

use crate::algebra::polynomial::Polynomial;
use crate::algebra::symbol::Symbol;
use crate::budget::{Budget, Exceeded};

/// The resultant of two polynomials in a symbol: zero exactly when they share a factor that holds it.
///
/// # Errors
/// When the budget is reached.
pub fn resultant(
    a: &Polynomial,
    b: &Polynomial,
    symbol: Symbol,
    budget: &Budget,
) -> Result<Polynomial, Exceeded> {
    if a.is_zero() || b.is_zero() {
        return Ok(Polynomial::zero());
    }
    let (a, b) = (a.coefficients(symbol), b.coefficients(symbol));
    let (m, n) = (a.len() - 1, b.len() - 1);
    let size = m + n;
    let mut rows = vec![vec![Polynomial::zero(); size]; size];
    for (shift, row) in rows.iter_mut().take(n).enumerate() {
        for (power, value) in a.iter().enumerate() {
            row[shift + m - power] = value.clone();
        }
    }
    for (shift, row) in rows.iter_mut().skip(n).enumerate() {
        for (power, value) in b.iter().enumerate() {
            row[shift + n - power] = value.clone();
        }
    }
    determinant(rows, budget)
}

/// Determinant of a square matrix of polynomials; 1 for the empty one.
///
/// # Errors
/// When the budget is reached.
pub fn determinant(
    mut rows: Vec<Vec<Polynomial>>,
    budget: &Budget,
) -> Result<Polynomial, Exceeded> {
    let size = rows.len();
    let mut before = Polynomial::one();
    let mut negative = false;
    for step in 0..size {
        let Some(pivot) = (step..size).find(|&row| !rows[row][step].is_zero()) else {
            return Ok(Polynomial::zero());
        };
        if pivot != step {
            rows.swap(pivot, step);
            negative = !negative;
        }
        for row in step + 1..size {
            for column in step + 1..size {
                budget.time()?;
                let straight = rows[row][column].product(&rows[step][step], budget)?;
                let crossed = rows[row][step].product(&rows[step][column], budget)?;
                let difference = &straight - &crossed;
                rows[row][column] = difference.div_exact(&before).unwrap_or(difference);
            }
        }
        before = rows[step][step].clone();
    }
    Ok(if negative { -before } else { before })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::algebra::SymbolTable;

    #[test]
    fn common_roots_make_it_vanish() {
        let mut table = SymbolTable::new();
        let (s, a, b) = (
            Polynomial::symbol(Symbol::S),
            Polynomial::symbol(table.intern("a")),
            Polynomial::symbol(table.intern("b")),
        );
        let one = Polynomial::one();
        let left = &one + &(&a * &s);
        let right = &(&one + &(&b * &s)) * &(&one + &s);
        let budget = Budget::unlimited();
        let found = resultant(&left, &right, Symbol::S, &budget).expect("ok");
        let expected = &(&a - &b) * &(&a - &one);
        assert!(found == expected || found == -expected);
    }
}
