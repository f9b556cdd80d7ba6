//! Factors that cancel whatever the values.

use super::*;

impl Auditor<'_> {
    /// Factors that cancel whatever the values, written with the relations put in.
    pub(super) fn structural(&self) -> Result<Vec<Found>, Exceeded> {
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
    pub(super) fn involved(&self, common: &Univariate) -> BTreeSet<Quantity> {
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
    pub(super) fn quantities(&self) -> BTreeSet<Quantity> {
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
    pub(super) fn structural_attempt(
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
    pub(super) fn related(
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
    pub(super) fn parts_of(
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
    pub(super) fn leaves(&self, quantity: Quantity) -> bool {
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

    pub(super) fn structural_entries(&self, found: Found, entries: &mut Vec<Cancellation>) {
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
    pub(super) fn static_parts(&self) -> Vec<String> {
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
}
