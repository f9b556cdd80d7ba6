//! Loops that an ordered list of edges closes, one for each edge that closes one.
//!
//! The loop of an edge uses, beside it, earlier edges alone; so the loops are independent, and they
//! are a basis of all loops. Loops are short: near each closing edge the earlier edges are searched
//! from both ends; only when that search has gone far is the path through the spanning tree taken.

use petgraph::unionfind::UnionFind;

use crate::network::incidence::{Ends, Incidence};

/// Entries looked at in one search before the tree is used.
const REACH: usize = 2048;
const NONE: u32 = u32::MAX;

/// Indexes of the edges whose ends earlier edges have joined already (Kruskal).
///
/// Cost: all but linear in nodes and edges.
#[must_use]
pub fn closing(nodes: usize, edges: &[Ends]) -> Vec<u32> {
    let mut sets = UnionFind::<u32>::new(nodes);
    (0_u32..)
        .zip(edges)
        .filter(|&(_, &(a, b))| !sets.union(a, b))
        .map(|(edge, _)| edge)
        .collect()
}

/// Finds the loops of closing edges.
#[derive(Debug)]
pub struct Loops<'a> {
    edges: &'a [Ends],
    incidence: Incidence,
    tree: Tree,
    search: Search,
}

impl<'a> Loops<'a> {
    /// Prepares the search; `closing` is what [`closing`] gives for the same edges.
    ///
    /// Cost: linear in nodes and edges.
    #[must_use]
    pub fn new(nodes: usize, edges: &'a [Ends], closing: &[u32]) -> Self {
        let incidence = Incidence::new(nodes, edges);
        let tree = Tree::new(nodes, edges, &incidence, closing);
        Self {
            edges,
            incidence,
            tree,
            search: Search::new(nodes),
        }
    }

    /// The loop of a closing edge: the edge itself, then on from its second end back to its first.
    ///
    /// Cost: bounded by a constant plus the length of the loop.
    pub fn of(&mut self, edge: u32) -> Vec<u32> {
        let (a, b) = self.edges[edge as usize];
        let mut list = vec![edge];
        if a != b {
            match self.search.path(&self.incidence, edge, b, a) {
                Some(path) => list.extend(path),
                None => list.extend(self.tree.path(b, a)),
            }
        }
        list
    }
}

/// A rooted spanning forest without the closing edges.
#[derive(Debug)]
struct Tree {
    up: Vec<(u32, u32)>,
    depth: Vec<u32>,
}

impl Tree {
    fn new(nodes: usize, edges: &[Ends], incidence: &Incidence, closing: &[u32]) -> Self {
        let mut closes = vec![false; edges.len()];
        for &edge in closing {
            closes[edge as usize] = true;
        }
        let mut tree = Self {
            up: vec![(NONE, NONE); nodes],
            depth: vec![NONE; nodes],
        };
        let mut queue = Vec::with_capacity(nodes);
        for root in (0_u32..).take(nodes) {
            if tree.depth[root as usize] != NONE {
                continue;
            }
            tree.depth[root as usize] = 0;
            let mut head = queue.len();
            queue.push(root);
            while let Some(&node) = queue.get(head) {
                head += 1;
                for &(next, edge) in incidence.at(node) {
                    if !closes[edge as usize] && tree.depth[next as usize] == NONE {
                        tree.depth[next as usize] = tree.depth[node as usize] + 1;
                        tree.up[next as usize] = (node, edge);
                        queue.push(next);
                    }
                }
            }
        }
        tree
    }

    fn path(&self, from: u32, to: u32) -> Vec<u32> {
        let (mut a, mut b) = (from, to);
        let (mut ahead, mut behind) = (Vec::new(), Vec::new());
        while a != b {
            let deeper = self.depth[a as usize] >= self.depth[b as usize];
            let (node, list) = if deeper {
                (&mut a, &mut ahead)
            } else {
                (&mut b, &mut behind)
            };
            let (parent, edge) = self.up[*node as usize];
            debug_assert!(parent != NONE, "the ends of a closing edge are joined");
            if parent == NONE {
                break;
            }
            list.push(edge);
            *node = parent;
        }
        ahead.extend(behind.into_iter().rev());
        ahead
    }
}

/// A search from both ends through earlier edges; marks are kept from search to search.
#[derive(Debug)]
struct Search {
    mark: Vec<u32>,
    via: Vec<(u32, u32)>,
    round: u32,
}

impl Search {
    fn new(nodes: usize) -> Self {
        Self {
            mark: vec![0; nodes],
            via: vec![(NONE, NONE); nodes],
            round: 0,
        }
    }

    /// Edges from `from` to `to`, all before `limit`; `None` when the search went too far.
    fn path(&mut self, incidence: &Incidence, limit: u32, from: u32, to: u32) -> Option<Vec<u32>> {
        if self.round > u32::MAX - 4 {
            self.mark.fill(0);
            self.round = 0;
        }
        self.round += 2;
        let mut queues = [(vec![from], 0_usize, 0_usize), (vec![to], 0, 0)];
        for (side, node) in [(0, from), (1, to)] {
            self.mark[node as usize] = self.round + side;
            self.via[node as usize] = (NONE, NONE);
        }
        loop {
            let cost = |(queue, head, looked): &(Vec<u32>, usize, usize)| {
                let next = queue.get(*head).map_or(0, |&node| incidence.at(node).len());
                looked + next
            };
            let side = u32::from(cost(&queues[1]) < cost(&queues[0]));
            let (queue, head, looked) = &mut queues[side as usize];
            let node = *queue.get(*head)?;
            *head += 1;
            for &(next, edge) in incidence.at(node) {
                if edge >= limit {
                    break;
                }
                *looked += 1;
                if *looked > REACH {
                    return None;
                }
                let mark = self.mark[next as usize];
                if mark == self.round + (1 - side) {
                    return Some(self.joined(side, node, edge, next));
                }
                if mark != self.round + side {
                    self.mark[next as usize] = self.round + side;
                    self.via[next as usize] = (node, edge);
                    queue.push(next);
                }
            }
        }
    }

    fn joined(&self, side: u32, node: u32, edge: u32, next: u32) -> Vec<u32> {
        let (near_from, near_to) = if side == 0 {
            (node, next)
        } else {
            (next, node)
        };
        let mut list = self.back(near_from);
        list.reverse();
        list.push(edge);
        list.extend(self.back(near_to));
        list
    }

    fn back(&self, mut node: u32) -> Vec<u32> {
        let mut list = Vec::new();
        while self.via[node as usize].0 != NONE {
            let (before, edge) = self.via[node as usize];
            list.push(edge);
            node = before;
        }
        list
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn loops(nodes: usize, edges: &[Ends]) -> Vec<Vec<u32>> {
        let closing = closing(nodes, edges);
        let mut loops = Loops::new(nodes, edges, &closing);
        closing.iter().map(|&edge| loops.of(edge)).collect()
    }

    /// Follows a loop from the second end of its first edge and says whether it comes back.
    fn comes_back(edges: &[Ends], list: &[u32]) -> bool {
        let (start, mut at) = edges[list[0] as usize];
        for &edge in &list[1..] {
            let (a, b) = edges[edge as usize];
            if a == at {
                at = b;
            } else if b == at {
                at = a;
            } else {
                return false;
            }
        }
        at == start
    }

    #[test]
    fn a_triangle_with_a_parallel_edge_and_a_self_loop() {
        let edges = [(0, 1), (1, 2), (2, 0), (2, 1), (1, 1)];
        assert_eq!(loops(3, &edges), [vec![2, 0, 1], vec![3, 1], vec![4]]);
    }

    #[test]
    fn loops_of_a_random_graph_come_back_and_use_earlier_edges() {
        let mut state = 0x9e37_79b9_u32;
        let mut next = |bound: u32| {
            state = state.wrapping_mul(1_664_525).wrapping_add(1_013_904_223);
            (state >> 8) % bound
        };
        for nodes in 2..40_u32 {
            let edges: Vec<Ends> = (0..3 * nodes).map(|_| (next(nodes), next(nodes))).collect();
            for list in loops(nodes as usize, &edges) {
                assert!(comes_back(&edges, &list), "{edges:?} {list:?}");
                assert!(list[1..].iter().all(|&edge| edge < list[0]));
            }
        }
    }

    #[test]
    fn a_far_loop_goes_through_the_tree() {
        let nodes = 20_000_u32;
        let mut edges: Vec<Ends> = (1..nodes).map(|node| (node - 1, node)).collect();
        edges.push((0, nodes - 1));
        let lists = loops(nodes as usize, &edges);
        assert_eq!(lists.len(), 1);
        assert_eq!(lists[0].len(), nodes as usize);
        assert!(comes_back(&edges, &lists[0]));
    }
}
