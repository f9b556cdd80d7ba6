//! States that transformers tie together.

use std::collections::BTreeSet;

use super::super::topology::{PartEdge, closed, ends};
use super::Search;
use crate::network::blocks::blocks;
use crate::network::incidence::{Ends, components};
use crate::network::{Element, ElementId, Kind};

/// Transformers whose cut-sets are searched.
const TRIED: usize = 32;

impl Search<'_> {
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
    pub(super) fn transformed_voltages(&mut self) {
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
            let apart = |part: &ElementId| {
                let alone = self.sensed.is_empty() && self.told.is_empty();
                (alone || self.is_apart(*part)) && !self.sensed.contains(part)
            };
            if states.is_empty() || !states.iter().all(apart) {
                continue;
            }
            let clause = self.clause(&[transformer], &states, "voltage", "sets");
            let piece = self.piece(&states, &[transformer], clause);
            found.push((states, piece));
        }
        self.tell(found);
    }

    /// Transformers with both windings in series with inductors alone.
    pub(super) fn transformed_currents(&mut self) {
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
            if states.is_empty() || !states.iter().all(|&part| self.is_apart(part)) {
                continue;
            }
            let clause = self.clause(&[id], &states, "current", "sets");
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
