//! Stability for all allowed values: the conditions of Liénard & Chipart (1914), decided by signs.
//!
//! A polynomial with positive leading coefficient has all its roots in the left half-plane exactly
//! when all coefficients and every second Hurwitz determinant, counted from the last but one down,
//! are positive.

use std::collections::BTreeSet;

use crate::algebra::factor::factor;
use crate::algebra::resultant::determinant;
use crate::algebra::sign::ProvenSign;
use crate::algebra::{Polynomial, Rational, Symbol};
use crate::analysis::knowledge::Knowledge;
use crate::analysis::report::Verdict;
use crate::budget::{Budget, Exceeded};

/// Points that are tried to refute stability.
const TRIALS: usize = 400;

/// The fate of a stability claim.
pub(crate) struct Stability {
    /// Whether every root has a negative real part for all allowed values.
    pub(crate) verdict: Verdict,
    /// Conditions that are not proven: each must be positive.
    pub(crate) open: Vec<Polynomial>,
    /// Allowed values at which it is not stable.
    pub(crate) example: Vec<(Symbol, Rational)>,
    /// What the proofs rest on.
    pub(crate) relied_on: BTreeSet<String>,
}

/// Decides for a denominator in s, factor by factor.
pub(crate) fn decide(
    denominator: &Polynomial,
    knowledge: &Knowledge<'_>,
    budget: &Budget,
) -> Result<Stability, Exceeded> {
    let mut whole = Stability {
        verdict: Verdict::Yes,
        open: Vec::new(),
        example: Vec::new(),
        relied_on: BTreeSet::new(),
    };
    for (part, _) in factor(denominator, budget)?.factors {
        if part.degree(Symbol::S) == 0 {
            continue;
        }
        let found = decide_factor(&part, knowledge, budget)?;
        whole.verdict = match (whole.verdict, found.verdict) {
            (Verdict::No, _) | (_, Verdict::No) => Verdict::No,
            (Verdict::Undecided, _) | (_, Verdict::Undecided) => Verdict::Undecided,
            (Verdict::Yes, Verdict::Yes) => Verdict::Yes,
        };
        for condition in found.open {
            if !condition.is_constant() && !whole.open.contains(&condition) {
                whole.open.push(condition);
            }
        }
        if whole.example.is_empty() {
            whole.example = found.example;
        }
        whole.relied_on.extend(found.relied_on);
    }
    Ok(whole)
}

/// Decides for one factor.
fn decide_factor(
    denominator: &Polynomial,
    knowledge: &Knowledge<'_>,
    budget: &Budget,
) -> Result<Stability, Exceeded> {
    let mut stability = Stability {
        verdict: Verdict::Yes,
        open: Vec::new(),
        example: Vec::new(),
        relied_on: BTreeSet::new(),
    };
    let mut coefficients = denominator.coefficients(Symbol::S);
    if coefficients.len() < 2 {
        return Ok(stability);
    }
    if coefficients[0].is_zero() {
        stability.verdict = Verdict::No;
        return Ok(stability);
    }
    let lead = coefficients[coefficients.len() - 1].clone();
    if let Some((sign, _)) = sign_of(&lead, knowledge, budget)?
        && matches!(sign, ProvenSign::Negative | ProvenSign::NonPositive)
    {
        coefficients = coefficients.iter().map(|part| -part).collect();
    }
    for condition in conditions(&coefficients, budget)? {
        match sign_of(&condition, knowledge, budget)? {
            Some((ProvenSign::Positive, relied_on)) => stability.relied_on.extend(relied_on),
            Some((ProvenSign::Negative | ProvenSign::NonPositive | ProvenSign::Zero, _)) => {
                stability.verdict = Verdict::No;
                stability.open.push(condition);
            }
            Some((ProvenSign::NonNegative, _)) | None => stability.open.push(condition),
        }
    }
    if stability.open.is_empty() {
        return Ok(stability);
    }
    if let Some(example) = counterexample(&coefficients, &stability.open, knowledge, budget)? {
        stability.verdict = Verdict::No;
        stability.example = example;
    } else if stability.verdict == Verdict::Yes {
        stability.verdict = Verdict::Undecided;
    }
    stability.open = essential(&stability.open, knowledge, budget)?;
    Ok(stability)
}

/// All coefficients, and the Hurwitz determinants of order n − 1, n − 3, ….
fn conditions(coefficients: &[Polynomial], budget: &Budget) -> Result<Vec<Polynomial>, Exceeded> {
    let mut list: Vec<Polynomial> = coefficients.to_vec();
    let degree = coefficients.len() - 1;
    let mut order = degree.saturating_sub(1);
    while order >= 2 {
        list.push(hurwitz(coefficients, order, budget)?);
        order = order.saturating_sub(2);
    }
    Ok(list)
}

/// The Hurwitz determinant of an order: entry (i, j) is the coefficient of s^(n − 2j + i).
fn hurwitz(
    coefficients: &[Polynomial],
    order: usize,
    budget: &Budget,
) -> Result<Polynomial, Exceeded> {
    let degree = coefficients.len() - 1;
    let entry = |row: usize, column: usize| {
        let power = (degree + row + 1).checked_sub(2 * (column + 1))?;
        coefficients.get(power)
    };
    let rows = (0..order)
        .map(|row| {
            (0..order)
                .map(|column| entry(row, column).cloned().unwrap_or_default())
                .collect()
        })
        .collect();
    determinant(rows, budget)
}

/// The sign of a product of factors.
fn sign_of(
    polynomial: &Polynomial,
    knowledge: &Knowledge<'_>,
    budget: &Budget,
) -> Result<Option<(ProvenSign, BTreeSet<String>)>, Exceeded> {
    if let Some(judgement) = knowledge.judge(polynomial)
        && (judgement.sign.is_never_zero() || judgement.sign == ProvenSign::Zero)
    {
        return Ok(Some((judgement.sign, judgement.relied_on)));
    }
    let factorisation = factor(polynomial, budget)?;
    let mut sign = if factorisation.unit.signum() < 0 {
        ProvenSign::Negative
    } else {
        ProvenSign::Positive
    };
    let mut relied_on = BTreeSet::new();
    for (part, power) in factorisation.factors {
        let Some(judgement) = knowledge.judge(&part) else {
            return Ok(None);
        };
        relied_on.extend(judgement.relied_on);
        for _ in 0..power {
            sign = sign.times(judgement.sign);
        }
    }
    Ok(Some((sign, relied_on)))
}

/// Allowed values at which some root is not in the left half-plane.
fn counterexample(
    coefficients: &[Polynomial],
    open: &[Polynomial],
    knowledge: &Knowledge<'_>,
    budget: &Budget,
) -> Result<Option<Vec<(Symbol, Rational)>>, Exceeded> {
    let mut symbols: Vec<Symbol> = coefficients.iter().flat_map(Polynomial::symbols).collect();
    symbols.sort_unstable();
    symbols.dedup();
    let named = |value: &dyn Fn(Symbol) -> Rational| {
        symbols
            .iter()
            .map(|&symbol| (symbol, value(symbol)))
            .collect::<Vec<_>>()
    };
    for attempt in 0..TRIALS {
        budget.time()?;
        let value = |symbol: Symbol| knowledge.trial(symbol, attempt);
        if knowledge.allows(&value) && open.iter().any(|part| part.value(&value).signum() <= 0) {
            return Ok(Some(named(&value)));
        }
    }
    for condition in open {
        for (part, _) in factor(condition, budget)?.factors {
            if let Some(found) = knowledge.zero_of(&part) {
                let value = |symbol: Symbol| {
                    found
                        .iter()
                        .find(|(known, _)| *known == symbol)
                        .map_or_else(|| knowledge.trial(symbol, 1), |(_, value)| value.clone())
                };
                if knowledge.allows(&value) {
                    return Ok(Some(named(&value)));
                }
            }
        }
    }
    Ok(None)
}

/// Conditions without factors that are positive anyway, each once.
fn essential(
    open: &[Polynomial],
    knowledge: &Knowledge<'_>,
    budget: &Budget,
) -> Result<Vec<Polynomial>, Exceeded> {
    let mut list: Vec<Polynomial> = Vec::new();
    for condition in open {
        let factorisation = factor(condition, budget)?;
        let mut kept = Polynomial::constant(factorisation.unit.signum());
        for (part, power) in factorisation.factors {
            let sign = knowledge.judge(&part).map(|judgement| judgement.sign);
            match sign {
                Some(ProvenSign::Positive) => {}
                Some(ProvenSign::Negative) => {
                    if power % 2 == 1 {
                        kept = -kept;
                    }
                }
                _ => kept = &kept * &part.pow(power),
            }
        }
        if !list.contains(&kept) {
            list.push(kept);
        }
    }
    Ok(list)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::algebra::SymbolTable;

    /// Σ c·s^k
    fn polynomial(coefficients: &[i64]) -> Vec<Polynomial> {
        coefficients
            .iter()
            .map(|&c| Polynomial::constant(c))
            .collect()
    }

    #[test]
    fn hurwitz_determinants_of_a_quartic() {
        // source: Hurwitz 1895; for a4 … a0 = 1, 10, 35, 50, 24 = (s+1)(s+2)(s+3)(s+4)
        let coefficients = polynomial(&[24, 50, 35, 10, 1]);
        let budget = Budget::unlimited();
        let second = hurwitz(&coefficients, 2, &budget).expect("ok");
        assert_eq!(second, Polynomial::constant(10 * 35 - 50));
        let third = hurwitz(&coefficients, 3, &budget).expect("ok");
        assert_eq!(
            third,
            Polynomial::constant(50 * (10 * 35 - 50) - 10 * 10 * 24)
        );
    }

    #[test]
    fn a_cubic_needs_one_condition_beside_its_signs() {
        let mut table = SymbolTable::new();
        let [a, b, c] = ["a", "b", "c"].map(|name| Polynomial::symbol(table.intern(name)));
        // s³ + a·s² + b·s + c: a·b − c > 0
        let coefficients = vec![c.clone(), b.clone(), a.clone(), Polynomial::one()];
        let list = conditions(&coefficients, &Budget::unlimited()).expect("ok");
        assert!(list.contains(&(&(&a * &b) - &c)));
        assert_eq!(list.len(), 5);
    }
}
