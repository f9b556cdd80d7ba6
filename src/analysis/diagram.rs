//! All common spanning trees of the current graph and the voltage graph, as a layered diagram.
//!
//! Parts enter in a given order. A state says, for every vertex on the frontier, which row of the
//! remaining determinant it belongs to, for the current graph and for the voltage graph; row 0 is the
//! reference. Taking an edge expands both determinants along its column (Laplace).

use rustc_hash::FxHashMap;
use smallvec::SmallVec;

use crate::analysis::block::Block;
use crate::budget::{Budget, Exceeded};

type Classes = SmallVec<[u8; 24]>;

/// From a state of one layer to a state of the next by one choice of the layer's part.
#[derive(Clone, Copy, Debug)]
pub(crate) struct Arc {
    pub(crate) from: u32,
    pub(crate) to: u32,
    pub(crate) choice: u32,
    pub(crate) negative: bool,
}

/// The step over one part.
#[derive(Clone, Debug)]
pub(crate) struct Layer {
    /// The part.
    pub(crate) block: usize,
    /// Arcs sorted by target, then source.
    pub(crate) arcs: Vec<Arc>,
    /// States behind it.
    pub(crate) states: usize,
}

/// The diagram; one state before the first layer and, unless there is no tree, one behind the last.
#[derive(Clone, Debug)]
pub(crate) struct Diagram {
    pub(crate) layers: Vec<Layer>,
    /// Sign of the orders in which rows entered.
    pub(crate) negative: bool,
}

/// A graph's vertices as the sweep of the parts meets them.
struct Front {
    /// Parts still to come at each vertex.
    left: Vec<usize>,
    /// All parts at each vertex.
    all: Vec<usize>,
    /// Frontier, in order of entry.
    vertices: Vec<u32>,
    /// All vertices in order of entry.
    entered: Vec<u32>,
}

/// What happens to a frontier at one part.
struct Passage {
    /// Position of each vertex in the widened frontier.
    place: FxHashMap<u32, usize>,
    /// Vertices that enter.
    entering: usize,
    /// Which places stay.
    stays: Vec<bool>,
}

impl Front {
    fn new(nodes: u32, touched: &[Vec<u32>]) -> Self {
        let mut all = vec![0; nodes as usize];
        for vertices in touched {
            for &vertex in vertices {
                all[vertex as usize] += 1;
            }
        }
        Self {
            left: all.clone(),
            all,
            vertices: Vec::new(),
            entered: Vec::new(),
        }
    }

    fn pass(&mut self, touched: &[u32]) -> Passage {
        let before = self.vertices.len();
        for &vertex in touched {
            if self.left[vertex as usize] == self.all[vertex as usize] {
                self.vertices.push(vertex);
                self.entered.push(vertex);
            }
            self.left[vertex as usize] -= 1;
        }
        let place = self
            .vertices
            .iter()
            .enumerate()
            .map(|(place, &vertex)| (vertex, place))
            .collect();
        let stays: Vec<bool> = self
            .vertices
            .iter()
            .map(|&vertex| self.left[vertex as usize] > 0)
            .collect();
        let entering = self.vertices.len() - before;
        let mut keep = stays.iter();
        self.vertices
            .retain(|_| keep.next().copied().unwrap_or(false));
        Passage {
            place,
            entering,
            stays,
        }
    }

    /// Whether the order of entry is an odd permutation.
    fn is_odd(&self) -> bool {
        is_odd(&self.entered)
    }
}

/// Parity of a sequence of different numbers, by merge counting of inversions.
fn is_odd(sequence: &[u32]) -> bool {
    let mut sorted: Vec<u32> = sequence.to_vec();
    sorted.sort_unstable();
    let position: FxHashMap<u32, usize> = sorted
        .iter()
        .enumerate()
        .map(|(index, &value)| (value, index))
        .collect();
    let mut seen = vec![false; sequence.len()];
    let mut odd = false;
    for start in 0..sequence.len() {
        let mut at = start;
        let mut length = 0_usize;
        while !seen[at] {
            seen[at] = true;
            at = position[&sequence[at]];
            length += 1;
        }
        odd ^= length > 0 && length.is_multiple_of(2);
    }
    odd
}

/// Vertices of the edges that the choices of a block use; the reference left out.
fn touched(block: &Block, is_current: bool) -> Vec<u32> {
    let mut vertices = Vec::new();
    for choice in &block.choices {
        let (list, edges) = if is_current {
            (&choice.current, &block.current)
        } else {
            (&choice.voltage, &block.voltage)
        };
        for &index in list {
            vertices.extend([edges[index].0, edges[index].1]);
        }
    }
    vertices.retain(|&vertex| vertex != 0);
    vertices.sort_unstable();
    vertices.dedup();
    vertices
}

/// One graph's part of a transition: new classes and sign, or no tree.
fn step(
    classes: &[u8],
    edges: impl Iterator<Item = (u32, u32)>,
    passage: &Passage,
) -> Option<(Classes, bool)> {
    let mut work: Classes = classes.iter().copied().collect();
    let mut rows = work.iter().copied().max().unwrap_or(0);
    for _ in 0..passage.entering {
        rows = rows.checked_add(1)?;
        work.push(rows);
    }
    let mut negative = false;
    for (a, b) in edges {
        let class = |vertex: u32| {
            if vertex == 0 {
                0
            } else {
                work[passage.place[&vertex]]
            }
        };
        let (x, y) = (class(a), class(b));
        if x == y {
            return None;
        }
        let (high, low) = (x.max(y), x.min(y));
        negative ^= high % 2 == 0;
        negative ^= high == y;
        for entry in &mut work {
            if *entry == high {
                *entry = low;
            } else if *entry > high {
                *entry -= 1;
            }
        }
    }
    close(&work, &passage.stays, negative)
}

/// Drops the vertices that leave; a row that would be left without any is lost.
fn close(work: &[u8], stays: &[bool], mut negative: bool) -> Option<(Classes, bool)> {
    let rows = work.iter().copied().max().unwrap_or(0);
    let mut new_number = [0_u8; 256];
    let mut order: SmallVec<[u32; 24]> = SmallVec::new();
    let mut kept = Classes::new();
    for (&class, &stays) in work.iter().zip(stays) {
        if !stays {
            continue;
        }
        if class != 0 && new_number[class as usize] == 0 {
            order.push(u32::from(class));
            new_number[class as usize] = u8::try_from(order.len()).ok()?;
        }
        kept.push(new_number[class as usize]);
    }
    if order.len() != usize::from(rows) {
        return None;
    }
    negative ^= inversions_odd(&order);
    Some((kept, negative))
}

fn inversions_odd(order: &[u32]) -> bool {
    let mut odd = false;
    for (index, a) in order.iter().enumerate() {
        for b in &order[index + 1..] {
            odd ^= b < a;
        }
    }
    odd
}

impl Diagram {
    /// Builds the diagram; `Ok(None)` when there is no common tree.
    pub(crate) fn build(
        blocks: &[Block],
        order: &[usize],
        nodes: u32,
        budget: &Budget,
    ) -> Result<Option<Self>, Exceeded> {
        let touch = |is_current| -> Vec<Vec<u32>> {
            order
                .iter()
                .map(|&block| touched(&blocks[block], is_current))
                .collect()
        };
        let (current_touch, voltage_touch) = (touch(true), touch(false));
        let mut current = Front::new(nodes, &current_touch);
        let mut voltage = Front::new(nodes, &voltage_touch);
        if current.all[1..].contains(&0) || voltage.all[1..].contains(&0) {
            return Ok(None);
        }
        let mut states: Vec<(Classes, Classes)> = vec![(Classes::new(), Classes::new())];
        let mut layers = Vec::with_capacity(order.len());
        let mut total = 0_usize;
        for (at, &block) in order.iter().enumerate() {
            if at % 64 == 0 {
                budget.time()?;
            }
            let current_pass = current.pass(&current_touch[at]);
            let voltage_pass = voltage.pass(&voltage_touch[at]);
            let mut next: FxHashMap<(Classes, Classes), u32> = FxHashMap::default();
            let mut new_states = Vec::new();
            let mut arcs = Vec::new();
            for (from, (currents, voltages)) in states.iter().enumerate() {
                for (index, choice) in blocks[block].choices.iter().enumerate() {
                    let edges = choice.current.iter().map(|&e| blocks[block].current[e]);
                    let Some((left, left_negative)) = step(currents, edges, &current_pass) else {
                        continue;
                    };
                    let edges = choice.voltage.iter().map(|&e| blocks[block].voltage[e]);
                    let Some((right, right_negative)) = step(voltages, edges, &voltage_pass) else {
                        continue;
                    };
                    let key = (left, right);
                    let to = *next.entry(key.clone()).or_insert_with(|| {
                        new_states.push(key);
                        u32::try_from(new_states.len() - 1).unwrap_or(u32::MAX)
                    });
                    arcs.push(Arc {
                        from: u32::try_from(from).unwrap_or(u32::MAX),
                        to,
                        choice: u32::try_from(index).unwrap_or(u32::MAX),
                        negative: left_negative ^ right_negative ^ choice.negative,
                    });
                }
                budget.states(total + new_states.len())?;
            }
            total += new_states.len();
            if new_states.is_empty() {
                return Ok(None);
            }
            layers.push(Layer {
                block,
                arcs,
                states: new_states.len(),
            });
            states = new_states;
        }
        let mut diagram = Self {
            layers,
            negative: current.is_odd() ^ voltage.is_odd(),
        };
        diagram.drop_dead_states();
        Ok(Some(diagram))
    }

    /// Keeps only what leads to the end.
    fn drop_dead_states(&mut self) {
        let mut alive = vec![true];
        for layer in self.layers.iter_mut().rev() {
            let mut number = vec![u32::MAX; layer.states];
            let mut count = 0_u32;
            for (state, &is_alive) in alive.iter().enumerate() {
                if is_alive {
                    number[state] = count;
                    count += 1;
                }
            }
            alive.resize(layer.states, false);
            layer.arcs.retain(|arc| alive[arc.to as usize]);
            for arc in &mut layer.arcs {
                arc.to = number[arc.to as usize];
            }
            layer.states = count as usize;
            layer.arcs.sort_by_key(|arc| (arc.to, arc.from, arc.choice));
            let sources = layer
                .arcs
                .iter()
                .map(|arc| arc.from as usize + 1)
                .max()
                .unwrap_or(1);
            let mut before = vec![false; sources];
            for arc in &layer.arcs {
                before[arc.from as usize] = true;
            }
            alive = before;
        }
        self.renumber_sources();
    }

    /// Sources of a layer take the numbers their states got as targets of the layer before.
    fn renumber_sources(&mut self) {
        for index in 1..self.layers.len() {
            let mut used: Vec<u32> = self.layers[index].arcs.iter().map(|arc| arc.from).collect();
            used.sort_unstable();
            used.dedup();
            let number: FxHashMap<u32, u32> = used
                .iter()
                .enumerate()
                .map(|(new, &old)| (old, u32::try_from(new).unwrap_or(u32::MAX)))
                .collect();
            for arc in &mut self.layers[index].arcs {
                arc.from = number[&arc.from];
            }
        }
    }

    /// Number of states.
    pub(crate) fn states(&self) -> usize {
        self.layers.iter().map(|layer| layer.states).sum()
    }
}
