//! Blocks of a graph (its parts without a cut vertex) and the cut-sets that follow from them.
//!
//! Hopcroft and Tarjan's search (1973), without recursion. Inside a block the edges at one node are
//! a minimal cut-set; those of all nodes but one are a basis of the block's cuts, and the bases of
//! all blocks together are one of the graph.

use crate::network::incidence::{Ends, Incidence};

const NONE: u32 = u32::MAX;

/// The edges of each block, in no particular order; edges from a node to itself lie in none.
///
/// Cost: linear in nodes and edges.
#[must_use]
pub fn blocks(nodes: usize, edges: &[Ends]) -> Vec<Vec<u32>> {
    let incidence = Incidence::new(nodes, edges);
    let mut walk = Walk {
        entered: vec![NONE; nodes],
        low: vec![NONE; nodes],
        clock: 0,
        open: Vec::new(),
        found: Vec::new(),
    };
    for root in (0_u32..).take(nodes) {
        if walk.entered[root as usize] == NONE {
            walk.from(root, &incidence);
        }
    }
    walk.found
}

struct Walk {
    entered: Vec<u32>,
    low: Vec<u32>,
    clock: u32,
    open: Vec<u32>,
    found: Vec<Vec<u32>>,
}

/// A node on the way down, the edge that led there, and how far its list has been looked at.
struct Step {
    node: u32,
    by: u32,
    next: usize,
}

impl Walk {
    fn enter(&mut self, node: u32) {
        self.entered[node as usize] = self.clock;
        self.low[node as usize] = self.clock;
        self.clock += 1;
    }

    fn from(&mut self, root: u32, incidence: &Incidence) {
        let mut way = vec![Step {
            node: root,
            by: NONE,
            next: 0,
        }];
        self.enter(root);
        while let Some(step) = way.last_mut() {
            let Some(&(there, edge)) = incidence.at(step.node).get(step.next) else {
                let (node, by) = (step.node, step.by);
                way.pop();
                if let Some(above) = way.last() {
                    self.leave(node, above.node, by);
                }
                continue;
            };
            step.next += 1;
            let (node, by) = (step.node, step.by);
            if edge == by {
                continue;
            }
            if self.entered[there as usize] == NONE {
                self.open.push(edge);
                self.enter(there);
                way.push(Step {
                    node: there,
                    by: edge,
                    next: 0,
                });
            } else if self.entered[there as usize] < self.entered[node as usize] {
                self.open.push(edge);
                let seen = self.entered[there as usize];
                let low = &mut self.low[node as usize];
                *low = (*low).min(seen);
            }
        }
    }

    fn leave(&mut self, node: u32, above: u32, by: u32) {
        let low = self.low[node as usize];
        self.low[above as usize] = self.low[above as usize].min(low);
        if low >= self.entered[above as usize] {
            let first = self.open.iter().rposition(|&edge| edge == by).unwrap_or(0);
            self.found.push(self.open.split_off(first));
        }
    }
}

/// A basis of the minimal cut-sets of a graph, each as its edges in ascending order, sorted.
///
/// Each cut parts one node from the rest of its block. The node that is left out of a block is
/// `root` where that lies in it, else the one with the most edges there.
///
/// Cost: linear in nodes and edges, but for sorting.
#[must_use]
pub fn cut_sets(nodes: usize, edges: &[Ends], root: u32) -> Vec<Vec<u32>> {
    let mut list = Vec::new();
    for block in blocks(nodes, edges) {
        let mut at: Vec<(u32, u32)> = block
            .iter()
            .flat_map(|&edge| {
                let (a, b) = edges[edge as usize];
                [(a, edge), (b, edge)]
            })
            .collect();
        at.sort_unstable();
        let stars: Vec<&[(u32, u32)]> = at.chunk_by(|x, y| x.0 == y.0).collect();
        let spared = stars
            .iter()
            .position(|star| star[0].0 == root)
            .or_else(|| (0..stars.len()).rev().max_by_key(|&star| stars[star].len()));
        for (index, star) in stars.iter().enumerate() {
            if Some(index) != spared {
                list.push(star.iter().map(|&(_, edge)| edge).collect());
            }
        }
    }
    list.sort_unstable();
    list
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::network::incidence::components;

    fn sorted(nodes: usize, edges: &[Ends]) -> Vec<Vec<u32>> {
        let mut list = blocks(nodes, edges);
        for block in &mut list {
            block.sort_unstable();
        }
        list.sort_unstable();
        list
    }

    #[test]
    fn two_triangles_at_one_node_a_bridge_and_a_double_edge() {
        let edges = [
            (0, 1),
            (1, 2),
            (2, 0),
            (2, 3),
            (3, 4),
            (4, 2),
            (4, 5),
            (5, 6),
            (6, 5),
            (6, 6),
        ];
        assert_eq!(
            sorted(7, &edges),
            [vec![0, 1, 2], vec![3, 4, 5], vec![6], vec![7, 8]]
        );
    }

    #[test]
    fn cut_sets_are_minimal_and_as_many_as_the_rank() {
        let mut state = 0x1234_5678_u32;
        let mut next = |bound: u32| {
            state = state.wrapping_mul(1_664_525).wrapping_add(1_013_904_223);
            (state >> 8) % bound
        };
        for nodes in 2..25_u32 {
            let edges: Vec<Ends> = (0..nodes + nodes / 2)
                .map(|_| (next(nodes), next(nodes)))
                .collect();
            let whole = components(nodes as usize, edges.iter().copied());
            let cuts = cut_sets(nodes as usize, &edges, 0);
            assert_eq!(cuts.len(), nodes as usize - whole.count);
            for cut in &cuts {
                for spared in [None].into_iter().chain(cut.iter().map(Some)) {
                    let rest = (0_u32..)
                        .zip(&edges)
                        .filter(|(edge, _)| !cut.contains(edge) || Some(edge) == spared)
                        .map(|(_, ends)| *ends);
                    let count = components(nodes as usize, rest).count;
                    assert_eq!(count, whole.count + usize::from(spared.is_none()));
                }
            }
        }
    }

    #[test]
    fn a_long_path_does_not_recurse() {
        let nodes = 300_000_u32;
        let edges: Vec<Ends> = (1..nodes).map(|node| (node - 1, node)).collect();
        assert_eq!(blocks(nodes as usize, &edges).len(), edges.len());
    }
}
