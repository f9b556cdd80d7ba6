//! Star to triangle: a free node with three parts of one class goes.

use crate::analysis::equivalent::circuit::{Circuit, EdgeId, Tree};
use crate::analysis::equivalent::part::{Definition, Part};
use crate::network::NodeId;

impl Circuit {
    /// Turns the first such star into a triangle.
    pub(super) fn star_to_delta(&mut self) -> bool {
        (0..self.at.len()).any(|index| self.turn_star(NodeId::at(index)))
    }

    fn turn_star(&mut self, node: NodeId) -> bool {
        if !self.is_free(node) {
            return false;
        }
        let edges: Vec<EdgeId> = self.at[node.index()].iter().copied().collect();
        let [_, _, _] = edges.as_slice() else {
            return false;
        };
        let mut arms = Vec::new();
        for &edge in &edges {
            let Some(here) = self.edges[edge] else {
                return false;
            };
            let Tree::Part(part) = self.trees[here.tree] else {
                return false;
            };
            let end = if here.from == node {
                here.to
            } else {
                here.from
            };
            arms.push((end, part));
        }
        let class = self.parts[arms[0].1].class;
        if arms
            .iter()
            .any(|(_, part)| self.parts[*part].class != class)
        {
            return false;
        }
        for edge in edges {
            self.disconnect(edge);
        }
        for (a, b, c) in [(0, 1, 2), (1, 2, 0), (2, 0, 1)] {
            let made = self.part(Part {
                name: String::new(),
                class,
                definition: Definition::Side([arms[a].1, arms[b].1, arms[c].1]),
                exchanged: false,
            });
            let tree = self.tree(Tree::Part(made));
            self.connect(arms[a].0, arms[b].0, tree);
        }
        true
    }
}
