//! Orders of passive networks by counting alone (Bashkow; Bryant 1959).

use petgraph::unionfind::UnionFind;

use super::topology::ends;
use crate::algebra::Rational;
use crate::network::incidence::Ends;
use crate::network::{Coupling, Kind, Network, Strength, Value};

/// Degree and lowest power of s of a passive determinant.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct PassiveOrder {
    /// Number of natural frequencies.
    pub order: u32,
    /// Multiplicity of s = 0.
    pub static_modes: u32,
}

/// The order of a network of resistors, capacitors, inductors with |k| < 1, independent sources and
/// meters, relations apart; `None` for other networks and where there is no unique solution.
///
/// By Kruskal's algorithm: the highest power of s belongs to a spanning tree with as many capacitors
/// and as few inductors as possible, the lowest to one with as few capacitors and as many inductors.
///
/// Cost: all but linear in the number of parts.
#[must_use]
pub fn passive_order(network: &Network) -> Option<PassiveOrder> {
    if network.couplings().iter().any(is_tight) {
        return None;
    }
    let mut sorts = Sorts::default();
    for (_, element) in network.elements() {
        let list = match &element.kind {
            Kind::Resistor(..) | Kind::Conductance(..) => &mut sorts.resistive,
            Kind::Capacitor(..) => &mut sorts.capacitors,
            Kind::Inductor(..) => &mut sorts.inductors,
            _ if element.is_short() => &mut sorts.shorts,
            _ if element.is_current_source() => continue,
            _ => return None,
        };
        list.push(ends(element.port()?));
    }
    let coils = sorts.inductors.len();
    let mut shorted = UnionFind::<u32>::new(network.node_count());
    let fixed = join(&mut shorted, &sorts.shorts);
    if fixed < sorts.shorts.len() {
        return None;
    }
    let tree = |lists: [&[Ends]; 3]| {
        let mut sets = shorted.clone();
        let joined = lists.map(|list| join(&mut sets, list));
        (joined, fixed + joined.iter().sum::<usize>())
    };
    let ([most, _, fewest_coils], rank) =
        tree([&sorts.capacitors, &sorts.resistive, &sorts.inductors]);
    if rank + 1 < network.node_count() {
        return None;
    }
    let ([most_coils, _, fewest], _) =
        tree([&sorts.inductors, &sorts.resistive, &sorts.capacitors]);
    Some(PassiveOrder {
        order: super::number(most + coils - fewest_coils),
        static_modes: super::number(fewest + coils - most_coils),
    })
}

#[derive(Default)]
struct Sorts {
    shorts: Vec<Ends>,
    resistive: Vec<Ends>,
    capacitors: Vec<Ends>,
    inductors: Vec<Ends>,
}

/// Whether a coupling has |k| = 1 by its own number.
pub(super) fn is_tight(coupling: &Coupling) -> bool {
    match &coupling.strength {
        Strength::Factor(Value::Number(number)) => number.abs() == Rational::one(),
        Strength::Factor(Value::Symbol(_)) | Strength::Mutual(_) => false,
    }
}

/// How many of the edges join two sets.
fn join(sets: &mut UnionFind<u32>, edges: &[Ends]) -> usize {
    edges.iter().filter(|(a, b)| sets.union(*a, *b)).count()
}
