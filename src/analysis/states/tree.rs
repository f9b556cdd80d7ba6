//! A normal tree: voltage sources, then as many capacitors, then resistors, and as few inductors as
//! possible (Bashkow 1957; Bryant 1959).

use crate::analysis::report::states::State;
use crate::analysis::states::Group;
use crate::network::{ElementId, Kind, Network};

/// The branches of a normal tree whose capacitors, with the inductors outside it, are the states;
/// `None` where there are controlled sources, amplifiers and the like, or couplings.
pub(super) fn normal_tree(
    network: &Network,
    group: &Group,
    vector: &[State],
) -> Option<Vec<ElementId>> {
    if !network.couplings().is_empty() || group.across.is_some() {
        return None;
    }
    let mut sorts: [Vec<ElementId>; 4] = Default::default();
    for (id, element) in network.elements() {
        if group.without.contains(&id) || element.is_current_source() {
            continue;
        }
        let sort = match &element.kind {
            _ if element.is_short() => 0,
            Kind::Capacitor(..) => 1,
            Kind::Resistor(..) | Kind::Conductance(..) => 2,
            Kind::Inductor(..) => 3,
            _ => return None,
        };
        sorts[sort].push(id);
    }
    // The first inductors stay outside the tree.
    sorts[3].reverse();
    let mut group_of: Vec<usize> = (0..network.node_count()).collect();
    let root = |group_of: &mut Vec<usize>, mut at: usize| {
        while group_of[at] != at {
            group_of[at] = group_of[group_of[at]];
            at = group_of[at];
        }
        at
    };
    let mut tree = Vec::new();
    for &id in sorts.iter().flatten() {
        let port = network.element(id).port()?;
        let a = root(&mut group_of, port.from.index());
        let b = root(&mut group_of, port.to.index());
        if a != b {
            group_of[a] = b;
            tree.push(id);
        }
    }
    let capacitors = sorts[1].iter().filter(|id| tree.contains(id));
    let mut coils: Vec<ElementId> = sorts[3]
        .iter()
        .copied()
        .filter(|id| !tree.contains(id))
        .collect();
    coils.sort_unstable();
    let expected: Vec<State> = capacitors
        .map(|id| State::Voltage(*id))
        .chain(coils.into_iter().map(State::Current))
        .collect();
    (expected == vector).then_some(tree)
}
