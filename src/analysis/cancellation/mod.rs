//! Why factors of numerator and denominator cancel: by structure, by matching, or by the nominals.

mod matched;
mod structural;
mod unwritten;

use std::collections::{BTreeMap, BTreeSet};
use std::time::Duration;

use crate::algebra::factor::factor;
use crate::algebra::gcd::gcd;
use crate::algebra::univariate::Univariate;
use crate::algebra::{
    Fraction, Integer, Polynomial, PolynomialRing, Rational, Symbol, SymbolTable,
};
use crate::analysis::couplings::Couplings;
use crate::analysis::hidden::{Hidden, hides};
use crate::analysis::line::{common_at, multiplicity_at};
use crate::analysis::normal::with_positive_lead;
use crate::analysis::order::ledger;
use crate::analysis::point::{Choice, Quantity};
use crate::analysis::relations::Substitution;
use crate::analysis::report::{Cancellation, Hides};
use crate::analysis::solve::{SEED, Setting, Solved, network_degrees, part_in_s};
use crate::analysis::symbolic::Symbolic;
use crate::budget::{Budget, Exceeded, Limits};
use crate::network::{Ask, CancellationClass, Network, Origin, RelationId};

/// Terms and time for the factors that hold a coincidence.
const FACTORING: (usize, Duration) = (20_000, Duration::from_secs(2));

/// Terms and time for one condition.
const STATED: (usize, Duration) = (5_000, Duration::from_millis(500));

/// All cancellations of one question.
pub(crate) struct Audit {
    /// Entries: structural, then matched, then coincidental.
    pub(crate) cancellations: Vec<Cancellation>,
    /// Symbols without a nominal, when coincidences were not looked for.
    pub(crate) nominals_missing: Vec<String>,
}

/// A common factor before it is tied to a side that hides it.
struct Found {
    factor: Polynomial,
    multiplicity: u32,
    parts: BTreeSet<String>,
}

/// What an audit works on.
struct Auditor<'a> {
    setting: &'a Setting<'a>,
    plain: &'a Substitution,
    names: &'a SymbolTable,
    question: usize,
    solved: &'a Solved,
}

/// Finds and classifies what cancels.
pub(crate) fn audit(
    setting: &Setting<'_>,
    plain: &Substitution,
    names: &SymbolTable,
    question: usize,
    solved: &Solved,
) -> Result<Audit, Exceeded> {
    let auditor = Auditor {
        setting,
        plain,
        names,
        question,
        solved,
    };
    auditor.run()
}

impl Auditor<'_> {
    fn network(&self) -> &Network {
        self.setting.network
    }

    fn run(&self) -> Result<Audit, Exceeded> {
        let mut cancellations = Vec::new();
        if self.solved.degrees.zero {
            return Ok(Audit {
                cancellations,
                nominals_missing: Vec::new(),
            });
        }
        if self.solved.pairing.is_large() {
            return Err(Exceeded::States(self.setting.budget.limits().states));
        }
        let common = self.common()?;
        if common.degree(Symbol::S) > 0 {
            let structural = self.structural()?;
            let mut rest = common.clone();
            for found in &structural {
                for _ in 0..found.multiplicity {
                    rest = rest.div_exact(&found.factor).unwrap_or(rest);
                }
            }
            for found in structural {
                self.structural_entries(found, &mut cancellations);
            }
            for (factor, multiplicity) in factors_in_s(&rest, self.setting.budget)? {
                self.matched_entries(&factor, multiplicity, &mut cancellations);
            }
        }
        let nominals_missing = match &self.solved.function {
            Ok(reduced) => self.coincidental(&reduced.fraction, &mut cancellations)?,
            Err(_) => self.coincidental_by_numbers(&common, &mut cancellations)?,
        };
        Ok(Audit {
            cancellations,
            nominals_missing,
        })
    }

    // ---- coincidental ---------------------------------------------------------------------------

    /// Common factors at the nominals; the names of missing nominals otherwise.
    fn coincidental(
        &self,
        function: &Fraction,
        entries: &mut Vec<Cancellation>,
    ) -> Result<Vec<String>, Exceeded> {
        let budget = self.setting.budget;
        let (numerator, denominator) = self
            .setting
            .couplings
            .written(function.numerator(), function.denominator());
        if numerator.degree(Symbol::S) == 0 || denominator.degree(Symbol::S) == 0 {
            return Ok(Vec::new());
        }
        let mut missing = BTreeSet::new();
        for symbol in [numerator.symbols(), denominator.symbols()].concat() {
            if symbol != Symbol::S && symbol != Symbol::PI && self.nominal(symbol).is_none() {
                missing.insert(self.names.name(symbol).to_owned());
            }
        }
        if !missing.is_empty() {
            return Ok(missing.into_iter().collect());
        }
        let at_nominals = |polynomial: &Polynomial| {
            polynomial
                .evaluate(&|symbol| self.nominal(symbol))
                .0
                .primitive()
        };
        let common = gcd(&at_nominals(&numerator), &at_nominals(&denominator), budget)?;
        if common.degree(Symbol::S) == 0 {
            return Ok(Vec::new());
        }
        for (nominal_factor, multiplicity) in factors_in_s(&common, budget)? {
            let (factor, conditions) = self.coincidence(&numerator, &denominator, &nominal_factor);
            let mut entry = self.entry(CancellationClass::Coincidental, &factor, multiplicity);
            entry.degree = nominal_factor.degree(Symbol::S);
            entry.conditions = conditions;
            entries.push(entry);
        }
        Ok(Vec::new())
    }

    /// The symbolic factor of the denominator that holds the common root, and the conditions that
    /// happen to be met. That something cancels needs no condition: where one would be too long to
    /// state, it is left out, and the common factor itself is shown where no symbolic one is found.
    fn coincidence(
        &self,
        numerator: &Polynomial,
        denominator: &Polynomial,
        common: &Polynomial,
    ) -> (Polynomial, Vec<Polynomial>) {
        let budget = sparing(self.setting.budget, FACTORING);
        let above = self.holding(numerator, common, &budget).unwrap_or_default();
        let below = self
            .holding(denominator, common, &budget)
            .unwrap_or_default();
        let mut pairs: Vec<(&Polynomial, &Polynomial)> = above
            .iter()
            .flat_map(|upper| below.iter().map(move |lower| (upper, lower)))
            .collect();
        pairs.sort_by_key(|(upper, lower)| upper.degree(Symbol::S) + lower.degree(Symbol::S));
        let mut conditions: Vec<Polynomial> = Vec::new();
        for (upper, lower) in pairs {
            for condition in self.condition(upper, lower).unwrap_or_default() {
                if !conditions.contains(&condition) {
                    conditions.push(condition);
                }
            }
        }
        let whole = below
            .iter()
            .find(|part| part.degree(Symbol::S) == common.degree(Symbol::S));
        let shown = whole.unwrap_or(common).clone();
        (shown, conditions)
    }

    /// The factors that share a root with the common factor at the nominals.
    fn holding(
        &self,
        polynomial: &Polynomial,
        common: &Polynomial,
        budget: &Budget,
    ) -> Result<Vec<Polynomial>, Exceeded> {
        let mut holding = Vec::new();
        for (part, _) in factors_in_s(polynomial, budget)? {
            let value = part.evaluate(&|symbol| self.nominal(symbol)).0;
            if gcd(&value, common, budget)?.degree(Symbol::S) > 0 {
                holding.push(part);
            }
        }
        Ok(holding)
    }

    /// What has to vanish for two factors to share a root, and vanishes at the nominals.
    fn condition(
        &self,
        upper: &Polynomial,
        lower: &Polynomial,
    ) -> Result<Vec<Polynomial>, Exceeded> {
        let budget = &sparing(self.setting.budget, STATED);
        let resultant = crate::algebra::resultant::resultant(upper, lower, Symbol::S, budget)?;
        let parts = factor(&resultant, budget)?.factors;
        let met = |part: &Polynomial| part.evaluate(&|symbol| self.nominal(symbol)).0.is_zero();
        Ok(parts
            .iter()
            .filter(|(part, _)| met(part))
            .map(|(part, _)| with_positive_lead(part, self.names))
            .collect())
    }

    fn nominal(&self, symbol: Symbol) -> Option<Rational> {
        nominal(self.network(), self.plain, self.setting.couplings, symbol)
    }

    // ---- entries --------------------------------------------------------------------------------

    fn entry(
        &self,
        class: CancellationClass,
        factor: &Polynomial,
        multiplicity: u32,
    ) -> Cancellation {
        let (written, _) = self.setting.couplings.written(factor, &Polynomial::one());
        Cancellation {
            class,
            degree: factor.degree(Symbol::S),
            factor: with_positive_lead(&written, self.names),
            multiplicity,
            hides: None,
            parts: Vec::new(),
            static_set: Vec::new(),
            because: Vec::new(),
            also_because: Vec::new(),
            conditions: Vec::new(),
            factored: true,
        }
    }

    /// Which side hides a factor: one word for the whole power, or one for each copy.
    fn sides(&self, factor: &Polynomial, multiplicity: u32) -> Vec<(u32, Option<Hides>)> {
        let question = &self.network().questions()[self.question];
        if !matches!(question.ask, Ask::Transfer { .. } | Ask::Impedance(_)) {
            return vec![(multiplicity, None)];
        }
        let answer = hides(
            self.network(),
            self.setting.couplings,
            self.question,
            factor,
            multiplicity,
        );
        match answer {
            Hidden::One(word) => vec![(multiplicity, Some(word))],
            Hidden::Each(words) => words.into_iter().map(|word| (1, Some(word))).collect(),
            Hidden::Unknown => vec![(multiplicity, None)],
        }
    }
}

/// A smaller budget for what an answer can do without, within the time of the whole.
fn sparing(budget: &Budget, (terms, time): (usize, Duration)) -> Budget {
    let limits = budget.limits();
    Budget::new(Limits {
        terms: limits.terms.min(terms),
        time: limits.time.min(time),
        ..limits
    })
}

/// What cancels as one product, where its factors were not found within the budget; `None` where not
/// even the product is known.
pub(crate) fn whole(
    setting: &Setting<'_>,
    names: &SymbolTable,
    solved: &Solved,
) -> Option<Vec<Cancellation>> {
    let reduced = solved.function.as_ref().ok()?;
    if reduced.common.degree(Symbol::S) == 0 {
        return Some(Vec::new());
    }
    let released = solved.pairing.lucky(setting.network, SEED, 1, &|_| true)?;
    let field = solved.pairing.field();
    let structural = released
        .numerator
        .gcd(&released.denominator, field)
        .degree()?;
    let degree = reduced.common.degree(Symbol::S);
    let class = if structural >= degree as usize {
        CancellationClass::Structural
    } else {
        CancellationClass::Matched
    };
    let (written, _) = setting
        .couplings
        .written(&reduced.common, &Polynomial::one());
    Some(vec![Cancellation {
        class,
        factor: with_positive_lead(&written, names),
        degree,
        multiplicity: 1,
        hides: None,
        parts: Vec::new(),
        static_set: Vec::new(),
        because: Vec::new(),
        also_because: Vec::new(),
        conditions: Vec::new(),
        factored: false,
    }])
}

/// Nominal value of a symbol of an answer; M_T of a coupling by factor only where it is rational.
pub(crate) fn nominal(
    network: &Network,
    plain: &Substitution,
    couplings: &Couplings,
    symbol: Symbol,
) -> Option<Rational> {
    if let Some(facts) = network.facts(symbol)
        && let Some(found) = &facts.nominal
    {
        return Some(found.clone());
    }
    if network.set_by(symbol).is_some() {
        let value = plain.value(symbol);
        let known = value.symbols().into_iter().all(|inner| {
            network
                .facts(inner)
                .is_some_and(|facts| facts.nominal.is_some())
        });
        if known {
            return value.value(&|inner| {
                network
                    .facts(inner)
                    .and_then(|facts| facts.nominal.clone())
                    .unwrap_or_else(Rational::zero)
            });
        }
    }
    let _ = couplings;
    None
}

/// Irreducible factors of positive degree in s.
pub(crate) fn factors_in_s(
    polynomial: &Polynomial,
    budget: &Budget,
) -> Result<Vec<(Polynomial, u32)>, Exceeded> {
    if polynomial.degree(Symbol::S) == 0 {
        return Ok(Vec::new());
    }
    let mut factors = factor(polynomial, budget)?.factors;
    factors.retain(|(factor, _)| factor.degree(Symbol::S) > 0);
    Ok(factors)
}
