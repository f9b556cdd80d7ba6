//! The written order of terms and the sign that goes with it.
//!
//! Terms stand by total degree, then lexicographically with names in byte order, larger exponents
//! first; the first term leads.

use std::cmp::Ordering;

use crate::algebra::{Integer, Monomial, Polynomial, SymbolTable};

/// Which of two monomials is written first.
#[must_use]
pub fn written_order(left: &Monomial, right: &Monomial, names: &SymbolTable) -> Ordering {
    left.total_degree()
        .cmp(&right.total_degree())
        .then_with(|| {
            let named = |monomial: &Monomial| {
                let mut list: Vec<_> = monomial
                    .factors()
                    .map(|(symbol, exponent)| (names.name(symbol), exponent))
                    .collect();
                list.sort_unstable();
                list
            };
            let (left, right) = (named(left), named(right));
            for (a, b) in left.iter().zip(&right) {
                let order = a.0.cmp(b.0).then(b.1.cmp(&a.1));
                if order != Ordering::Equal {
                    return order;
                }
            }
            right.len().cmp(&left.len())
        })
}

/// The terms of a polynomial in written order.
#[must_use]
pub fn written_terms<'a>(
    polynomial: &'a Polynomial,
    names: &SymbolTable,
) -> Vec<&'a (Monomial, Integer)> {
    let mut terms: Vec<_> = polynomial.terms().iter().collect();
    terms.sort_by(|a, b| written_order(&a.0, &b.0, names));
    terms
}

/// Sign of the leading term; 0 for the zero polynomial.
#[must_use]
pub fn leading_sign(polynomial: &Polynomial, names: &SymbolTable) -> i32 {
    polynomial
        .terms()
        .iter()
        .min_by(|a, b| written_order(&a.0, &b.0, names))
        .map_or(0, |(_, coefficient)| coefficient.signum())
}

/// The polynomial or its negative, so that the leading term is positive.
#[must_use]
pub fn with_positive_lead(polynomial: &Polynomial, names: &SymbolTable) -> Polynomial {
    if leading_sign(polynomial, names) < 0 {
        -polynomial
    } else {
        polynomial.clone()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn low_degrees_come_first_then_names_then_high_powers() {
        let mut names = SymbolTable::new();
        let mut symbol = |name: &str| Polynomial::symbol(names.intern(name));
        let (b, a, r10, r2) = (symbol("b"), symbol("a"), symbol("R10"), symbol("R2"));
        let sum =
            &(&(&(&a * &b) + &(&a * &a)) + &(&b * &b)) + &(&(&r10 + &r2) + &Polynomial::one());
        let written: Vec<Monomial> = written_terms(&sum, &names)
            .into_iter()
            .map(|(monomial, _)| monomial.clone())
            .collect();
        let only = |p: &Polynomial| p.terms()[0].0.clone();
        assert_eq!(
            written,
            vec![
                Monomial::one(),
                only(&r10),
                only(&r2),
                only(&(&a * &a)),
                only(&(&a * &b)),
                only(&(&b * &b)),
            ]
        );
    }

    #[test]
    fn the_lead_decides_the_sign() {
        let mut names = SymbolTable::new();
        let a = Polynomial::symbol(names.intern("a"));
        let b = Polynomial::symbol(names.intern("b"));
        let difference = &b - &a;
        assert_eq!(leading_sign(&difference, &names), -1);
        assert_eq!(with_positive_lead(&difference, &names), &a - &b);
    }
}
