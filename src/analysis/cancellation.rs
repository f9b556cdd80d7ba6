//! Why factors of numerator and denominator cancel: by structure, by matching, or by the nominals.

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
        let Ok(reduced) = &self.solved.function else {
            return Ok(Audit {
                cancellations,
                nominals_missing: Vec::new(),
            });
        };
        if self.solved.degrees.zero {
            return Ok(Audit {
                cancellations,
                nominals_missing: Vec::new(),
            });
        }
        if reduced.common.degree(Symbol::S) > 0 {
            let structural = self.structural()?;
            let mut rest = reduced.common.clone();
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
        let nominals_missing = self.coincidental(&reduced.fraction, &mut cancellations)?;
        Ok(Audit {
            cancellations,
            nominals_missing,
        })
    }

    // ---- structural -----------------------------------------------------------------------------

    /// Factors that cancel whatever the values, written with the relations put in.
    fn structural(&self) -> Result<Vec<Found>, Exceeded> {
        let pairing = &self.solved.pairing;
        let field = pairing.field();
        let released = |_: RelationId| true;
        let Some(sample) = pairing.lucky(self.network(), SEED, 1, &released) else {
            return Ok(Vec::new());
        };
        let common = sample.numerator.gcd(&sample.denominator, field);
        let wanted = common.degree().unwrap_or(0);
        if wanted == 0 || sample.numerator.is_zero() {
            return Ok(Vec::new());
        }
        let involved = self.involved(&common);
        for attempt in 0..4_u64 {
            let Some(found) = self.structural_attempt(&involved, wanted, attempt)? else {
                continue;
            };
            return Ok(found);
        }
        Ok(Vec::new())
    }

    /// Independent quantities that the structural factor depends on.
    fn involved(&self, common: &Univariate) -> BTreeSet<Quantity> {
        let field = self.solved.pairing.field();
        self.quantities()
            .into_iter()
            .filter(|&quantity| {
                let choice = Choice {
                    seed: SEED,
                    shift: 1,
                    released: &|_| true,
                    salt: Some(quantity),
                };
                self.solved
                    .pairing
                    .sample(self.network(), &choice)
                    .is_none_or(|sample| {
                        sample.numerator.gcd(&sample.denominator, field) != *common
                    })
            })
            .collect()
    }

    /// All independent quantities when every relation is released.
    fn quantities(&self) -> BTreeSet<Quantity> {
        let mut quantities: BTreeSet<Quantity> = self
            .network()
            .all_facts()
            .filter(|facts| facts.origin != Origin::Derived)
            .filter(|facts| self.network().set_by(facts.symbol).is_none())
            .map(|facts| Quantity::Free(facts.symbol))
            .collect();
        for (id, relation) in self.network().relations() {
            for (symbol, value) in &relation.sets {
                if relation.has_s() {
                    quantities.extend(
                        value
                            .symbols()
                            .into_iter()
                            .filter(|parameter| *parameter != Symbol::S && *parameter != Symbol::PI)
                            .map(|parameter| Quantity::Copy(id, parameter)),
                    );
                } else {
                    quantities.insert(Quantity::Released(*symbol));
                }
            }
        }
        quantities
    }

    /// The structural factor over the involved quantities, all others integers; factored and written
    /// with the relations put in.
    fn structural_attempt(
        &self,
        involved: &BTreeSet<Quantity>,
        wanted: usize,
        attempt: u64,
    ) -> Result<Option<Vec<Found>>, Exceeded> {
        let budget = self.setting.budget;
        let mut table = self.names.clone();
        let mut copies: BTreeMap<Symbol, (RelationId, Symbol)> = BTreeMap::new();
        let mut substitution =
            Substitution::released(self.network(), &mut table, &mut copies, budget)?;
        let mut numbers: BTreeMap<Symbol, Fraction> = BTreeMap::new();
        for quantity in self.quantities() {
            if involved.contains(&quantity) {
                continue;
            }
            let symbol = match quantity {
                Quantity::Free(symbol) | Quantity::Released(symbol) => Some(symbol),
                Quantity::Copy(id, parameter) => copies
                    .iter()
                    .find(|(_, origin)| **origin == (id, parameter))
                    .map(|(copy, _)| *copy),
            };
            if let Some(symbol) = symbol {
                let index = symbol.index() as u64;
                let value = 2 + (index * 37 + attempt * 101) % 211;
                // Squares, so that mutual inductances of couplings stay rational.
                numbers.insert(symbol, Fraction::from(Integer::from(value * value)));
            }
        }
        let keys: Vec<Symbol> = numbers.keys().copied().collect();
        substitution.extend(
            &|symbol| numbers.get(&symbol).cloned(),
            keys.into_iter(),
            budget,
        )?;
        let Ok(couplings) = Couplings::new(self.network(), &mut substitution, &mut table, budget)?
        else {
            return Ok(None);
        };
        let symbolic = Symbolic::new(self.network(), &substitution, &couplings, budget)?;
        let ring = PolynomialRing { budget };
        let (numerator, denominator) = self.solved.pairing.expand(&ring, &symbolic)?;
        let common = part_in_s(&gcd(&numerator, &denominator, budget)?, budget)?;
        if common.degree(Symbol::S) as usize != wanted {
            return Ok(None);
        }
        let mut found: Vec<Found> = Vec::new();
        for (independent, power) in factors_in_s(&common, budget)? {
            let parts = self.parts_of(&independent, &copies, &couplings);
            let Some(related) = self.related(&independent, &copies, &couplings)? else {
                return Ok(None);
            };
            for (factor, times) in factors_in_s(&related, budget)? {
                let count = power * times;
                match found.iter_mut().find(|known| known.factor == factor) {
                    Some(known) => {
                        known.multiplicity += count;
                        known.parts.extend(parts.iter().cloned());
                    }
                    None => found.push(Found {
                        factor,
                        multiplicity: count,
                        parts: parts.clone(),
                    }),
                }
            }
        }
        Ok(Some(found))
    }

    /// A factor over independent symbols with the relations put in.
    fn related(
        &self,
        independent: &Polynomial,
        copies: &BTreeMap<Symbol, (RelationId, Symbol)>,
        couplings: &Couplings,
    ) -> Result<Option<Polynomial>, Exceeded> {
        let budget = self.setting.budget;
        let rooted = self.setting.couplings.roots();
        let value = |symbol: Symbol| {
            if let Some((_, parameter)) = copies.get(&symbol) {
                return Some(self.setting.rooted.value(*parameter));
            }
            let root = couplings.roots().iter().find(|(_, root)| **root == symbol);
            if let Some((inductance, _)) = root {
                return rooted.get(inductance).map(|root| Fraction::symbol(*root));
            }
            Some(self.setting.rooted.value(symbol))
        };
        let unknown = independent
            .symbols()
            .into_iter()
            .any(|symbol| value(symbol).is_none());
        if unknown {
            return Ok(None);
        }
        let fraction = Fraction::from(independent.clone()).substitute(&value, budget)?;
        Ok(fraction.map(|fraction| fraction.numerator().clone()))
    }

    /// Names of the symbols of a structural factor that do not stand in the cancelled pair.
    fn parts_of(
        &self,
        independent: &Polynomial,
        copies: &BTreeMap<Symbol, (RelationId, Symbol)>,
        couplings: &Couplings,
    ) -> BTreeSet<String> {
        let mut names = BTreeSet::new();
        for symbol in independent.symbols() {
            if symbol == Symbol::S || symbol == Symbol::PI {
                continue;
            }
            let base = couplings
                .roots()
                .iter()
                .find(|(_, root)| **root == symbol)
                .map_or(symbol, |(inductance, _)| *inductance);
            let (quantity, base) = match copies.get(&base) {
                Some((id, parameter)) => (Quantity::Copy(*id, *parameter), *parameter),
                None if self.network().set_by(base).is_some() => (Quantity::Released(base), base),
                None => (Quantity::Free(base), base),
            };
            if !self.leaves(quantity) {
                continue;
            }
            let is_coefficient = self
                .network()
                .facts(base)
                .is_some_and(|facts| facts.origin == Origin::Coefficient);
            if is_coefficient {
                // A hidden coefficient shows as what its line is made of.
                let value = self.plain.value(base);
                let shown = value.symbols().into_iter().filter(|s| *s != Symbol::S);
                names.extend(shown.map(|symbol| self.names.name(symbol).to_owned()));
            } else {
                names.insert(self.names.name(base).to_owned());
            }
        }
        names
    }

    /// Whether the cancelled pair does not depend on a quantity.
    fn leaves(&self, quantity: Quantity) -> bool {
        let pairing = &self.solved.pairing;
        let field = pairing.field();
        let reduced = |salt: Option<Quantity>| {
            let choice = Choice {
                seed: SEED,
                shift: 1,
                released: &|_| true,
                salt,
            };
            let sample = pairing.sample(self.network(), &choice)?;
            let common = sample.numerator.gcd(&sample.denominator, field);
            let above = sample.numerator.div_rem(&common, field).0;
            let below = sample.denominator.div_rem(&common, field).0;
            let scale = field.mul(above.lead(), field.inv(below.lead())?);
            Some((above.monic(field), below.monic(field), scale))
        };
        match (reduced(None), reduced(Some(quantity))) {
            (Some(first), Some(second)) => first == second,
            _ => false,
        }
    }

    fn structural_entries(&self, found: Found, entries: &mut Vec<Cancellation>) {
        let parts: Vec<String> = found.parts.into_iter().collect();
        for (multiplicity, hides) in self.sides(&found.factor, found.multiplicity) {
            let mut entry = self.entry(CancellationClass::Structural, &found.factor, multiplicity);
            entry.hides = hides;
            entry.parts.clone_from(&parts);
            if entry.factor == Polynomial::symbol(Symbol::S) {
                entry.static_set = self.static_parts();
            }
            entries.push(entry);
        }
    }

    /// Parts of the sets that keep a charge or flux in the network of the question.
    fn static_parts(&self) -> Vec<String> {
        let question = &self.network().questions()[self.question];
        if !matches!(question.ask, Ask::Transfer { .. } | Ask::Impedance(_)) {
            return Vec::new();
        }
        let degrees = network_degrees(self.network(), &question.without, self.setting.budget);
        let Ok(Ok((degree, valuation))) = degrees else {
            return Vec::new();
        };
        let ledger = ledger(self.network(), &question.without, degree, valuation);
        let mut names: Vec<String> = ledger
            .static_sets
            .iter()
            .flat_map(|set| &set.members)
            .map(|&id| self.network().element(id).name.clone())
            .collect();
        names.sort_unstable();
        names.dedup();
        names
    }

    // ---- matched --------------------------------------------------------------------------------

    fn matched_entries(
        &self,
        factor: &Polynomial,
        multiplicity: u32,
        entries: &mut Vec<Cancellation>,
    ) {
        let all: Vec<RelationId> = self.network().relations().map(|(id, _)| id).collect();
        let total = multiplicity_at(
            &self.solved.pairing,
            self.network(),
            factor,
            self.setting,
            &all.iter().copied().collect(),
        )
        .unwrap_or(multiplicity);
        let mut sets: Vec<Vec<RelationId>> = Vec::new();
        let mut open = all;
        while let Some(set) = self.smallest(factor, total, &open) {
            if set.is_empty() {
                break;
            }
            open.retain(|id| !set.contains(id));
            sets.push(set);
            if sets.len() == 4 {
                break;
            }
        }
        for (count, hides) in self.sides(factor, multiplicity) {
            let mut entry = self.entry(CancellationClass::Matched, factor, count);
            entry.hides = hides;
            let mut sets = sets.clone().into_iter();
            entry.because = sets.next().unwrap_or_default();
            entry.also_because = sets.collect();
            entries.push(entry);
        }
    }

    /// The smallest set of relations, earliest in the file, that is enough for the factor to cancel.
    fn smallest(
        &self,
        factor: &Polynomial,
        total: u32,
        open: &[RelationId],
    ) -> Option<Vec<RelationId>> {
        let enough = |kept: &BTreeSet<RelationId>| {
            let quick = common_at(&self.solved.pairing, self.network(), kept);
            if quick.is_some_and(|degree| degree < total * factor.degree(Symbol::S)) {
                return false;
            }
            multiplicity_at(
                &self.solved.pairing,
                self.network(),
                factor,
                self.setting,
                kept,
            )
            .is_some_and(|found| found >= total)
        };
        if !enough(&open.iter().copied().collect()) {
            return None;
        }
        for size in 1..=3_usize {
            if binomial(open.len(), size) > 3000 {
                break;
            }
            if let Some(found) = subsets(open, size).find(|kept| enough(kept)) {
                return Some(found.into_iter().collect());
            }
        }
        // Deletion in reverse file order.
        let mut kept: BTreeSet<RelationId> = open.iter().copied().collect();
        for id in open.iter().rev() {
            let mut fewer = kept.clone();
            fewer.remove(id);
            if enough(&fewer) {
                kept = fewer;
            }
        }
        Some(kept.into_iter().collect())
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

fn binomial(count: usize, size: usize) -> usize {
    (0..size).fold(1, |product, step| {
        product * count.saturating_sub(step) / (step + 1)
    })
}

/// All subsets of a size, in file order.
fn subsets(open: &[RelationId], size: usize) -> impl Iterator<Item = BTreeSet<RelationId>> + '_ {
    let mut next: Option<Vec<usize>> = (size <= open.len()).then(|| (0..size).collect());
    std::iter::from_fn(move || {
        let current = next.clone()?;
        let mut following = current.clone();
        let mut at = size;
        next = loop {
            if at == 0 {
                break None;
            }
            at -= 1;
            if following[at] < open.len() - size + at {
                following[at] += 1;
                for later in at + 1..size {
                    following[later] = following[later - 1] + 1;
                }
                break Some(following);
            }
        };
        Some(current.into_iter().map(|index| open[index]).collect())
    })
}
