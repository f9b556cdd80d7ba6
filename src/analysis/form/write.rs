//! The shortest of several ways to write a function of the parts.

use std::cell::{Cell, RefCell};
use std::cmp::Ordering;
use std::collections::{BTreeMap, HashMap};

use crate::algebra::factor::factor;
use crate::algebra::{Fraction, Integer, Monomial, Polynomial, Symbol, SymbolTable};
use crate::analysis::form::merge::{Member, Range, State};
use crate::analysis::form::tree::{Form, Length};
use crate::budget::{Budget, Exceeded};
use crate::network::{Dimension, Network};

/// Functions with more terms than this are written as they are.
const MOST_TERMS: usize = 160;
/// Functions of more symbols than this are written as they are.
const MOST_SYMBOLS: usize = 40;
/// Parts of one function that are looked at.
const MOST_STEPS: usize = 2_000;
/// Symbols that are tried one by one to be taken out of a sum.
const MOST_SHARED: usize = 3;
/// Longer sums are tried with one symbol alone.
const SHORT: usize = 12;
/// Deeper sums within sums are no help to a reader.
const DEEPEST: usize = 3;

/// Writes functions of the parts of one network.
pub(crate) struct Writer<'a> {
    network: &'a Network,
    budget: &'a Budget,
    steps: Cell<usize>,
    /// Forms found so far, by function and by what its symbols stand for.
    known: RefCell<HashMap<(Fraction, Vec<Form>), Form>>,
}

impl<'a> Writer<'a> {
    pub(crate) fn new(network: &'a Network, budget: &'a Budget) -> Self {
        Self {
            network,
            budget,
            steps: Cell::new(0),
            known: RefCell::default(),
        }
    }

    /// The shortest form found for a function without s. It is equal to the function: its value has
    /// been computed back, and a form that would differ is never given.
    ///
    /// # Errors
    /// When the budget is reached.
    pub(crate) fn write(&self, fraction: &Fraction) -> Result<Form, Exceeded> {
        let plain = plain(fraction);
        let terms = fraction.numerator().len() + fraction.denominator().len();
        let symbols = fraction.symbols();
        if terms > MOST_TERMS || symbols.len() > MOST_SYMBOLS {
            return Ok(plain);
        }
        self.steps.set(0);
        let members = symbols.into_iter().map(|symbol| {
            let member = Member {
                form: Form::Symbol(symbol),
                dimension: dimension(self.network, symbol),
            };
            (symbol, member)
        });
        let state = State {
            fraction: fraction.clone(),
            members: members.collect(),
        };
        let found = self.best(&state)?;
        let proven = found.value(self.budget)?.as_ref() == Some(fraction);
        Ok(if proven { found } else { plain })
    }

    /// The quotient of two polynomials without s.
    pub(crate) fn ratio(&self, above: &Polynomial, below: &Polynomial) -> Result<Form, Exceeded> {
        match Fraction::new(above.clone(), below.clone(), self.budget)? {
            Some(fraction) => self.write(&fraction),
            None => Ok(Form::Number(Integer::zero())),
        }
    }

    fn best(&self, state: &State) -> Result<Form, Exceeded> {
        let fraction = &state.fraction;
        if let Some(number) = fraction.as_rational() {
            return Ok(Form::rational(&number));
        }
        if fraction.numerator().len() == 1 && fraction.denominator().len() == 1 {
            return Ok(state.plain());
        }
        let symbols = fraction.symbols();
        let key = (
            fraction.clone(),
            symbols.iter().map(|it| state.form(*it)).collect(),
        );
        if let Some(known) = self.known.borrow().get(&key) {
            return Ok(known.clone());
        }
        self.budget.time()?;
        self.steps.set(self.steps.get() + 1);
        if self.steps.get() > MOST_STEPS {
            return Ok(state.plain());
        }
        let plain = state.clone().merged(Range::Plain, self.budget)?;
        let wide = state.clone().merged(Range::WithRatios, self.budget)?;
        let mut candidates = Vec::new();
        if wide.fraction.symbols().len() < plain.fraction.symbols().len() {
            candidates.push(self.finished(&wide)?);
        }
        if plain.fraction.symbols().len() < symbols.len() {
            candidates.push(self.finished(&plain)?);
        }
        candidates.push(self.finished(state)?);
        let found = self.shortest(candidates);
        self.known.borrow_mut().insert(key, found.clone());
        Ok(found)
    }

    /// Without joining symbols any further: by factors, by reactive parts, by common symbols.
    fn finished(&self, state: &State) -> Result<Form, Exceeded> {
        let fraction = &state.fraction;
        if let Some(number) = fraction.as_rational() {
            return Ok(Form::rational(&number));
        }
        let mut candidates = vec![self.by_factors(state)?];
        candidates.extend(self.by_reactive_parts(state)?);
        candidates.push(state.plain());
        Ok(self.shortest(candidates))
    }

    /// Factors above and below the bar, each as short as it can be.
    fn by_factors(&self, state: &State) -> Result<Form, Exceeded> {
        let (above, below) = (state.fraction.numerator(), state.fraction.denominator());
        let side = |polynomial: &Polynomial| -> Result<Form, Exceeded> {
            let found = factor(polynomial, self.budget)?;
            let alone = found.factors.len() == 1 && state.fraction.is_polynomial();
            let mut parts = vec![Form::integer(&found.unit)];
            for (part, power) in &found.factors {
                let form = if part.len() == 1 {
                    state.put(part)
                } else if alone {
                    self.nested(state, part)?
                } else {
                    self.best(&state.of(Fraction::from(part.clone())))?
                };
                parts.push(form.power(*power));
            }
            Ok(Form::product(parts))
        };
        Ok(Form::quotient(side(above)?, side(below)?))
    }

    /// A symbol that stands in many terms taken out of them (Horner's scheme in several variables).
    fn nested(&self, state: &State, sum: &Polynomial) -> Result<Form, Exceeded> {
        let mut candidates = vec![state.put(sum)];
        for (symbol, power) in most_shared(sum) {
            let taken = Monomial::power(symbol, power);
            let (with, without): (Vec<_>, Vec<_>) = sum
                .terms()
                .iter()
                .cloned()
                .partition(|(monomial, _)| monomial.exponent(symbol) >= power);
            let inner = with
                .into_iter()
                .filter_map(|(monomial, number)| Some((monomial.div(&taken)?, number)));
            let part = |polynomial: Polynomial| self.best(&state.of(Fraction::from(polynomial)));
            let inner = part(Polynomial::from_terms(inner))?;
            let rest = part(Polynomial::from_terms(without))?;
            let outer = state.form(symbol).power(power);
            candidates.push(Form::sum([Form::product([inner, outer]), rest]));
        }
        Ok(self.shortest(candidates))
    }

    /// A sum over products of capacitances and inductances, each times what it sees.
    fn by_reactive_parts(&self, state: &State) -> Result<Option<Form>, Exceeded> {
        let reactive = |symbol: Symbol| {
            let dimension = state.members.get(&symbol).and_then(|it| it.dimension);
            [Some(Dimension::FARAD), Some(Dimension::HENRY)].contains(&dimension)
        };
        let (above, below) = (state.fraction.numerator(), state.fraction.denominator());
        if below.symbols().into_iter().any(reactive) {
            return Ok(None);
        }
        let mut groups: BTreeMap<Monomial, Vec<(Monomial, Integer)>> = BTreeMap::new();
        for (monomial, number) in above.terms() {
            let mut stored = Monomial::one();
            for (symbol, power) in monomial.factors().filter(|(symbol, _)| reactive(*symbol)) {
                stored = stored.mul(&Monomial::power(symbol, power));
            }
            let seen = monomial.div(&stored).unwrap_or_else(Monomial::one);
            groups
                .entry(stored)
                .or_default()
                .push((seen, number.clone()));
        }
        if groups.len() < 2 {
            return Ok(None);
        }
        // Parts that see the same stand together.
        let mut seen: Vec<(Fraction, Vec<Monomial>)> = Vec::new();
        for (stored, terms) in groups {
            let terms = Polynomial::from_terms(terms);
            let Some(value) = Fraction::new(terms, below.clone(), self.budget)? else {
                return Ok(None);
            };
            match seen.iter_mut().find(|(known, _)| *known == value) {
                Some((_, list)) => list.push(stored),
                None => seen.push((value, vec![stored])),
            }
        }
        if seen.len() < 2 {
            return Ok(None);
        }
        let mut terms = Vec::new();
        for (value, list) in seen {
            let list = list.into_iter().map(|it| (it, Integer::one()));
            let sum = Polynomial::from_terms(list);
            let parts = [
                self.best(&state.of(value))?,
                self.best(&state.of(Fraction::from(sum)))?,
            ];
            terms.push(Form::product(parts));
        }
        Ok(Some(Form::sum(terms)))
    }

    fn shortest(&self, candidates: Vec<Form>) -> Form {
        let names = self.network.symbols();
        candidates
            .into_iter()
            .min_by(|left, right| compare(left, right, names))
            .unwrap_or_else(Form::one)
    }
}

impl State {
    /// Another function of the same members.
    fn of(&self, fraction: Fraction) -> Self {
        Self {
            fraction,
            members: self.members.clone(),
        }
    }

    fn form(&self, symbol: Symbol) -> Form {
        let member = self.members.get(&symbol);
        member.map_or(Form::Symbol(symbol), |it| it.form.clone())
    }

    fn put(&self, polynomial: &Polynomial) -> Form {
        Form::of_polynomial(polynomial, &|symbol| self.form(symbol))
    }

    fn plain(&self) -> Form {
        let (above, below) = (self.fraction.numerator(), self.fraction.denominator());
        Form::quotient(self.put(above), self.put(below))
    }
}

/// A fraction as it stands.
pub(crate) fn plain(fraction: &Fraction) -> Form {
    let side = |polynomial: &Polynomial| Form::of_polynomial(polynomial, &Form::Symbol);
    Form::quotient(side(fraction.numerator()), side(fraction.denominator()))
}

/// Fewest leaves, then operations, then the order of names. A bar within a bar counts as a leaf more,
/// a sum nested too deep as two.
fn compare(left: &Form, right: &Form, names: &SymbolTable) -> Ordering {
    let key = |form: &Form| -> Length {
        let (leaves, operations) = form.length();
        let deep = 2 * form.depth().saturating_sub(DEEPEST);
        (leaves + form.bars_within_bars() + deep, operations)
    };
    let named = |form: &Form| {
        let mut list = Vec::new();
        spell(form, names, &mut list);
        list
    };
    key(left)
        .cmp(&key(right))
        .then_with(|| named(left).cmp(&named(right)))
}

/// The names and numbers of a form in the order in which they stand.
fn spell(form: &Form, names: &SymbolTable, list: &mut Vec<String>) {
    match form {
        Form::Number(number) => list.push(number.to_string()),
        Form::Symbol(symbol) => list.push(names.name(*symbol).to_owned()),
        Form::Sum(parts) | Form::Product(parts) | Form::Parallel(parts) => {
            let mut inner: Vec<Vec<String>> = parts
                .iter()
                .map(|part| {
                    let mut own = Vec::new();
                    spell(part, names, &mut own);
                    own
                })
                .collect();
            inner.sort();
            list.extend(inner.into_iter().flatten());
        }
        Form::Quotient(above, below) => {
            spell(above, names, list);
            spell(below, names, list);
        }
        Form::Power(inner, _) | Form::Root(inner) | Form::Negative(inner) => {
            spell(inner, names, list);
        }
    }
}

/// The symbols that stand in most terms, at least two, and their least powers there.
fn most_shared(sum: &Polynomial) -> Vec<(Symbol, u32)> {
    let symbols = sum.symbols().into_iter().filter_map(|symbol| {
        let powers = sum
            .terms()
            .iter()
            .map(|(monomial, _)| monomial.exponent(symbol));
        let powers: Vec<u32> = powers.filter(|power| *power > 0).collect();
        let least = *powers.iter().min()?;
        (powers.len() > 1).then_some((powers.len(), symbol, least))
    });
    let mut list: Vec<_> = symbols.collect();
    list.sort_by_key(|(count, symbol, _)| (std::cmp::Reverse(*count), symbol.index()));
    list.truncate(if sum.len() > SHORT { 1 } else { MOST_SHARED });
    list.into_iter()
        .map(|(_, symbol, least)| (symbol, least))
        .collect()
}

/// The dimension of a symbol; where none was stated, the one its first letter suggests.
fn dimension(network: &Network, symbol: Symbol) -> Option<Dimension> {
    let stated = network.facts(symbol).and_then(|facts| facts.dimension);
    let name = network.symbols().name(symbol);
    let own = name.rsplit('.').next().unwrap_or(name);
    stated.or(match own.chars().next() {
        Some('G' | 'g') => Some(Dimension::SIEMENS),
        Some('R') => Some(Dimension::OHM),
        Some('L') => Some(Dimension::HENRY),
        Some('C') => Some(Dimension::FARAD),
        _ => None,
    })
}
