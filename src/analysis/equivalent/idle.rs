//! Parts that an ideal source makes idle: across a held voltage, in series with a given current.

use std::collections::BTreeMap;

use petgraph::unionfind::UnionFind;

use crate::analysis::equivalent::circuit::Circuit;
use crate::analysis::equivalent::{Rule, Step};
use crate::network::{ElementId, Kind, Network, NodeId, Port, Quantity};

impl Circuit {
    /// Drops edges whose voltage is held whatever current flows, and edges between nodes that an ideal
    /// amplifier keeps at one voltage. Parts whose current is asked or sensed, and parts that a
    /// question takes out, hold nothing.
    pub(super) fn drop_held(&mut self, network: &Network) -> bool {
        let mut joined: UnionFind<usize> = UnionFind::new(self.at.len());
        let mut holders: BTreeMap<NodeId, ElementId> = BTreeMap::new();
        let mut equal: Vec<(Port, ElementId)> = Vec::new();
        for (id, element) in network.elements() {
            if self.kept.contains(&id) {
                continue;
            }
            if let Some(port) = held(&element.kind) {
                joined.union(port.from.index(), port.to.index());
                for node in [port.from, port.to] {
                    holders.entry(node).or_insert(id);
                }
            }
            if let Some(port) = made_equal(&element.kind) {
                equal.push((port, id));
            }
        }
        let mut found = false;
        for index in 0..self.edges.len() {
            let Some(edge) = self.edges[index] else {
                continue;
            };
            if joined.equiv(edge.from.index(), edge.to.index()) {
                let ends = [edge.from, edge.to];
                let by = ends
                    .iter()
                    .filter(|node| **node != NodeId::GROUND)
                    .filter_map(|node| holders.get(node))
                    .map(|id| network.element(*id).name.as_str());
                let mut names: Vec<&str> = by.collect();
                names.dedup();
                let by = names.join(" and ");
                self.drop_edge(index, Rule::Held, Some(by));
                found = true;
            }
        }
        for (port, id) in equal {
            let key = (port.from.min(port.to), port.from.max(port.to));
            if let Some(&edge) = self.between.get(&key) {
                let by = Some(network.element(id).name.clone());
                self.drop_edge(edge, Rule::NoVoltage, by);
                found = true;
            }
        }
        found
    }

    /// Shorts edges in series with a current source where nothing else stands between them.
    pub(super) fn pass_driven(&mut self, network: &Network) -> bool {
        let mut found = false;
        for index in 0..self.at.len() {
            let node = NodeId::at(index);
            let [id] = self.terminals[index].as_slice() else {
                continue;
            };
            let (id, edges) = (*id, &self.at[index]);
            let Some(&edge) = edges.first().filter(|_| edges.len() == 1) else {
                continue;
            };
            if self.asked.contains(&node) || !is_current_source(network, id) {
                continue;
            }
            let Some(here) = self.edges[edge] else {
                continue;
            };
            let there = if here.from == node {
                here.to
            } else {
                here.from
            };
            if self.terminals[there.index()].contains(&id) {
                continue;
            }
            self.disconnect(edge);
            let parts = self.parts_of(here.tree);
            self.drops.push(Step {
                rule: Rule::Driven,
                parts: self.given(&parts),
                makes: None,
                by: Some(network.element(id).name.clone()),
            });
            self.terminals[index].clear();
            self.terminals[there.index()].push(id);
            self.moved.insert((id, node), there);
            found = true;
        }
        found
    }
}

fn is_current_source(network: &Network, id: ElementId) -> bool {
    matches!(&network.element(id).kind,
        Kind::Source(source) if source.quantity == Quantity::Current)
}

/// The node pair whose voltage a part holds whatever current flows there.
fn held(kind: &Kind) -> Option<Port> {
    match kind {
        Kind::Source(source) if source.quantity == Quantity::Voltage => Some(source.port),
        Kind::Meter(port) => Some(*port),
        Kind::Amplifier {
            output, rout: None, ..
        } => Some(*output),
        Kind::Nullor { output, .. } => Some(*output),
        _ => None,
    }
}

/// The node pair that an ideal part keeps at one voltage by an output elsewhere.
fn made_equal(kind: &Kind) -> Option<Port> {
    match kind {
        Kind::Amplifier {
            input, gain: None, ..
        }
        | Kind::Nullor { input, .. } => Some(*input),
        Kind::Conveyor { x, y, .. } => Some(Port { from: *x, to: *y }),
        _ => None,
    }
}
