//! Signs of polynomials on the set where some symbols are positive and some polynomials are known
//! to be positive. A proof by terms; what it cannot prove it leaves undecided.

use std::collections::BTreeSet;

use crate::algebra::{Integer, Monomial, Polynomial, Symbol};

/// A polynomial that is known not to be negative.
#[derive(Clone, Debug)]
pub struct SignFact {
    /// The polynomial.
    pub polynomial: Polynomial,
    /// Never zero either.
    pub strict: bool,
}

/// A proven sign.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum ProvenSign {
    /// > 0
    Positive,
    /// ≥ 0
    NonNegative,
    /// = 0
    Zero,
    /// ≤ 0
    NonPositive,
    /// < 0
    Negative,
}

impl ProvenSign {
    /// Sign of the negated quantity.
    #[must_use]
    pub fn flipped(self) -> Self {
        match self {
            Self::Positive => Self::Negative,
            Self::NonNegative => Self::NonPositive,
            Self::Zero => Self::Zero,
            Self::NonPositive => Self::NonNegative,
            Self::Negative => Self::Positive,
        }
    }

    /// Sign of a product.
    #[must_use]
    pub fn times(self, other: Self) -> Self {
        let strict = |sign: Self| matches!(sign, Self::Positive | Self::Negative);
        let down = |sign: Self| matches!(sign, Self::NonPositive | Self::Negative);
        if self == Self::Zero || other == Self::Zero {
            return Self::Zero;
        }
        match (strict(self) && strict(other), down(self) != down(other)) {
            (true, false) => Self::Positive,
            (true, true) => Self::Negative,
            (false, false) => Self::NonNegative,
            (false, true) => Self::NonPositive,
        }
    }

    /// Whether zero is excluded.
    #[must_use]
    pub fn is_never_zero(self) -> bool {
        matches!(self, Self::Positive | Self::Negative)
    }
}

/// What is known: positive symbols and facts.
pub struct SignRules<'a> {
    /// Whether a symbol is positive; others are any real number.
    pub positive: &'a dyn Fn(Symbol) -> bool,
    /// Known polynomials.
    pub facts: Vec<SignFact>,
}

/// Steps after which a search for a proof stops.
const STEPS: usize = 24;

impl SignRules<'_> {
    /// The sign of `polynomial`, with the indices of the facts the proof rests on.
    ///
    /// Complete for polynomials whose terms agree in sign; otherwise negative terms are covered by
    /// multiples of the facts, greedily. `None` means undecided.
    ///
    /// Cost: O(steps · facts · terms).
    #[must_use]
    pub fn sign(&self, polynomial: &Polynomial) -> Option<(ProvenSign, BTreeSet<usize>)> {
        if polynomial.is_zero() {
            return Some((ProvenSign::Zero, BTreeSet::new()));
        }
        self.not_negative(polynomial).or_else(|| {
            self.not_negative(&-polynomial)
                .map(|(sign, used)| (sign.flipped(), used))
        })
    }

    fn not_negative(&self, polynomial: &Polynomial) -> Option<(ProvenSign, BTreeSet<usize>)> {
        let mut rest = polynomial.clone();
        let mut used = BTreeSet::new();
        let mut strict = false;
        for _ in 0..STEPS {
            if self.uncovered(&rest) == 0 {
                strict |= rest
                    .terms()
                    .iter()
                    .any(|(monomial, _)| self.is_positive(monomial));
                let sign = if strict {
                    ProvenSign::Positive
                } else {
                    ProvenSign::NonNegative
                };
                return Some((sign, used));
            }
            let (next, fact, positive) = self.best_step(&rest)?;
            rest = next;
            used.insert(fact);
            strict |= positive;
        }
        None
    }

    /// Number of terms that are not known to be ≥ 0.
    fn uncovered(&self, polynomial: &Polynomial) -> usize {
        polynomial
            .terms()
            .iter()
            .filter(|(monomial, coefficient)| {
                coefficient.signum() < 0 || !self.is_not_negative(monomial)
            })
            .count()
    }

    fn is_positive(&self, monomial: &Monomial) -> bool {
        monomial
            .factors()
            .all(|(symbol, _)| (self.positive)(symbol))
    }

    fn is_not_negative(&self, monomial: &Monomial) -> bool {
        monomial
            .factors()
            .all(|(symbol, exponent)| exponent % 2 == 0 || (self.positive)(symbol))
    }

    /// Takes a multiple of a fact away so that a negative term goes; the step that leaves the fewest
    /// uncovered terms.
    fn best_step(&self, rest: &Polynomial) -> Option<(Polynomial, usize, bool)> {
        let mut best: Option<(usize, Polynomial, usize, bool)> = None;
        for (target, coefficient) in rest.terms() {
            if coefficient.signum() > 0 {
                continue;
            }
            for (index, fact) in self.facts.iter().enumerate() {
                for candidate in self.steps_for(rest, target, coefficient, fact) {
                    let (next, positive) = candidate;
                    let open = self.uncovered(&next);
                    let better = best
                        .as_ref()
                        .is_none_or(|(count, poly, ..)| (open, next.len()) < (*count, poly.len()));
                    if better {
                        best = Some((open, next, index, positive));
                    }
                }
            }
        }
        best.map(|(_, next, index, positive)| (next, index, positive))
    }

    fn steps_for(
        &self,
        rest: &Polynomial,
        target: &Monomial,
        coefficient: &Integer,
        fact: &SignFact,
    ) -> Vec<(Polynomial, bool)> {
        let mut found = Vec::new();
        for (monomial, weight) in fact.polynomial.terms() {
            if weight.signum() > 0 {
                continue;
            }
            let Some(multiplier) = target.div(monomial) else {
                continue;
            };
            if !self.is_not_negative(&multiplier) {
                continue;
            }
            let scaled = rest.scale(&weight.abs());
            let covered = fact
                .polynomial
                .mul_monomial(&multiplier)
                .scale(&coefficient.abs());
            found.push((
                &scaled - &covered,
                fact.strict && self.is_positive(&multiplier),
            ));
        }
        found
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::algebra::SymbolTable;

    fn symbols() -> (Polynomial, Polynomial, Polynomial) {
        let mut table = SymbolTable::new();
        let mut make = |name: &str| Polynomial::symbol(table.intern(name));
        (make("a"), make("b"), make("c"))
    }

    #[test]
    fn sums_of_positive_terms_are_positive() {
        let (a, b, _) = symbols();
        let rules = SignRules {
            positive: &|_| true,
            facts: Vec::new(),
        };
        assert_eq!(
            rules.sign(&(&a + &b)).map(|s| s.0),
            Some(ProvenSign::Positive)
        );
        assert_eq!(
            rules.sign(&-(&a * &b)).map(|s| s.0),
            Some(ProvenSign::Negative)
        );
        assert!(rules.sign(&(&a - &b)).is_none());
    }

    #[test]
    fn a_real_symbol_counts_only_in_even_powers() {
        let (a, b, _) = symbols();
        let real = a.as_symbol();
        let rules = SignRules {
            positive: &|symbol| Some(symbol) != real,
            facts: Vec::new(),
        };
        assert!(rules.sign(&(&a + &b)).is_none());
        let square = &(&a * &a) + &b;
        assert_eq!(rules.sign(&square).map(|s| s.0), Some(ProvenSign::Positive));
        assert_eq!(
            rules.sign(&(&a * &a)).map(|s| s.0),
            Some(ProvenSign::NonNegative)
        );
    }

    #[test]
    fn facts_cover_negative_terms() {
        let (a, b, c) = symbols();
        let rules = SignRules {
            positive: &|_| true,
            facts: vec![SignFact {
                polynomial: &a - &b,
                strict: true,
            }],
        };
        let claim = &(&(&a * &c) - &(&b * &c)) + &(&a - &b);
        let (sign, used) = rules.sign(&claim).expect("decided");
        assert_eq!(sign, ProvenSign::Positive);
        assert!(used.contains(&0));
        let weak = SignRules {
            positive: &|_| true,
            facts: vec![SignFact {
                polynomial: &a - &b,
                strict: false,
            }],
        };
        assert_eq!(
            weak.sign(&(&a - &b)).map(|s| s.0),
            Some(ProvenSign::NonNegative)
        );
    }
}
