//! Forced edges contracted before the diagram is built.
//!
//! A current edge that every option of its part takes is in every tree. Adding the row of its first
//! end to the row of its second moves all other edges of the first end to the second; the forced edge
//! stays behind as a pendant of the first end. The same holds for voltage edges.

use std::collections::{BTreeSet, VecDeque};

use crate::analysis::assembly::Assembly;
use crate::analysis::block::{Block, Edge};
use crate::network::ElementId;

/// No unique solution, whatever the values.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Singular {
    /// The parts found to constrain each other, as far as they are known.
    pub elements: Vec<ElementId>,
    /// In which equations.
    pub kind: SingularKind,
}

/// Where the contradiction was met.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum SingularKind {
    /// A loop of branches whose currents nothing decides.
    CurrentLoop,
    /// A loop of voltages that are all prescribed.
    VoltageLoop,
    /// No common spanning tree.
    NoTree,
}

#[derive(Clone, Copy, PartialEq, Eq)]
enum Graph {
    Current,
    Voltage,
}

/// One of the two graphs under contraction.
struct Contracted {
    parent: Vec<u32>,
    /// Forced edges as they first stood, with their part, to explain a loop.
    forced: Vec<(Edge, Option<ElementId>)>,
}

impl Contracted {
    fn new(nodes: u32) -> Self {
        Self {
            parent: (0..nodes).collect(),
            forced: Vec::new(),
        }
    }

    fn find(&mut self, mut node: u32) -> u32 {
        while self.parent[node as usize] != node {
            let up = self.parent[self.parent[node as usize] as usize];
            self.parent[node as usize] = up;
            node = up;
        }
        node
    }

    /// Parts on the way between the ends of an edge over forced edges.
    fn path(&self, edge: Edge) -> Vec<ElementId> {
        let mut neighbours: Vec<Vec<(u32, usize)>> = vec![Vec::new(); self.parent.len()];
        for (index, ((a, b), _)) in self.forced.iter().enumerate() {
            neighbours[*a as usize].push((*b, index));
            neighbours[*b as usize].push((*a, index));
        }
        let mut from = vec![None; self.parent.len()];
        let mut queue = VecDeque::from([edge.0]);
        let mut seen = BTreeSet::from([edge.0]);
        while let Some(node) = queue.pop_front() {
            for &(next, index) in &neighbours[node as usize] {
                if seen.insert(next) {
                    from[next as usize] = Some((node, index));
                    queue.push_back(next);
                }
            }
        }
        let mut parts = Vec::new();
        let mut at = edge.1;
        while let Some((before, index)) = from[at as usize] {
            parts.extend(self.forced[index].1);
            at = before;
        }
        parts.sort_unstable();
        parts.dedup();
        parts
    }
}

/// Contracts until nothing is forced any more; drops options that became loops.
pub(crate) fn contract(assembly: &mut Assembly) -> Result<(), Singular> {
    let mut current = Contracted::new(assembly.nodes);
    let mut voltage = Contracted::new(assembly.nodes);
    let count = assembly.blocks.len();
    let mut done = vec![[Vec::new(), Vec::new()]; count];
    let mut changed = true;
    while changed {
        changed = false;
        for (block, done) in assembly.blocks.iter_mut().zip(&mut done) {
            prune(block, &mut current, &mut voltage, done)?;
            for (side, graph) in [Graph::Current, Graph::Voltage].into_iter().enumerate() {
                let contracted = match graph {
                    Graph::Current => &mut current,
                    Graph::Voltage => &mut voltage,
                };
                while let Some(index) = forced_edge(block, graph, &done[side]) {
                    take(block, graph, index, contracted)?;
                    done[side].push(index);
                    changed = true;
                }
            }
        }
    }
    for (block, done) in assembly.blocks.iter_mut().zip(&done) {
        relabel(&mut block.current, &mut current, &done[0]);
        relabel(&mut block.voltage, &mut voltage, &done[1]);
    }
    Ok(())
}

fn relabel(edges: &mut [Edge], contracted: &mut Contracted, done: &[usize]) {
    for (index, edge) in edges.iter_mut().enumerate() {
        if !done.contains(&index) {
            *edge = (contracted.find(edge.0), contracted.find(edge.1));
        }
    }
}

/// Drops options with an edge whose ends are one node.
fn prune(
    block: &mut Block,
    current: &mut Contracted,
    voltage: &mut Contracted,
    done: &[Vec<usize>; 2],
) -> Result<(), Singular> {
    let is_loop = |edges: &[Edge], contracted: &mut Contracted, done: &[usize]| {
        edges
            .iter()
            .enumerate()
            .map(|(index, edge)| {
                !done.contains(&index) && contracted.find(edge.0) == contracted.find(edge.1)
            })
            .collect::<Vec<bool>>()
    };
    let current_loops = is_loop(&block.current, current, &done[0]);
    let voltage_loops = is_loop(&block.voltage, voltage, &done[1]);
    let before = block.choices.clone();
    block.choices.retain(|choice| {
        choice.current.iter().all(|&index| !current_loops[index])
            && choice.voltage.iter().all(|&index| !voltage_loops[index])
    });
    if !block.choices.is_empty() {
        return Ok(());
    }
    Err(explain(
        block,
        &before,
        [&current_loops, &voltage_loops],
        current,
        voltage,
    ))
}

/// Why a part has no option left.
fn explain(
    block: &Block,
    choices: &[crate::analysis::block::Choice],
    loops: [&[bool]; 2],
    current: &Contracted,
    voltage: &Contracted,
) -> Singular {
    for choice in choices {
        if let Some(&index) = choice.voltage.iter().find(|&&index| loops[1][index]) {
            return looped(
                block,
                block.voltage[index],
                voltage,
                SingularKind::VoltageLoop,
            );
        }
        if let Some(&index) = choice.current.iter().find(|&&index| loops[0][index]) {
            return looped(
                block,
                block.current[index],
                current,
                SingularKind::CurrentLoop,
            );
        }
    }
    Singular {
        elements: block.element.into_iter().collect(),
        kind: SingularKind::NoTree,
    }
}

fn looped(block: &Block, edge: Edge, contracted: &Contracted, kind: SingularKind) -> Singular {
    let mut elements = contracted.path(edge);
    elements.extend(block.element);
    elements.sort_unstable();
    elements.dedup();
    Singular { elements, kind }
}

/// An edge that all options take and that is not contracted yet.
fn forced_edge(block: &Block, graph: Graph, done: &[usize]) -> Option<usize> {
    let chosen = |choice: &crate::analysis::block::Choice| match graph {
        Graph::Current => choice.current.clone(),
        Graph::Voltage => choice.voltage.clone(),
    };
    let first = chosen(block.choices.first()?);
    first.into_iter().find(|index| {
        !done.contains(index)
            && block
                .choices
                .iter()
                .all(|choice| chosen(choice).contains(index))
    })
}

/// Contracts one forced edge; the edge becomes a pendant of its first end.
fn take(
    block: &mut Block,
    graph: Graph,
    index: usize,
    contracted: &mut Contracted,
) -> Result<(), Singular> {
    let original = match graph {
        Graph::Current => block.current[index],
        Graph::Voltage => block.voltage[index],
    };
    let (mut a, mut b) = (contracted.find(original.0), contracted.find(original.1));
    if a == b {
        let kind = match graph {
            Graph::Current => SingularKind::CurrentLoop,
            Graph::Voltage => SingularKind::VoltageLoop,
        };
        return Err(looped(block, original, contracted, kind));
    }
    if a == 0 {
        std::mem::swap(&mut a, &mut b);
        for choice in &mut block.choices {
            choice.negative = !choice.negative;
        }
    }
    contracted.parent[a as usize] = b;
    contracted.forced.push((original, block.element));
    match graph {
        Graph::Current => block.current[index] = (a, 0),
        Graph::Voltage => block.voltage[index] = (a, 0),
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::assembly::assemble;
    use crate::analysis::setup::{Frame, Insertion};
    use crate::network::sketch::Sketch;

    #[test]
    fn a_loop_of_sources_names_its_parts() {
        let network = Sketch::of("Va a ground; Vb b a; Vc b ground; R1 b ground").finish();
        let mut assembly = assemble(&network, &Frame::default(), &Insertion::None);
        let singular = contract(&mut assembly).expect_err("a loop");
        let names: Vec<&str> = singular
            .elements
            .iter()
            .map(|&id| network.element(id).name.as_str())
            .collect();
        assert_eq!(names, ["Va", "Vb", "Vc"]);
    }

    #[test]
    fn parts_across_a_source_lose_the_option_that_became_a_loop() {
        let network = Sketch::of("Va a ground; R1 a ground; R2 a b; R3 b ground").finish();
        let mut assembly = assemble(&network, &Frame::default(), &Insertion::None);
        contract(&mut assembly).expect("sound");
        let across = assembly
            .blocks
            .iter()
            .find(|block| {
                block
                    .element
                    .is_some_and(|id| network.element(id).name == "R1")
            })
            .expect("it stays as a factor");
        assert_eq!(across.choices.len(), 1);
        assert!(across.choices[0].current.is_empty());
    }
}
