//! States inside gains, impedances and other values that depend on s.

use std::collections::{BTreeMap, BTreeSet};

use smallvec::{SmallVec, smallvec};

use super::topology::Parts;
use crate::algebra::gcd::gcd;
use crate::algebra::{Fraction, Polynomial, Symbol};
use crate::budget::Budget;
use crate::network::{Element, Kind, Network, Origin, RelationId, Source, Strength, Value};

/// How many states there are, and the relations in which s stands.
#[derive(Debug, Default)]
pub(super) struct DeviceStates {
    pub(super) count: u32,
    pub(super) relations: Vec<RelationId>,
}

/// The larger of numerator and denominator degree, relations substituted, once for each place
/// where a value enters the equations; the coefficients that the relation of one source sets count
/// as one, over their common denominator.
pub(super) fn device_states(parts: &Parts<'_>) -> DeviceStates {
    let network = parts.network;
    if !network.relations().any(|(_, relation)| relation.has_s()) {
        return DeviceStates::default();
    }
    let dynamic = Dynamic::new(network);
    let mut used = Vec::new();
    for (_, element) in &parts.list {
        slots(network, element, &mut used);
    }
    couplings(parts, &mut used);
    let counts = used.iter().map(|together| dynamic.count(together));
    DeviceStates {
        count: counts.fold(0, u32::saturating_add),
        relations: dynamic.relations(network, used.iter().flatten()),
    }
}

/// Symbols whose denominators are cleared together.
type Together = SmallVec<[Symbol; 1]>;

/// The values of a part, each as often as it enters the equations.
fn slots(network: &Network, element: &Element, used: &mut Vec<Together>) {
    match &element.kind {
        Kind::Source(source) => of_source(network, source, used),
        Kind::Amplifier { gain, rout, .. } => {
            used.extend(gain.iter().chain(rout).filter_map(alone));
        }
        Kind::Conveyor { polarity, .. } => used.extend(alone(polarity)),
        Kind::Transformer { ratio: value, .. } | Kind::Gyrator { g: value, .. } => {
            used.extend([value, value].into_iter().filter_map(alone));
        }
        _ => used.extend(element.value().and_then(alone)),
    }
}

fn alone(value: &Value) -> Option<Together> {
    match value {
        Value::Symbol(symbol) => Some(smallvec![*symbol]),
        Value::Number(_) => None,
    }
}

fn of_source(network: &Network, source: &Source, used: &mut Vec<Together>) {
    let controls = source.controls.iter().filter(|control| control.acts());
    let values = controls
        .map(|control| &control.value)
        .chain(source.drives.iter().map(|follow| &follow.value));
    let mut own = Together::new();
    for value in values {
        let Value::Symbol(symbol) = value else {
            continue;
        };
        let facts = network.facts(*symbol);
        if facts.is_some_and(|facts| facts.origin == Origin::Coefficient) {
            own.push(*symbol);
        } else {
            used.extend(alone(value));
        }
    }
    used.push(own);
}

fn couplings(parts: &Parts<'_>, used: &mut Vec<Together>) {
    for coupling in parts.network.couplings() {
        if parts.has(coupling.first) && parts.has(coupling.second) {
            let (Strength::Factor(value) | Strength::Mutual(value)) = &coupling.strength;
            used.extend([value, value].into_iter().filter_map(alone));
        }
    }
}

/// The symbols that relations make depend on s.
struct Dynamic {
    known: BTreeMap<Symbol, Substituted>,
}

impl Dynamic {
    fn new(network: &Network) -> Self {
        let value: BTreeMap<Symbol, &Fraction> = network
            .relations()
            .flat_map(|(_, relation)| relation.sets.iter().map(|(symbol, value)| (*symbol, value)))
            .collect();
        let mut users: BTreeMap<Symbol, Vec<Symbol>> = BTreeMap::new();
        let mut reached: BTreeSet<Symbol> = BTreeSet::new();
        for (&symbol, fraction) in &value {
            for inner in fraction.symbols() {
                users.entry(inner).or_default().push(symbol);
            }
        }
        let mut open = vec![Symbol::S];
        while let Some(symbol) = open.pop() {
            for &user in users.get(&symbol).into_iter().flatten() {
                if reached.insert(user) {
                    open.push(user);
                }
            }
        }
        Self {
            known: substituted(&reached, &value, &users),
        }
    }

    /// Degree of values over their common denominator.
    fn count(&self, together: &Together) -> u32 {
        let known: Vec<&Substituted> = together
            .iter()
            .filter_map(|symbol| self.known.get(symbol))
            .collect();
        match &known[..] {
            [] => 0,
            [one] => one.degree,
            many => common(many).unwrap_or_else(|| {
                let degrees = many.iter().map(|full| full.degree);
                degrees.fold(0, u32::saturating_add)
            }),
        }
    }

    /// The relations in which s stands that the used values lead to, in file order.
    fn relations<'a>(
        &self,
        network: &Network,
        used: impl Iterator<Item = &'a Symbol>,
    ) -> Vec<RelationId> {
        let mut seen = BTreeSet::new();
        let mut found = BTreeSet::new();
        let mut open: Vec<Symbol> = used.copied().collect();
        while let Some(symbol) = open.pop() {
            if !self.known.contains_key(&symbol) || !seen.insert(symbol) {
                continue;
            }
            let Some(id) = network.set_by(symbol) else {
                continue;
            };
            for (_, fraction) in network
                .relation(id)
                .sets
                .iter()
                .filter(|(set, _)| *set == symbol)
            {
                if fraction.contains(Symbol::S) {
                    found.insert(id);
                }
                open.extend(fraction.symbols());
            }
        }
        found.into_iter().collect()
    }
}

/// The symbols that depend on s with all such symbols put in, innermost first.
fn substituted(
    reached: &BTreeSet<Symbol>,
    value: &BTreeMap<Symbol, &Fraction>,
    users: &BTreeMap<Symbol, Vec<Symbol>>,
) -> BTreeMap<Symbol, Substituted> {
    let inner = |symbol: &Symbol| {
        let symbols = value[symbol].symbols().into_iter();
        symbols.filter(|inner| reached.contains(inner)).count()
    };
    let mut waiting: BTreeMap<Symbol, usize> = reached
        .iter()
        .map(|symbol| (*symbol, inner(symbol)))
        .collect();
    let mut ready: Vec<Symbol> = waiting
        .iter()
        .filter(|(_, count)| **count == 0)
        .map(|(symbol, _)| *symbol)
        .collect();
    let mut known: BTreeMap<Symbol, Substituted> = BTreeMap::new();
    while let Some(symbol) = ready.pop() {
        let full = Substituted::new(value[&symbol], &known);
        known.insert(symbol, full);
        for user in users.get(&symbol).into_iter().flatten() {
            if let Some(count) = waiting.get_mut(user) {
                *count -= 1;
                if *count == 0 {
                    ready.push(*user);
                }
            }
        }
    }
    known
}

/// A value with all that depends on s put in, where that could be written down.
struct Substituted {
    fraction: Option<Fraction>,
    degree: u32,
}

impl Substituted {
    fn new(value: &Fraction, known: &BTreeMap<Symbol, Self>) -> Self {
        if !value
            .symbols()
            .iter()
            .any(|symbol| known.contains_key(symbol))
        {
            return Self {
                degree: degree(value),
                fraction: Some(value.clone()),
            };
        }
        let put = |symbol: Symbol| known.get(&symbol).and_then(|full| full.fraction.clone());
        let complete = value
            .symbols()
            .iter()
            .filter_map(|symbol| known.get(symbol))
            .all(|full| full.fraction.is_some());
        let full = complete
            .then(|| value.substitute(&put, &Budget::default()).ok().flatten())
            .flatten();
        Self {
            degree: full.as_ref().map_or_else(|| bound(value, known), degree),
            fraction: full,
        }
    }
}

/// The degree of values brought over one denominator; `None` when that is too long to write down.
fn common(values: &[&Substituted]) -> Option<u32> {
    let budget = Budget::default();
    let mut whole = Polynomial::one();
    for value in values {
        let own = value.fraction.as_ref()?.denominator();
        let shared = gcd(&whole, own, &budget).ok()?;
        whole = whole.product(&own.div_exact(&shared)?, &budget).ok()?;
    }
    let degree = whole.degree(Symbol::S);
    let mut above = values.iter();
    above.try_fold(degree, |most, value| {
        let fraction = value.fraction.as_ref()?;
        let missing = degree - fraction.denominator().degree(Symbol::S);
        Some(most.max(fraction.numerator().degree(Symbol::S) + missing))
    })
}

fn degree(value: &Fraction) -> u32 {
    let above = value.numerator().degree(Symbol::S);
    above.max(value.denominator().degree(Symbol::S))
}

/// An upper bound of the degree without substituting.
fn bound(value: &Fraction, known: &BTreeMap<Symbol, Substituted>) -> u32 {
    let inner = value.symbols().into_iter().filter_map(|symbol| {
        let full = known.get(&symbol)?;
        let above = value.numerator().degree(symbol);
        let often = above.max(value.denominator().degree(symbol));
        Some(often.saturating_mul(full.degree))
    });
    inner.fold(degree(value), u32::saturating_add)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::network::sketch::Sketch;

    /// 1/(1 + s·T)
    fn lag(sketch: &mut Sketch, name: &str) -> Fraction {
        let budget = Budget::unlimited();
        let t = sketch.fraction(name);
        let product = Fraction::symbol(Symbol::S).mul(&t, &budget).unwrap();
        let below = Fraction::one().add(&product, &budget).unwrap();
        below.recip().unwrap()
    }

    fn states(sketch: Sketch) -> (u32, usize) {
        let network = sketch.finish();
        let states = device_states(&Parts::new(&network, &[]));
        (states.count, states.relations.len())
    }

    fn plain() -> Sketch {
        Sketch::of("Vs in ground; R1 in a; R2 a ground; RL b ground").by_voltage(
            "V2",
            ["b", "ground"],
            ["a", "ground"],
        )
    }

    #[test]
    fn no_relation_no_state() {
        assert_eq!(states(plain()), (0, 0));
    }

    #[test]
    fn a_lag_in_a_gain_is_one_state() {
        let mut sketch = plain();
        let value = lag(&mut sketch, "T");
        let sketch = sketch.relation(&[("k_V2", value)], Origin::Coefficient);
        assert_eq!(states(sketch), (1, 1));
    }

    #[test]
    fn coefficients_of_one_relation_share_a_denominator() {
        let mut sketch = plain().also("V2", ["in", "ground"]);
        let (first, second) = (lag(&mut sketch, "T"), lag(&mut sketch, "U"));
        let alike = [("k_V2", first.clone()), ("k_V2_2", first.clone())];
        let apart = [("k_V2", first), ("k_V2_2", second)];
        let again = plain().also("V2", ["in", "ground"]);
        assert_eq!(states(again.relation(&alike, Origin::Coefficient)), (1, 1));
        assert_eq!(states(sketch.relation(&apart, Origin::Coefficient)), (2, 1));
    }

    #[test]
    fn a_gain_used_twice_counts_twice_through_its_relation() {
        let mut sketch = plain().also("V2", ["in", "ground"]);
        let value = lag(&mut sketch, "T");
        let gain = sketch.fraction("K");
        let square = gain.mul(&gain, &Budget::unlimited()).unwrap();
        let sketch = sketch
            .relation(&[("K", value)], Origin::Free)
            .relation(&[("k_V2", gain)], Origin::Free)
            .relation(&[("k_V2_2", square)], Origin::Free);
        assert_eq!(states(sketch), (3, 1));
    }

    #[test]
    fn an_impedance_holds_its_states_until_it_is_taken_out() {
        let mut sketch = Sketch::of("Vs in ground; Z1 in a; R1 a ground");
        let value = lag(&mut sketch, "T");
        let id = sketch.id("Z1");
        let network = sketch.relation(&[("Z1", value)], Origin::Part).finish();
        let count = |without: &[_]| device_states(&Parts::new(&network, without)).count;
        assert_eq!((count(&[]), count(&[id])), (1, 0));
    }
}
