//! The order in which parts enter the diagram: least frontier growth, from several starts, then
//! improved by moves. Deterministic: bounded by counts, not by time.

use crate::analysis::block::Block;

/// Vertices a block touches: current-graph nodes even, voltage-graph nodes odd; the reference left out.
fn touched(block: &Block) -> Vec<u32> {
    let mut vertices = Vec::new();
    for choice in &block.choices {
        let ends = |edge: (u32, u32)| [edge.0, edge.1];
        for &index in &choice.current {
            vertices.extend(ends(block.current[index]).map(|node| node * 2));
        }
        for &index in &choice.voltage {
            vertices.extend(ends(block.voltage[index]).map(|node| node * 2 + 1));
        }
    }
    vertices.retain(|vertex| *vertex > 1);
    vertices.sort_unstable();
    vertices.dedup();
    vertices
}

/// Touched vertices of every block and how many blocks touch each vertex.
struct Incidence {
    touched: Vec<Vec<u32>>,
    blocks: Vec<Vec<usize>>,
}

impl Incidence {
    fn new(blocks: &[Block], nodes: u32) -> Self {
        let touched: Vec<Vec<u32>> = blocks.iter().map(touched).collect();
        let mut of = vec![Vec::new(); nodes as usize * 2 + 2];
        for (block, vertices) in touched.iter().enumerate() {
            for &vertex in vertices {
                of[vertex as usize].push(block);
            }
        }
        Self {
            touched,
            blocks: of,
        }
    }

    /// Σ 2^frontier over the steps, saturating: a proxy of the number of states.
    fn cost(&self, order: &[usize]) -> u64 {
        let mut left: Vec<usize> = self.blocks.iter().map(Vec::len).collect();
        let mut frontier = 0_u32;
        let mut cost = 0_u64;
        for &block in order {
            for &vertex in &self.touched[block] {
                let all = self.blocks[vertex as usize].len();
                if left[vertex as usize] == all {
                    frontier += 1;
                }
                left[vertex as usize] -= 1;
            }
            cost = cost.saturating_add(1_u64.checked_shl(frontier).unwrap_or(u64::MAX));
            for &vertex in &self.touched[block] {
                if left[vertex as usize] == 0 {
                    frontier -= 1;
                }
            }
        }
        cost
    }

    /// Takes the block that lets the frontier grow least, among those that touch the frontier.
    fn greedy(&self, start: usize) -> Vec<usize> {
        let count = self.touched.len();
        let mut left: Vec<usize> = self.blocks.iter().map(Vec::len).collect();
        let mut taken = vec![false; count];
        let mut order = Vec::with_capacity(count);
        let mut candidates: Vec<usize> = Vec::new();
        let mut listed = vec![false; count];
        let mut next_fresh = 0;
        let mut next = Some(start);
        while let Some(block) = next {
            taken[block] = true;
            order.push(block);
            for &vertex in &self.touched[block] {
                left[vertex as usize] -= 1;
                for &neighbour in &self.blocks[vertex as usize] {
                    if !taken[neighbour] && !listed[neighbour] {
                        listed[neighbour] = true;
                        candidates.push(neighbour);
                    }
                }
            }
            candidates.retain(|&candidate| !taken[candidate]);
            next = candidates
                .iter()
                .copied()
                .min_by_key(|&candidate| (self.growth(candidate, &left), candidate));
            if next.is_none() {
                while next_fresh < count && taken[next_fresh] {
                    next_fresh += 1;
                }
                next = (next_fresh < count).then_some(next_fresh);
            }
        }
        order
    }

    fn growth(&self, block: usize, left: &[usize]) -> i64 {
        let mut growth = 0;
        for &vertex in &self.touched[block] {
            let remaining = left[vertex as usize];
            if remaining == self.blocks[vertex as usize].len() {
                growth += 1;
            }
            if remaining == 1 {
                growth -= 1;
            }
        }
        growth
    }
}

/// Starts that are tried.
const STARTS: usize = 24;
/// Moves that are tried on orders that look expensive.
const MOVES: usize = 3000;
/// Proxy cost below which an order is good enough, for each block.
const CHEAP: u64 = 64;

/// A good order of the blocks with its cost, Σ 2^frontier over the steps.
pub(crate) fn order(blocks: &[Block], nodes: u32) -> (Vec<usize>, u64) {
    let count = blocks.len();
    if count == 0 {
        return (Vec::new(), 0);
    }
    let incidence = Incidence::new(blocks, nodes);
    let starts = if count > 2000 { 2 } else { STARTS.min(count) };
    let mut best: Option<(u64, Vec<usize>)> = None;
    for step in 0..starts {
        let order = incidence.greedy(step * count / starts);
        let cost = incidence.cost(&order);
        if best.as_ref().is_none_or(|(least, _)| cost < *least) {
            best = Some((cost, order));
        }
    }
    let (mut cost, mut order) = best.unwrap_or((0, (0..count).collect()));
    if cost > CHEAP * count as u64 && count <= 400 {
        improve(&incidence, &mut order, &mut cost);
    }
    (order, cost)
}

/// Moves single blocks to other places while that pays.
fn improve(incidence: &Incidence, order: &mut Vec<usize>, cost: &mut u64) {
    let mut seed = 0x9E37_79B9_u64;
    let mut random = |below: usize| {
        seed ^= seed << 13;
        seed ^= seed >> 7;
        seed ^= seed << 17;
        usize::try_from(seed % below as u64).unwrap_or(0)
    };
    for _ in 0..MOVES {
        let (from, to) = (random(order.len()), random(order.len()));
        let block = order.remove(from);
        order.insert(to, block);
        let changed = incidence.cost(order);
        if changed <= *cost {
            *cost = changed;
        } else {
            let block = order.remove(to);
            order.insert(from, block);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::assembly::assemble;
    use crate::analysis::setup::{Frame, Insertion};
    use crate::network::sketch::Sketch;

    #[test]
    fn a_ladder_keeps_a_narrow_frontier_whatever_the_file_order() {
        let mut list: Vec<String> = (1..40)
            .flat_map(|n| {
                let before = if n == 1 {
                    "ground".to_owned()
                } else {
                    format!("n{}", n - 1)
                };
                [format!("R{n} {before} n{n}"), format!("C{n} n{n} ground")]
            })
            .collect();
        let half = list.len() / 2;
        let scattered: Vec<String> = (0..half)
            .flat_map(|at| [list[at].clone(), list[at + half].clone()])
            .collect();
        list.clone_from(&scattered);
        let network = Sketch::of(&list.join(";")).finish();
        let assembly = assemble(&network, &Frame::default(), &Insertion::None);
        let incidence = Incidence::new(&assembly.blocks, assembly.nodes);
        let (found, _) = order(&assembly.blocks, assembly.nodes);
        let mut sorted = found.clone();
        sorted.sort_unstable();
        assert_eq!(sorted, (0..assembly.blocks.len()).collect::<Vec<_>>());
        // Two vertices of each graph at a time, ends apart.
        assert!(incidence.cost(&found) <= 16 * assembly.blocks.len() as u64 + 64);
    }
}
