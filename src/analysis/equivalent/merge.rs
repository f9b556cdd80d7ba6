//! Series and parallel: edges become one, parts of one class in a tree become one.

use std::collections::BTreeMap;

use crate::analysis::equivalent::circuit::{Circuit, Edge, EdgeId, Tree, TreeId};
use crate::analysis::equivalent::part::{Class, Definition, Part, PartId};
use crate::analysis::equivalent::{Rule, Step};
use crate::network::NodeId;

impl Circuit {
    /// Takes every series, parallel and no-current step there is.
    pub(super) fn settle(&mut self) {
        while let Some(node) = self.waiting.pop() {
            if !self.is_free(node) {
                continue;
            }
            let edges: Vec<EdgeId> = self.at[node.index()].iter().copied().collect();
            match edges.as_slice() {
                [only] => self.drop_edge(*only, Rule::NoCurrent, None),
                [first, second] => self.join(node, *first, *second),
                _ => {}
            }
        }
    }

    /// Puts a tree between two nodes, in parallel with what stands there.
    pub(super) fn connect(&mut self, from: NodeId, to: NodeId, tree: TreeId) {
        if from == to {
            let parts = self.parts_of(tree);
            self.drops.push(Step {
                rule: Rule::NoVoltage,
                parts: self.given(&parts),
                makes: None,
                by: None,
            });
            return;
        }
        let key = (from.min(to), from.max(to));
        if let Some(&edge) = self.between.get(&key)
            && let Some(old) = self.edges[edge]
        {
            let tree = self.parallel(old.tree, tree);
            self.edges[edge] = Some(Edge { tree, ..old });
        } else {
            let edge = self.edges.len();
            self.edges.push(Some(Edge { from, to, tree }));
            self.between.insert(key, edge);
            self.at[from.index()].insert(edge);
            self.at[to.index()].insert(edge);
        }
    }

    /// Takes an edge out of the graph and looks at its ends again.
    pub(super) fn disconnect(&mut self, edge: EdgeId) -> Option<Edge> {
        let gone = self.edges[edge].take()?;
        self.between
            .remove(&(gone.from.min(gone.to), gone.from.max(gone.to)));
        for node in [gone.from, gone.to] {
            self.at[node.index()].remove(&edge);
            self.waiting.push(node);
        }
        Some(gone)
    }

    /// Takes an edge out for good.
    pub(super) fn drop_edge(&mut self, edge: EdgeId, rule: Rule, by: Option<String>) {
        if let Some(gone) = self.disconnect(edge) {
            let parts = self.parts_of(gone.tree);
            self.drops.push(Step {
                rule,
                parts: self.given(&parts),
                makes: None,
                by,
            });
        }
    }

    /// Two edges at a node of their own become one.
    fn join(&mut self, node: NodeId, first: EdgeId, second: EdgeId) {
        let (Some(first), Some(second)) = (self.disconnect(first), self.disconnect(second)) else {
            return;
        };
        let mut left = self.string(first.tree);
        let mut right = self.string(second.tree);
        let from = if first.to == node {
            first.from
        } else {
            turn(&mut left);
            first.to
        };
        let to = if second.from == node {
            second.to
        } else {
            turn(&mut right);
            second.from
        };
        left.0.append(&mut right.0);
        left.1.push(node);
        left.1.append(&mut right.1);
        let tree = self.series(left);
        self.connect(from, to, tree);
    }

    /// The members of a series string; a single one for any other tree.
    fn string(&self, tree: TreeId) -> (Vec<TreeId>, Vec<NodeId>) {
        match &self.trees[tree] {
            Tree::Series { items, nodes } => (items.clone(), nodes.clone()),
            Tree::Part(_) | Tree::Parallel(_) => (vec![tree], Vec::new()),
        }
    }

    fn series(&mut self, string: (Vec<TreeId>, Vec<NodeId>)) -> TreeId {
        let (items, between) = string;
        let mut kept: Vec<TreeId> = Vec::new();
        let mut nodes: Vec<NodeId> = Vec::new();
        let mut place: BTreeMap<Class, usize> = BTreeMap::new();
        for (index, &item) in items.iter().enumerate() {
            if let Tree::Part(part) = self.trees[item] {
                let class = self.parts[part].class;
                if let Some(&earlier) = place.get(&class)
                    && let Tree::Part(other) = self.trees[kept[earlier]]
                {
                    let aside = earlier + 1 < kept.len();
                    let made = self.merge(other, part, class.adds_in_series(), aside);
                    kept[earlier] = self.tree(Tree::Part(made));
                    continue;
                }
                place.insert(class, kept.len());
            }
            if !kept.is_empty() {
                nodes.push(between[index - 1]);
            }
            kept.push(item);
        }
        match kept.as_slice() {
            [only] => *only,
            _ => self.tree(Tree::Series { items: kept, nodes }),
        }
    }

    fn parallel(&mut self, first: TreeId, second: TreeId) -> TreeId {
        let mut kept: Vec<TreeId> = Vec::new();
        let mut place: BTreeMap<Class, usize> = BTreeMap::new();
        for tree in [first, second] {
            let items = match &self.trees[tree] {
                Tree::Parallel(items) => items.clone(),
                Tree::Part(_) | Tree::Series { .. } => vec![tree],
            };
            for item in items {
                if let Tree::Part(part) = self.trees[item] {
                    let class = self.parts[part].class;
                    if let Some(&earlier) = place.get(&class)
                        && let Tree::Part(other) = self.trees[kept[earlier]]
                    {
                        let made = self.merge(other, part, !class.adds_in_series(), false);
                        kept[earlier] = self.tree(Tree::Part(made));
                        continue;
                    }
                    place.insert(class, kept.len());
                }
                kept.push(item);
            }
        }
        match kept.as_slice() {
            [only] => *only,
            _ => self.tree(Tree::Parallel(kept)),
        }
    }

    /// One part for two of a class. A part that is a sum (or parallel combination) already takes the
    /// other in, so that three resistors in series are one step.
    fn merge(&mut self, first: PartId, second: PartId, adds: bool, aside: bool) -> PartId {
        let members = |part: PartId| match &self.parts[part].definition {
            Definition::Sum(members) if adds => (members.clone(), self.parts[part].exchanged),
            Definition::Parallel(members) if !adds => (members.clone(), self.parts[part].exchanged),
            _ => (vec![part], false),
        };
        let (mut list, first_aside) = members(first);
        let (more, second_aside) = members(second);
        list.extend(more);
        list.sort_unstable();
        let class = self.parts[first].class;
        self.part(Part {
            name: String::new(),
            class,
            definition: if adds {
                Definition::Sum(list)
            } else {
                Definition::Parallel(list)
            },
            exchanged: aside || first_aside || second_aside,
        })
    }
}

fn turn(string: &mut (Vec<TreeId>, Vec<NodeId>)) {
    string.0.reverse();
    string.1.reverse();
}
