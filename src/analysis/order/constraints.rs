//! Which parts take states away beyond loops and cut-sets, as far as wiring tells.
//!
//! Each sentence is a fact about the equations: a loop through outputs or virtual shorts sets the
//! voltage of a capacitor, a cut-set through controlled sources sets the current of an inductor, a
//! transformer or tight coupling ties two states into one. What gains and relations do together is
//! not attributed here; [`released`] tries relations one by one.

use std::collections::BTreeSet;

use super::topology::{PartEdge, Parts, closed, cut_parts, ends};
use crate::algebra::Rational;
use crate::analysis::report::ConstraintEvidence;
use crate::network::blocks::blocks;
use crate::network::check::{list, part_names};
use crate::network::incidence::{Ends, components};
use crate::network::topology::sensed_currents;
use crate::network::{Element, ElementId, Kind, Network, RelationId, Strength, Value};

/// Transformers whose cut-sets are searched.
const TRIED: usize = 32;

/// At most `constraints` pieces of evidence, each for one state.
pub(super) fn evidence(
    parts: &Parts<'_>,
    cut_sets: &[Vec<ElementId>],
    constraints: u32,
) -> Vec<ConstraintEvidence> {
    if constraints == 0 {
        return Vec::new();
    }
    let mut search = Search {
        parts,
        sensed: sensed_currents(parts.list.iter().map(|(_, element)| *element)),
        told: BTreeSet::new(),
        in_cut_sets: cut_sets.iter().flatten().copied().collect(),
        found: Vec::new(),
    };
    search.tight_couplings();
    search.outputs();
    search.equal_inputs();
    search.driven_inductors();
    search.transformed_voltages();
    search.transformed_currents();
    search.found.truncate(constraints as usize);
    search.found
}

/// Relations that take states away: those with which released, one at a time, the degree grows.
///
/// `degree_without` gives the degree of the determinant with one relation released, `None` where it
/// is not known. Stops once as many states are explained as `missing` counts.
pub fn released(
    network: &Network,
    degree: u32,
    missing: u32,
    mut degree_without: impl FnMut(RelationId) -> Option<u32>,
) -> Vec<ConstraintEvidence> {
    let mut found = Vec::new();
    for (id, relation) in network.relations() {
        if found.len() >= missing as usize {
            break;
        }
        if let Some(free) = degree_without(id).filter(|&free| free > degree) {
            found.push(ConstraintEvidence {
                names: vec![relation.text.clone()],
                clause: format!("without {} the order would be {free}", relation.text),
            });
        }
    }
    found
}

struct Search<'a> {
    parts: &'a Parts<'a>,
    sensed: BTreeSet<ElementId>,
    /// Capacitors and inductors in evidence found so far.
    told: BTreeSet<ElementId>,
    in_cut_sets: BTreeSet<ElementId>,
    found: Vec<ConstraintEvidence>,
}

impl Search<'_> {
    fn element(&self, id: ElementId) -> &Element {
        self.parts.network.element(id)
    }

    fn is_capacitor(&self, id: ElementId) -> bool {
        matches!(self.element(id).kind, Kind::Capacitor(..))
    }

    fn capacitors(&self) -> Vec<PartEdge> {
        self.parts.edges(|_, element| {
            let capacitor = matches!(element.kind, Kind::Capacitor(..));
            element.port().filter(|_| capacitor)
        })
    }

    /// Coils with |k| = 1; each coupling that joins two groups of such coils takes one state.
    fn tight_couplings(&mut self) {
        let network = self.parts.network;
        let mut sets = petgraph::unionfind::UnionFind::<usize>::new(network.elements().len());
        for coupling in network.couplings() {
            let tight = match &coupling.strength {
                Strength::Factor(Value::Number(number)) => number.abs() == Rational::from(1_i64),
                Strength::Factor(Value::Symbol(_)) | Strength::Mutual(_) => false,
            };
            let coils = [coupling.first, coupling.second];
            let apart = coils.iter().all(|&coil| {
                let stays = self.parts.has(coil);
                stays && !self.in_cut_sets.contains(&coil)
            });
            if tight && apart && sets.union(coils[0].index(), coils[1].index()) {
                let coils = coils.map(|coil| network.element(coil).name.clone());
                let clause = format!(
                    "{} with k = 1 gives {} and {} one common flux",
                    coupling.name, coils[0], coils[1]
                );
                let [first, second] = coils;
                self.found.push(ConstraintEvidence {
                    names: vec![coupling.name.clone(), first, second],
                    clause,
                });
            }
        }
    }

    /// Loops of capacitors and outputs of fixed voltage.
    fn outputs(&mut self) {
        let mut fixed = self.parts.shorts();
        fixed.extend(self.outputs_fixed());
        let holds = |element: &Element| !element.is_short();
        let found = self.extra_loops(fixed, holds, "sets", "ties");
        self.tell(found);
    }

    fn outputs_fixed(&self) -> Vec<PartEdge> {
        self.parts.edges(|id, element| {
            let output = !element.is_short() && !self.sensed.contains(&id);
            element.forced_current().filter(|_| output)
        })
    }

    /// Loops of capacitors and node pairs that amplifiers hold equal.
    fn equal_inputs(&mut self) {
        let mut fixed = self.parts.shorts();
        fixed.extend(
            self.parts
                .edges(|_, element| element.forced_voltage().filter(|_| !element.is_short())),
        );
        let holds = |element: &Element| !element.is_short();
        let mut found = self.extra_loops(fixed, holds, "holds", "ties");
        found.retain(|(members, _)| members.iter().all(|part| !self.told.contains(part)));
        self.tell(found);
    }

    /// Loops of capacitors over `fixed` that need a part for which `holds` is true.
    fn extra_loops(
        &self,
        fixed: Vec<PartEdge>,
        holds: impl Fn(&Element) -> bool,
        one: &str,
        several: &str,
    ) -> Vec<(Vec<ElementId>, ConstraintEvidence)> {
        let capacitors = self.capacitors();
        if capacitors.is_empty() || !fixed.iter().any(|(id, _)| holds(self.element(*id))) {
            return Vec::new();
        }
        let plain = closed(self.parts.nodes(), self.parts.shorts(), capacitors.clone());
        let plain: BTreeSet<ElementId> = plain.iter().map(|around| around[0]).collect();
        closed(self.parts.nodes(), fixed, capacitors)
            .into_iter()
            .filter(|around| !plain.contains(&around[0]))
            .filter_map(|around| {
                let (mut states, rest): (Vec<_>, Vec<_>) =
                    around.into_iter().partition(|&id| self.is_capacitor(id));
                let holders: Vec<ElementId> = rest
                    .iter()
                    .copied()
                    .filter(|&id| holds(self.element(id)))
                    .collect();
                let sensed_short =
                    |id: &ElementId| self.element(*id).is_short() && self.sensed.contains(id);
                if holders.is_empty() || rest.iter().any(sensed_short) {
                    return None;
                }
                states.sort_unstable();
                let clause = self.clause(&holders, &states, "voltage", one, several);
                Some((states.clone(), self.piece(&states, &rest, clause)))
            })
            .collect()
    }

    fn clause(
        &self,
        holders: &[ElementId],
        states: &[ElementId],
        quantity: &str,
        one: &str,
        several: &str,
    ) -> String {
        let network = self.parts.network;
        let who = part_names(network, holders);
        let what = list(&part_names(network, states));
        let plural = |verb: &str| match who.len() {
            1 => verb.to_owned(),
            _ => verb.trim_end_matches('s').to_owned(),
        };
        if states.len() == 1 {
            format!("{} {} the {quantity} of {what}", list(&who), plural(one))
        } else {
            let verb = if several == "ties" && who.len() > 1 {
                "tie".to_owned()
            } else {
                several.to_owned()
            };
            format!("{} {verb} the {quantity}s of {what} together", list(&who))
        }
    }

    fn piece(
        &self,
        states: &[ElementId],
        rest: &[ElementId],
        clause: String,
    ) -> ConstraintEvidence {
        let mut names = part_names(self.parts.network, states);
        names.extend(part_names(self.parts.network, rest));
        ConstraintEvidence { names, clause }
    }

    fn tell(&mut self, found: Vec<(Vec<ElementId>, ConstraintEvidence)>) {
        for (members, piece) in found {
            self.told.extend(members);
            self.found.push(piece);
        }
    }

    /// Cut-sets of inductors and parts that drive a current but fix no voltage.
    fn driven_inductors(&mut self) {
        let inductor = |element: &Element| matches!(element.kind, Kind::Inductor(..));
        if !self.parts.list.iter().any(|(_, element)| inductor(element)) {
            return;
        }
        let rest = self.parts.list.iter().filter(|(_, part)| !inductor(part));
        let rest = rest.flat_map(|(_, element)| element.voltage_edges());
        let parted = components(self.parts.nodes(), rest.map(ends));
        let crossing: Vec<PartEdge> = self
            .parts
            .all_edges(|_, element| element.conducting())
            .into_iter()
            .filter(|(_, ends)| !parted.joined(*ends))
            .collect();
        let mut found = Vec::new();
        for cut in cut_parts(&parted, &crossing) {
            let (coils, drivers): (Vec<_>, Vec<_>) =
                cut.into_iter().partition(|&id| inductor(self.element(id)));
            let drivers: Vec<ElementId> = drivers
                .into_iter()
                .filter(|&id| !self.element(id).is_current_source())
                .collect();
            let known = coils.iter().any(|coil| self.in_cut_sets.contains(coil));
            if coils.is_empty() || drivers.is_empty() || known {
                continue;
            }
            let clause = self.clause(&drivers, &coils, "current", "sets", "ties");
            let piece = self.piece(&coils, &drivers, clause);
            found.push((coils, piece));
        }
        self.tell(found);
    }

    fn transformers(&self) -> Vec<(ElementId, [Ends; 2])> {
        let windings = |element: &Element| match &element.kind {
            Kind::Transformer {
                primary, secondary, ..
            } => Some([ends(*primary), ends(*secondary)]),
            _ => None,
        };
        let list = self.parts.list.iter();
        list.filter_map(|(id, element)| Some((*id, windings(element)?)))
            .collect()
    }

    /// Transformers with both windings across capacitors and fixed voltages.
    fn transformed_voltages(&mut self) {
        let transformers = self.transformers();
        if transformers.is_empty() {
            return;
        }
        let mut fixed = self.parts.shorts();
        fixed.retain(|(id, _)| !self.sensed.contains(id));
        fixed.extend(self.outputs_fixed());
        fixed.extend(self.capacitors());
        let all = components(self.parts.nodes(), fixed.iter().map(|(_, ends)| *ends));
        let closers: Vec<PartEdge> = transformers
            .iter()
            .filter(|(_, windings)| windings.iter().all(|&winding| all.joined(winding)))
            .flat_map(|&(id, windings)| windings.map(|winding| (id, winding)))
            .collect();
        let loops = closed(self.parts.nodes(), fixed, closers);
        let mut found = Vec::new();
        for pair in loops.chunks_exact(2) {
            let transformer = pair[0][0];
            let mut states: Vec<ElementId> = pair
                .iter()
                .flatten()
                .copied()
                .filter(|&id| self.is_capacitor(id))
                .collect();
            states.sort_unstable();
            states.dedup();
            if states.is_empty() || states.iter().any(|part| self.told.contains(part)) {
                continue;
            }
            let clause = self.clause(&[transformer], &states, "voltage", "sets", "ties");
            let piece = self.piece(&states, &[transformer], clause);
            found.push((states, piece));
        }
        self.tell(found);
    }

    /// Transformers with both windings in series with inductors alone.
    fn transformed_currents(&mut self) {
        let transformers = self.transformers();
        if transformers.is_empty() {
            return;
        }
        let cuts = |element: &Element| {
            matches!(element.kind, Kind::Inductor(..)) || element.is_current_source()
        };
        let (crossing, rest): (Vec<PartEdge>, Vec<PartEdge>) = self
            .parts
            .all_edges(|_, element| element.conducting())
            .into_iter()
            .partition(|(id, _)| cuts(self.element(*id)));
        let edges: Vec<Ends> = rest.iter().map(|(_, ends)| *ends).collect();
        let bridges: BTreeSet<u32> = blocks(self.parts.nodes(), &edges)
            .into_iter()
            .filter(|block| block.len() == 1)
            .map(|block| block[0])
            .collect();
        let mut found = Vec::new();
        for (id, _) in transformers.into_iter().take(TRIED) {
            let own: Vec<u32> = (0_u32..)
                .zip(&rest)
                .filter(|(_, (part, _))| *part == id)
                .map(|(edge, _)| edge)
                .collect();
            if !own.iter().all(|edge| bridges.contains(edge)) {
                continue;
            }
            let mut states: Vec<ElementId> = own
                .iter()
                .flat_map(|&edge| self.across(&edges, edge, &crossing))
                .collect();
            states.sort_unstable();
            states.dedup();
            let known = |part| self.told.contains(part) || self.in_cut_sets.contains(part);
            if states.is_empty() || states.iter().any(known) {
                continue;
            }
            let clause = self.clause(&[id], &states, "current", "sets", "ties");
            let piece = self.piece(&states, &[id], clause);
            found.push((states, piece));
        }
        self.tell(found);
    }

    /// The inductors that span the gap left by a bridge.
    fn across(&self, edges: &[Ends], bridge: u32, crossing: &[PartEdge]) -> Vec<ElementId> {
        let others = (0_u32..).zip(edges).filter(|(edge, _)| *edge != bridge);
        let parted = components(self.parts.nodes(), others.map(|(_, ends)| *ends));
        let (a, b) = edges[bridge as usize];
        let far = if parted.joined((0, a)) { b } else { a };
        crossing
            .iter()
            .filter(|(id, (x, y))| {
                let coil = matches!(self.element(*id).kind, Kind::Inductor(..));
                coil && parted.joined((far, *x)) != parted.joined((far, *y))
            })
            .map(|(id, _)| *id)
            .collect()
    }
}
