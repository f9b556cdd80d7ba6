//! Loops and cut-sets of a network as lists of its parts.

use crate::network::blocks::cut_sets;
use crate::network::cycle::{Loops, closing};
use crate::network::incidence::{Components, Ends, components};
use crate::network::topology::Edges;
use crate::network::{Element, ElementId, Kind, Network, Port};

/// The parts that stay in.
pub(super) struct Parts<'a> {
    pub(super) network: &'a Network,
    pub(super) list: Vec<(ElementId, &'a Element)>,
}

/// An edge with the part it belongs to.
pub(super) type PartEdge = (ElementId, Ends);

impl<'a> Parts<'a> {
    pub(super) fn new(network: &'a Network, without: &[ElementId]) -> Self {
        let mut out = vec![false; network.elements().len()];
        for id in without {
            out[id.index()] = true;
        }
        let list = network
            .elements()
            .filter(|(id, _)| !out[id.index()])
            .collect();
        Self { network, list }
    }

    pub(super) fn has(&self, id: ElementId) -> bool {
        self.list.binary_search_by_key(&id, |(id, _)| *id).is_ok()
    }

    pub(super) fn nodes(&self) -> usize {
        self.network.node_count()
    }

    /// One edge for each part that `edge` takes one from.
    pub(super) fn edges(
        &self,
        edge: impl Fn(ElementId, &Element) -> Option<Port>,
    ) -> Vec<PartEdge> {
        self.list
            .iter()
            .filter_map(|(id, element)| Some((*id, ends(edge(*id, element)?))))
            .collect()
    }

    /// All edges that `edges` takes from the parts.
    pub(super) fn all_edges(&self, edges: impl Fn(ElementId, &Element) -> Edges) -> Vec<PartEdge> {
        self.list
            .iter()
            .flat_map(|(id, element)| {
                let id = *id;
                edges(id, element)
                    .into_iter()
                    .map(move |port| (id, ends(port)))
            })
            .collect()
    }

    /// Independent sources of voltage and meters.
    pub(super) fn shorts(&self) -> Vec<PartEdge> {
        self.edges(|_, element| element.port().filter(|_| element.is_short()))
    }

    /// A basis of the loops of the chosen kind with sources of voltage and meters, each in loop
    /// order and beginning with a part of that kind.
    pub(super) fn loops(&self, chosen: impl Fn(&Kind) -> bool) -> Vec<Vec<ElementId>> {
        let closers = self.edges(|_, element| element.port().filter(|_| chosen(&element.kind)));
        if closers.is_empty() {
            return Vec::new();
        }
        closed(self.nodes(), self.shorts(), closers)
            .into_iter()
            .map(|around| arranged(around, |id| chosen(&self.network.element(id).kind)))
            .collect()
    }

    /// A basis of the cut-sets of the chosen kind with independent sources of current: the chosen
    /// kind first, each in file order.
    pub(super) fn cut_sets(&self, chosen: impl Fn(&Kind) -> bool) -> Vec<Vec<ElementId>> {
        let cuts = |element: &Element| chosen(&element.kind) || element.is_current_source();
        if !self.list.iter().any(|(_, element)| chosen(&element.kind)) {
            return Vec::new();
        }
        let rest = self.list.iter().filter(|(_, element)| !cuts(element));
        let rest = rest.flat_map(|(_, element)| element.conducting());
        let parted = components(self.nodes(), rest.map(ends));
        let crossing = self.edges(|_, element| element.port().filter(|_| cuts(element)));
        let is_chosen = |id: ElementId| chosen(&self.network.element(id).kind);
        let own: Vec<PartEdge> = crossing
            .iter()
            .copied()
            .filter(|(id, _)| is_chosen(*id))
            .collect();
        let mut list = cut_parts(&parted, &crossing);
        let label = |node: u32| parted.label[node as usize];
        let joined = own.iter().map(|(_, (a, b))| (label(*a), label(*b)));
        if list.len() + components(parted.count, joined).count != parted.count {
            // Sources alone hold an island, which floats freely once they are open.
            list = cut_parts(&parted, &own);
        }
        for cut in &mut list {
            cut.sort_by_key(|&id| (!is_chosen(id), id));
        }
        list
    }
}

/// The ends of a port as node numbers.
pub(super) fn ends(port: Port) -> Ends {
    let number = |index: usize| u32::try_from(index).unwrap_or(u32::MAX);
    (number(port.from.index()), number(port.to.index()))
}

/// The loops that `closers` close over `fixed` and earlier closers, each beginning with the closer.
pub(super) fn closed(
    nodes: usize,
    fixed: Vec<PartEdge>,
    closers: Vec<PartEdge>,
) -> Vec<Vec<ElementId>> {
    let first = fixed.len();
    let mut parts = fixed;
    parts.extend(closers);
    let edges: Vec<Ends> = parts.iter().map(|(_, ends)| *ends).collect();
    let closing = closing(nodes, &edges);
    let wanted = closing.partition_point(|&edge| (edge as usize) < first);
    if wanted == closing.len() {
        return Vec::new();
    }
    let mut loops = Loops::new(nodes, &edges, &closing);
    closing[wanted..]
        .iter()
        .map(|&edge| {
            let around = loops.of(edge).into_iter();
            around.map(|edge| parts[edge as usize].0).collect()
        })
        .collect()
}

/// A basis of the cut-sets between components, as parts in file order.
pub(super) fn cut_parts(parted: &Components, crossing: &[PartEdge]) -> Vec<Vec<ElementId>> {
    let edges: Vec<Ends> = crossing
        .iter()
        .map(|(_, (a, b))| (parted.label[*a as usize], parted.label[*b as usize]))
        .collect();
    cut_sets(parted.count, &edges, parted.label[0])
        .into_iter()
        .map(|cut| {
            cut.into_iter()
                .map(|edge| crossing[edge as usize].0)
                .collect()
        })
        .collect()
}

/// Turns a loop so that it begins with a run of chosen parts: of all such beginnings, in both
/// directions, the one with the earliest part.
fn arranged(mut around: Vec<ElementId>, chosen: impl Fn(ElementId) -> bool) -> Vec<ElementId> {
    let length = around.len();
    let runs = around.iter().any(|&id| !chosen(id));
    let begins =
        |at: usize, before: usize| chosen(around[at]) && (!runs || !chosen(around[before]));
    let forward = (0..length)
        .filter(|&at| begins(at, (at + length - 1) % length))
        .min_by_key(|&at| (around[at], around[(at + 1) % length]));
    let backward = (0..length)
        .filter(|&at| begins(at, (at + 1) % length))
        .min_by_key(|&at| (around[at], around[(at + length - 1) % length]));
    let (Some(forward), Some(backward)) = (forward, backward) else {
        return around;
    };
    let ahead = (around[forward], around[(forward + 1) % length]);
    let back = (around[backward], around[(backward + length - 1) % length]);
    if ahead <= back {
        around.rotate_left(forward);
    } else {
        around.reverse();
        around.rotate_left(length - 1 - backward);
    }
    around
}
