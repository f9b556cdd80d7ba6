//! What the file states about signs: positive values, ranges, assumptions, couplings.

use std::collections::{BTreeMap, BTreeSet};

use crate::algebra::sign::{ProvenSign, SignFact, SignRules};
use crate::algebra::{Fraction, Polynomial, Rational, Symbol};
use crate::analysis::relations::Substitution;
use crate::budget::{Budget, Exceeded};
use crate::network::{Comparison, Network, Sign, Strength, Value};

/// Symbols of a polynomial whose corners are all looked at.
const MAX_CORNERS: usize = 14;

/// Signs of expressions in the independent symbols of a network, under its relations.
pub(crate) struct Knowledge<'a> {
    network: &'a Network,
    facts: Vec<Known>,
    /// A box that holds all symbols, in tolerance work.
    within: Option<BTreeMap<Symbol, (Rational, Rational)>>,
}

#[derive(Clone)]
struct Known {
    fact: SignFact,
    text: String,
}

/// A proven sign and what it rests on.
pub(crate) struct Judgement {
    /// The sign.
    pub(crate) sign: ProvenSign,
    /// Assumptions, ranges and positive symbols that were used, as text.
    pub(crate) relied_on: BTreeSet<String>,
}

impl<'a> Knowledge<'a> {
    /// Gathers what is stated, with the relations put in.
    pub(crate) fn new(
        network: &'a Network,
        substitution: &Substitution,
        budget: &Budget,
    ) -> Result<Self, Exceeded> {
        let mut knowledge = Self {
            network,
            facts: Vec::new(),
            within: None,
        };
        knowledge.add_ranges(substitution, budget)?;
        knowledge.add_couplings(substitution, budget)?;
        for assumption in network.assumptions() {
            let strict = assumption.comparison == Comparison::Positive;
            let Some(difference) = substitution.apply(&assumption.difference, budget)? else {
                continue;
            };
            knowledge.add(&difference, strict, assumption.text.clone());
        }
        Ok(knowledge)
    }

    fn add_ranges(&mut self, substitution: &Substitution, budget: &Budget) -> Result<(), Exceeded> {
        for facts in self.network.all_facts() {
            let mut ranges = Vec::new();
            if let Sign::Within(range) = &facts.sign {
                ranges.push(range);
            }
            ranges.extend(&facts.range);
            let name = self.network.symbols().name(facts.symbol);
            let value = substitution.value(facts.symbol);
            for range in ranges {
                if let Some(low) = &range.low {
                    let bound = Fraction::from(low.clone());
                    let difference = value.add(&bound.neg(), budget)?;
                    self.add(&difference, false, format!("{name} >= {low}"));
                }
                if let Some(high) = &range.high {
                    let bound = Fraction::from(high.clone());
                    let difference = bound.add(&value.neg(), budget)?;
                    self.add(&difference, false, format!("{name} <= {high}"));
                }
            }
        }
        Ok(())
    }

    fn add_couplings(
        &mut self,
        substitution: &Substitution,
        budget: &Budget,
    ) -> Result<(), Exceeded> {
        for coupling in self.network.couplings() {
            let one = Fraction::one();
            match &coupling.strength {
                Strength::Factor(Value::Symbol(k)) => {
                    let k = substitution.value(*k);
                    let square = k.mul(&k, budget)?;
                    let below = one.add(&k.neg(), budget)?;
                    let name = &coupling.name;
                    self.add(&below, true, format!("k < 1 in {name}"));
                    let below = one.add(&square.neg(), budget)?;
                    self.add(&below, true, format!("|k| < 1 in {name}"));
                }
                Strength::Mutual(Value::Symbol(mutual)) => {
                    let coil = |id| match self.network.element(id).value() {
                        Some(Value::Symbol(symbol)) => substitution.value(*symbol),
                        Some(Value::Number(number)) => Fraction::from(number.clone()),
                        None => Fraction::zero(),
                    };
                    let (first, second) = (coil(coupling.first), coil(coupling.second));
                    let mutual = substitution.value(*mutual);
                    let product = first.mul(&second, budget)?;
                    let square = mutual.mul(&mutual, budget)?;
                    let difference = product.add(&square.neg(), budget)?;
                    let text = format!("{}: M^2 < L1*L2", coupling.name);
                    self.add(&difference, true, text);
                }
                Strength::Factor(Value::Number(_)) | Strength::Mutual(Value::Number(_)) => {}
            }
        }
        Ok(())
    }

    /// n/d > 0 exactly when n·d > 0.
    fn add(&mut self, difference: &Fraction, strict: bool, text: String) {
        let polynomial = difference.numerator() * difference.denominator();
        if polynomial.is_zero() || polynomial.is_constant() {
            return;
        }
        self.facts.push(Known {
            fact: SignFact { polynomial, strict },
            text,
        });
    }

    /// The same with every symbol kept within the tolerance of its nominal.
    pub(crate) fn within_tolerance(&self) -> Self {
        let mut narrowed = Self {
            network: self.network,
            facts: self.facts.clone(),
            within: None,
        };
        let mut within = BTreeMap::new();
        for facts in self.network.all_facts() {
            let Some(nominal) = &facts.nominal else {
                continue;
            };
            if self.network.set_by(facts.symbol).is_some() {
                continue;
            }
            let zero = Rational::zero();
            let (up, down) = match &facts.tolerance {
                Some(tolerance) => (&tolerance.up, &tolerance.down),
                None => (&zero, &zero),
            };
            let size = nominal.abs();
            let (low, high) = (nominal - &(&size * down), nominal + &(&size * up));
            within.insert(facts.symbol, (low.clone(), high.clone()));
            let value = Polynomial::symbol(facts.symbol);
            let name = self.network.symbols().name(facts.symbol);
            let text = format!("{name} within its tolerance");
            for (bound, sign) in [(low, 1), (high, -1)] {
                let above = Polynomial::constant(bound.numerator().clone());
                let below = Polynomial::constant(bound.denominator().clone());
                let difference = &(&value * &below) - &above;
                narrowed.facts.push(Known {
                    fact: SignFact {
                        polynomial: difference.scale(&crate::algebra::Integer::from(sign)),
                        strict: false,
                    },
                    text: text.clone(),
                });
            }
        }
        narrowed.within = Some(within);
        narrowed
    }

    /// The sign over the box: a polynomial of degree one in each symbol has its extremes at the
    /// corners; others are bounded term by term where all symbols are positive.
    fn over_box(&self, polynomial: &Polynomial) -> Option<ProvenSign> {
        let within = self.within.as_ref()?;
        let symbols = polynomial.symbols();
        if symbols.iter().any(|symbol| !within.contains_key(symbol)) {
            return None;
        }
        let multi_affine = symbols.iter().all(|&symbol| polynomial.degree(symbol) <= 1);
        let (low, high) = if multi_affine && symbols.len() <= MAX_CORNERS {
            corners(polynomial, &symbols, within)?
        } else {
            term_bounds(polynomial, within)?
        };
        if low.signum() > 0 {
            Some(ProvenSign::Positive)
        } else if high.signum() < 0 {
            Some(ProvenSign::Negative)
        } else {
            None
        }
    }

    /// Whether an independent symbol is stated to be positive.
    pub(crate) fn is_positive(&self, symbol: Symbol) -> bool {
        if symbol == Symbol::PI {
            return true;
        }
        match self.network.facts(symbol).map(|facts| &facts.sign) {
            Some(Sign::Positive) => true,
            Some(Sign::Within(range)) => range.low.as_ref().is_some_and(|low| low.signum() > 0),
            Some(Sign::Real) | None => false,
        }
    }

    /// The sign of an irreducible polynomial (other polynomials too, with less success).
    pub(crate) fn judge(&self, polynomial: &Polynomial) -> Option<Judgement> {
        let positive = |symbol| self.is_positive(symbol);
        let rules = SignRules {
            positive: &positive,
            facts: self.facts.iter().map(|known| known.fact.clone()).collect(),
        };
        let Some((sign, used)) = rules.sign(polynomial) else {
            let sign = self.over_box(polynomial)?;
            let relied_on = BTreeSet::from(["the stated tolerances".to_owned()]);
            return Some(Judgement { sign, relied_on });
        };
        let mut relied_on: BTreeSet<String> = used
            .iter()
            .map(|&index| self.facts[index].text.clone())
            .collect();
        for symbol in polynomial.symbols() {
            if self.is_positive(symbol) && symbol != Symbol::PI {
                relied_on.insert(format!("{} > 0", self.network.symbols().name(symbol)));
            }
        }
        Some(Judgement { sign, relied_on })
    }

    /// Whether a choice of values breaks nothing that is stated.
    pub(crate) fn allows(&self, value: &dyn Fn(Symbol) -> Rational) -> bool {
        let signs = self.network.all_facts().all(|facts| {
            self.network.set_by(facts.symbol).is_some()
                || !self.is_positive(facts.symbol)
                || value(facts.symbol).signum() > 0
        });
        signs
            && self.facts.iter().all(|known| {
                let sign = known.fact.polynomial.value(value).signum();
                sign > 0 || (sign == 0 && !known.fact.strict)
            })
    }

    /// Values of the symbols of `polynomial` that are allowed and make it zero, if some are found.
    ///
    /// Every symbol of degree one is solved for, the others taken from the nominals and from small
    /// numbers.
    pub(crate) fn zero_of(&self, polynomial: &Polynomial) -> Option<Vec<(Symbol, Rational)>> {
        let symbols = polynomial.symbols();
        for attempt in 0..40_usize {
            for &unknown in symbols
                .iter()
                .filter(|&&symbol| polynomial.degree(symbol) == 1)
            {
                let trial = |symbol: Symbol| self.trial(symbol, attempt);
                let coefficients = polynomial.coefficients(unknown);
                let constant = coefficients[0].value(&trial);
                let Some(inverse) = coefficients[1].value(&trial).recip() else {
                    continue;
                };
                let solved = -(constant * inverse);
                let value = |symbol: Symbol| {
                    if symbol == unknown {
                        solved.clone()
                    } else {
                        trial(symbol)
                    }
                };
                if self.allows(&value) {
                    return Some(
                        symbols
                            .iter()
                            .map(|&symbol| (symbol, value(symbol)))
                            .collect(),
                    );
                }
            }
        }
        None
    }

    /// A value to try for a symbol: its nominal first, then small numbers.
    pub(crate) fn trial(&self, symbol: Symbol, attempt: usize) -> Rational {
        let facts = self.network.facts(symbol);
        if attempt == 0
            && let Some(nominal) = facts.and_then(|facts| facts.nominal.clone())
        {
            return nominal;
        }
        let spread = (symbol.index() * 7 + attempt * 13) % (2 + attempt);
        let number = i64::try_from(1 + spread).unwrap_or(1);
        let scale = if attempt % 3 == 2 { 10 } else { 1 };
        Rational::from(number)
            * Rational::from(scale)
                .recip()
                .unwrap_or(Rational::from(1_i64))
    }
}

/// A closed interval for each symbol.
type Intervals = BTreeMap<Symbol, (Rational, Rational)>;

/// Least and largest value at the corners.
fn corners(
    polynomial: &Polynomial,
    symbols: &[Symbol],
    within: &Intervals,
) -> Option<(Rational, Rational)> {
    let mut bounds: Option<(Rational, Rational)> = None;
    for corner in 0..1_usize << symbols.len() {
        let value = |symbol: Symbol| {
            let index = symbols.binary_search(&symbol).unwrap_or(0);
            let (low, high) = &within[&symbol];
            if corner >> index & 1 == 0 { low } else { high }.clone()
        };
        let found = polynomial.value(&value);
        bounds = Some(match bounds {
            None => (found.clone(), found),
            Some((low, high)) => (low.min(found.clone()), high.max(found)),
        });
    }
    bounds
}

/// Bounds term by term; `None` where a symbol may be negative.
fn term_bounds(polynomial: &Polynomial, within: &Intervals) -> Option<(Rational, Rational)> {
    let (mut low, mut high) = (Rational::zero(), Rational::zero());
    for (monomial, coefficient) in polynomial.terms() {
        let mut least = Rational::from(coefficient.clone());
        let mut most = least.clone();
        for (symbol, exponent) in monomial.factors() {
            let (from, to) = &within[&symbol];
            if from.signum() < 0 {
                return None;
            }
            let power = i32::try_from(exponent).ok()?;
            least = &least * &from.pow(power)?;
            most = &most * &to.pow(power)?;
        }
        if coefficient.signum() < 0 {
            std::mem::swap(&mut least, &mut most);
        }
        low = &low + &least;
        high = &high + &most;
    }
    Some((low, high))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::network::sketch::Sketch;

    #[test]
    fn real_symbols_decide_by_squares_alone() {
        let network = Sketch::of("R1 a ground; R2 a ground").finish();
        let substitution = Substitution::default();
        let budget = Budget::unlimited();
        let knowledge = Knowledge::new(&network, &substitution, &budget).expect("no budget");
        let find = |name: &str| Polynomial::symbol(network.symbols().find(name).expect("known"));
        let (a, b) = (find("R1"), find("R2"));
        let squares = &(&(&a * &a) + &(&b * &b)) + &Polynomial::one();
        let found = knowledge.judge(&squares).expect("decided");
        assert_eq!(found.sign, ProvenSign::Positive);
        assert!(knowledge.judge(&(&a - &b)).is_none());
        let zero = knowledge.zero_of(&(&a - &b)).expect("equal values");
        assert_eq!(zero[0].1, zero[1].1);
    }
}
