//! The order ledger: from the parts of a network to the number of its natural frequencies.
//!
//! A term of the determinant is an edge set T that is a spanning tree of the current graph and of
//! the voltage graph; its power of s is the number of capacitors in T plus the number of inductors
//! outside T, plus what stands in gains. Sources and meters with fixed voltage lie in every T. So a
//! loop of them and of capacitors keeps a capacitor out of T, a cut-set of inductors (and of current
//! sources, which lie in no T) keeps an inductor in, and the degree is at most
//! `reactive + device states − loops − cut-sets` (Bryant 1959 for passive networks). What is missing
//! from that bound has been taken away by controlled sources, couplings or relations: it is never
//! negative. In the same way every cut-set of capacitors and every loop of inductors puts a factor s
//! into each term, so static sets are never more than the multiplicity of s = 0.

mod constraints;
mod passive;
mod states;
mod topology;

use crate::analysis::report::{NetworkOrder, StaticSet, Stored};
use crate::network::{ElementId, Kind, Network};

pub use constraints::released;
pub use passive::{PassiveOrder, passive_order};

use topology::Parts;

/// The ledger of a network with the parts in `without` opened.
///
/// `degree` is the degree in s of its determinant (voltage sources shorted, current sources open,
/// relations in force), `valuation` the multiplicity of its root s = 0. The determinant must not be
/// zero.
///
/// Cost: all but linear in the number of parts and in the length of the evidence.
#[must_use]
pub fn ledger(
    network: &Network,
    without: &[ElementId],
    degree: u32,
    valuation: u32,
) -> NetworkOrder {
    let parts = Parts::new(network, without);
    let reactive: Vec<ElementId> = parts
        .list
        .iter()
        .filter(|(_, element)| element.is_reactive())
        .map(|(id, _)| *id)
        .collect();
    let capacitor = |kind: &Kind| matches!(kind, Kind::Capacitor(..));
    let inductor = |kind: &Kind| matches!(kind, Kind::Inductor(..));
    let capacitor_loops = parts.loops(capacitor);
    let inductor_cutsets = parts.cut_sets(inductor);

    let passive = number(reactive.len())
        .saturating_sub(number(capacitor_loops.len()))
        .saturating_sub(number(inductor_cutsets.len()));
    let states = states::device_states(&parts);
    let bound = passive.saturating_add(states.count);
    debug_assert!(degree <= bound, "degree {degree} above its bound {bound}");
    let constraints = bound.saturating_sub(degree);

    let mut static_sets: Vec<StaticSet> = Vec::new();
    if valuation > 0 {
        let charge = parts.cut_sets(capacitor).into_iter();
        let flux = parts.loops(inductor).into_iter();
        static_sets.extend(charge.map(|members| set(Stored::Charge, members)));
        static_sets.extend(flux.map(|members| set(Stored::Flux, members)));
    }
    debug_assert!(
        static_sets.len() <= valuation as usize || states.count > 0,
        "every static set is a factor s"
    );
    static_sets.truncate(valuation as usize);

    NetworkOrder {
        constraint_evidence: constraints::evidence(
            &parts,
            &capacitor_loops,
            &inductor_cutsets,
            constraints,
        ),
        integrators: valuation - number(static_sets.len()),
        reactive,
        device_states: states.count,
        device_state_relations: states.relations,
        capacitor_loops,
        inductor_cutsets,
        constraints,
        network: degree,
        static_modes: valuation,
        static_sets,
    }
}

fn set(stored: Stored, members: Vec<ElementId>) -> StaticSet {
    StaticSet { stored, members }
}

fn number(count: usize) -> u32 {
    u32::try_from(count).unwrap_or(u32::MAX)
}

#[cfg(test)]
mod tests;
