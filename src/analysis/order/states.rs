//! States inside gains, impedances and other values that depend on s.

use std::collections::{BTreeMap, BTreeSet};

use super::topology::Parts;
use crate::algebra::{Fraction, Symbol};
use crate::budget::Budget;
use crate::network::{Element, Kind, Network, RelationId, Source, Strength, Value};

/// How many states there are, and the relations in which s stands.
#[derive(Debug, Default)]
pub(super) struct DeviceStates {
    pub(super) count: u32,
    pub(super) relations: Vec<RelationId>,
}

/// The larger of numerator and denominator degree, relations substituted, once for each place
/// where a value enters the equations. What sources follow their drives by counts only where the
/// `needed` states are not found without it.
pub(super) fn device_states(parts: &Parts<'_>, needed: u32) -> DeviceStates {
    let network = parts.network;
    if !network.relations().any(|(_, relation)| relation.has_s()) {
        return DeviceStates::default();
    }
    let dynamic = Dynamic::new(network);
    let mut used = Vec::new();
    for (_, element) in &parts.list {
        slots(element, &mut used);
    }
    couplings(parts, &mut used);
    let count = dynamic.count(&used);
    if count < needed {
        let follows = parts.list.iter().filter_map(|(_, element)| source(element));
        used.extend(follows.flat_map(|source| source.drives.iter().map(|follow| &follow.value)));
    }
    DeviceStates {
        count: dynamic.count(&used),
        relations: dynamic.relations(network, &used),
    }
}

fn source(element: &Element) -> Option<&Source> {
    match &element.kind {
        Kind::Source(source) => Some(source),
        _ => None,
    }
}

/// The values of a part, each as often as it enters the equations.
fn slots<'a>(element: &'a Element, used: &mut Vec<&'a Value>) {
    match &element.kind {
        Kind::Source(source) => used.extend(
            source
                .controls
                .iter()
                .filter(|control| control.acts())
                .map(|control| &control.value),
        ),
        Kind::Amplifier { gain, rout, .. } => used.extend(gain.iter().chain(rout)),
        Kind::Conveyor { polarity, .. } => used.push(polarity),
        Kind::Transformer { ratio: value, .. } | Kind::Gyrator { g: value, .. } => {
            used.extend([value, value]);
        }
        _ => used.extend(element.value()),
    }
}

fn couplings<'a>(parts: &Parts<'a>, used: &mut Vec<&'a Value>) {
    for coupling in parts.network.couplings() {
        if parts.has(coupling.first) && parts.has(coupling.second) {
            let (Strength::Factor(value) | Strength::Mutual(value)) = &coupling.strength;
            used.extend([value, value]);
        }
    }
}

/// The symbols that relations make depend on s, with their degrees.
struct Dynamic {
    degree: BTreeMap<Symbol, u32>,
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
            degree: degrees(&reached, &value, &users),
        }
    }

    fn count(&self, used: &[&Value]) -> u32 {
        let degree = |value: &&Value| match value {
            Value::Symbol(symbol) => self.degree.get(symbol).copied().unwrap_or(0),
            Value::Number(_) => 0,
        };
        used.iter().map(degree).fold(0, u32::saturating_add)
    }

    /// The relations in which s stands that the used values lead to, in file order.
    fn relations(&self, network: &Network, used: &[&Value]) -> Vec<RelationId> {
        let mut seen = BTreeSet::new();
        let mut found = BTreeSet::new();
        let mut open: Vec<Symbol> = used
            .iter()
            .filter_map(|value| match value {
                Value::Symbol(symbol) => Some(*symbol),
                Value::Number(_) => None,
            })
            .collect();
        while let Some(symbol) = open.pop() {
            if !self.degree.contains_key(&symbol) || !seen.insert(symbol) {
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

/// Degrees of the symbols that depend on s, innermost first.
fn degrees(
    reached: &BTreeSet<Symbol>,
    value: &BTreeMap<Symbol, &Fraction>,
    users: &BTreeMap<Symbol, Vec<Symbol>>,
) -> BTreeMap<Symbol, u32> {
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
        .into_iter()
        .map(|(symbol, full)| (symbol, full.degree))
        .collect()
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
