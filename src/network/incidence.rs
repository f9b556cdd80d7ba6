//! Undirected graphs on numbered nodes, in the two forms that linear-time algorithms want.

use petgraph::unionfind::UnionFind;

/// An edge by its two ends.
pub type Ends = (u32, u32);

/// Incidence lists of a graph, packed; loops of one edge are left out.
#[derive(Clone, Debug)]
pub struct Incidence {
    start: Vec<u32>,
    entries: Vec<(u32, u32)>,
}

impl Incidence {
    /// The lists of the nodes `0..nodes`, each in edge order.
    ///
    /// Cost: linear in nodes and edges.
    #[must_use]
    pub fn new(nodes: usize, edges: &[Ends]) -> Self {
        let mut start = vec![0_u32; nodes + 1];
        for &(a, b) in edges.iter().filter(|(a, b)| a != b) {
            start[a as usize + 1] += 1;
            start[b as usize + 1] += 1;
        }
        for node in 0..nodes {
            start[node + 1] += start[node];
        }
        let mut next = start.clone();
        let mut entries = vec![(0, 0); start[nodes] as usize];
        for (edge, &(a, b)) in (0_u32..).zip(edges).filter(|(_, (a, b))| a != b) {
            for (here, there) in [(a, b), (b, a)] {
                entries[next[here as usize] as usize] = (there, edge);
                next[here as usize] += 1;
            }
        }
        Self { start, entries }
    }

    /// Pairs (other end, edge) at a node, edges ascending.
    #[must_use]
    pub fn at(&self, node: u32) -> &[(u32, u32)] {
        let node = node as usize;
        &self.entries[self.start[node] as usize..self.start[node + 1] as usize]
    }
}

/// Component label of each node; labels count up from 0 in the order of their first nodes.
///
/// Cost: all but linear in nodes and edges.
#[must_use]
pub fn components(nodes: usize, edges: impl IntoIterator<Item = Ends>) -> Components {
    let mut sets = UnionFind::<u32>::new(nodes);
    for (a, b) in edges {
        sets.union(a, b);
    }
    Components::of(sets)
}

/// The components of a graph.
#[derive(Clone, Debug)]
pub struct Components {
    /// Label of each node.
    pub label: Vec<u32>,
    /// Number of components.
    pub count: usize,
}

impl Components {
    /// Labels of disjoint sets.
    #[must_use]
    pub fn of(sets: UnionFind<u32>) -> Self {
        let roots = sets.into_labeling();
        let mut name = vec![u32::MAX; roots.len()];
        let mut count = 0;
        let label = roots
            .iter()
            .map(|&root| {
                let slot = &mut name[root as usize];
                if *slot == u32::MAX {
                    *slot = count;
                    count += 1;
                }
                *slot
            })
            .collect();
        Self {
            label,
            count: count as usize,
        }
    }

    /// Whether two nodes lie in one component.
    #[must_use]
    pub fn joined(&self, (a, b): Ends) -> bool {
        self.label[a as usize] == self.label[b as usize]
    }
}
