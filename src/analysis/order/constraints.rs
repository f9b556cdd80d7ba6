//! Which parts take states away beyond loops and cut-sets, as far as wiring tells.
//!
//! Each sentence is a fact about the equations: a loop through outputs or virtual shorts sets the
//! voltage of a capacitor, a cut-set through controlled sources sets the current of an inductor, a
//! transformer or tight coupling ties two states into one. What gains and relations do together is
//! not attributed here; [`released`] tries relations one by one.

mod transformers;

use std::collections::{BTreeMap, BTreeSet};
use std::rc::Rc;

use super::passive::is_tight;
use super::topology::{PartEdge, Parts, closed, cut_parts, ends};
use crate::analysis::report::ConstraintEvidence;
use crate::network::check::{list, part_names};
use crate::network::incidence::components;
use crate::network::topology::sensed_currents;
use crate::network::{Element, ElementId, Kind, Network, RelationId};

/// At most `constraints` pieces of evidence, each for one state.
pub(super) fn evidence(
    parts: &Parts<'_>,
    loops: &[Vec<ElementId>],
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
        coupled: coupled(parts.network),
        in_loops: loops.iter().flatten().copied().collect(),
        in_cut_sets: BTreeSet::new(),
        found: Vec::new(),
    };
    search.in_cut_sets = search.with_partners(cut_sets.iter().flatten().copied());
    search.outputs();
    search.equal_inputs();
    search.driven_inductors();
    search.tight_couplings();
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

/// Groups of coils that couplings join, by coil.
fn coupled(network: &Network) -> BTreeMap<ElementId, Rc<[ElementId]>> {
    let coils: BTreeSet<ElementId> = network
        .couplings()
        .iter()
        .flat_map(|coupling| [coupling.first, coupling.second])
        .collect();
    let coils: Vec<ElementId> = coils.into_iter().collect();
    let number = |coil: ElementId| {
        let at = coils.binary_search(&coil).unwrap_or_default();
        super::number(at)
    };
    let joins = network.couplings().iter();
    let joins = joins.map(|coupling| (number(coupling.first), number(coupling.second)));
    let parted = components(coils.len(), joins);
    let mut groups = vec![Vec::new(); parted.count];
    for (coil, label) in coils.iter().zip(&parted.label) {
        groups[*label as usize].push(*coil);
    }
    let groups: Vec<Rc<[ElementId]>> = groups.into_iter().map(Rc::from).collect();
    let group = |label: &u32| Rc::clone(&groups[*label as usize]);
    coils
        .iter()
        .copied()
        .zip(parted.label.iter().map(group))
        .collect()
}

struct Search<'a> {
    parts: &'a Parts<'a>,
    sensed: BTreeSet<ElementId>,
    /// Capacitors and inductors in evidence found so far.
    told: BTreeSet<ElementId>,
    /// Groups of coupled coils, by coil.
    coupled: BTreeMap<ElementId, Rc<[ElementId]>>,
    in_loops: BTreeSet<ElementId>,
    /// Coils in cut-sets of the ledger and their partners: a term may use one coil of a group in
    /// the current graph and another in the voltage graph.
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

    fn with_partners(&self, parts: impl Iterator<Item = ElementId>) -> BTreeSet<ElementId> {
        let mut all = BTreeSet::new();
        for part in parts {
            match self.coupled.get(&part) {
                Some(group) if !all.contains(&part) => all.extend(group.iter().copied()),
                Some(_) => {}
                None => {
                    all.insert(part);
                }
            }
        }
        all
    }

    /// Whether nothing told so far speaks of the state of this part.
    fn is_apart(&self, part: ElementId) -> bool {
        let known = [&self.told, &self.in_loops, &self.in_cut_sets];
        known.iter().all(|set| !set.contains(&part))
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
        let mut found = Vec::new();
        for coupling in network.couplings() {
            let coils = [coupling.first, coupling.second];
            let apart = coils.iter().all(|&coil| {
                let stays = self.parts.has(coil);
                stays && self.is_apart(coil)
            });
            if is_tight(coupling) && apart && sets.union(coils[0].index(), coils[1].index()) {
                let coils = coils.map(|coil| network.element(coil).name.clone());
                let clause = format!(
                    "{} with k = 1 gives {} and {} one common flux",
                    coupling.name, coils[0], coils[1]
                );
                let [first, second] = coils;
                let names = vec![coupling.name.clone(), first, second];
                let members = vec![coupling.first, coupling.second];
                found.push((members, ConstraintEvidence { names, clause }));
            }
        }
        self.tell(found);
    }

    /// Loops of capacitors and outputs of fixed voltage. A sensed capacitor is in series with a
    /// sensing branch that some terms leave out.
    fn outputs(&mut self) {
        let mut fixed = self.parts.shorts();
        fixed.extend(self.outputs_fixed());
        let mut found = self.extra_loops(fixed, "sets");
        if !self.sensed.is_empty() {
            let apart = |part: &ElementId| self.is_apart(*part) && !self.sensed.contains(part);
            found.retain(|(members, _)| members.iter().all(apart));
        }
        self.tell(found);
    }

    fn outputs_fixed(&self) -> Vec<PartEdge> {
        self.parts.edges(|id, element| {
            let output = !element.is_short() && !self.sensed.contains(&id);
            element.forced_current().filter(|_| output)
        })
    }

    /// Loops of capacitors and node pairs that amplifiers hold equal. Where outputs have been told
    /// of, loops that share a capacitor with theirs might speak of the same state.
    fn equal_inputs(&mut self) {
        let mut fixed = self.parts.shorts();
        fixed.extend(
            self.parts
                .edges(|_, element| element.forced_voltage().filter(|_| !element.is_short())),
        );
        let mut found = self.extra_loops(fixed, "holds");
        if !self.told.is_empty() {
            found.retain(|(members, _)| members.iter().all(|&part| self.is_apart(part)));
        }
        self.tell(found);
    }

    /// Loops of capacitors over `fixed` that need more than sources and meters.
    fn extra_loops(
        &self,
        fixed: Vec<PartEdge>,
        one: &'static str,
    ) -> Vec<(Vec<ElementId>, ConstraintEvidence)> {
        let holds = |element: &Element| !element.is_short();
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
                let clause = self.clause(&holders, &states, "voltage", one);
                Some((states.clone(), self.piece(&states, &rest, clause)))
            })
            .collect()
    }

    fn clause(
        &self,
        holders: &[ElementId],
        states: &[ElementId],
        quantity: &str,
        one: &'static str,
    ) -> String {
        let network = self.parts.network;
        let who = part_names(network, holders);
        let what = list(&part_names(network, states));
        let verb = |verb: &'static str| match who.len() {
            1 => verb,
            _ => verb.trim_end_matches('s'),
        };
        let who = list(&who);
        if states.len() == 1 {
            format!("{who} {} the {quantity} of {what}", verb(one))
        } else {
            format!("{who} {} the {quantity}s of {what} together", verb("ties"))
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
            let members = self.with_partners(members.into_iter());
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
            let clause = self.clause(&drivers, &coils, "current", "sets");
            let piece = self.piece(&coils, &drivers, clause);
            found.push((coils, piece));
        }
        self.tell(found);
    }
}
