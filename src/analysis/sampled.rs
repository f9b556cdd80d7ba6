//! The determinant of a network as values modulo a prime, where a diagram would be too wide.
//!
//! The blocks are stamped into one matrix: nodes first, then branches whose currents stay unknown. A
//! block with weight d of its empty option adds d⁻¹·W(a, b) between the ends of its edges a and b and
//! multiplies the determinant by d. A block that must be taken keeps one unknown: its options of one
//! edge form a matrix of rank one, a column and a row of the border. So every value is the sum over
//! common spanning trees that the diagram holds, sign included. Values at enough points of s give the
//! polynomial.

use std::collections::BTreeMap;

use crate::algebra::elimination::{LANES, Lane, Plan};
use crate::algebra::univariate::Univariate;
use crate::algebra::{PrimeField, UnivariateRing};
use crate::analysis::assembly::Assembly;
use crate::analysis::block::{Atom, Block, Edge, Slot, Weight};
use crate::analysis::determinant::slot_values;
use crate::analysis::point::Point;
use crate::budget::{Budget, Exceeded};

/// A determinant that is evaluated by elimination.
#[derive(Clone, Debug)]
pub(crate) struct Sampled {
    blocks: Vec<Block>,
    slots: Vec<Slot>,
    size: usize,
    /// Where entries stand.
    places: Vec<(u32, u32)>,
    /// What is added to them.
    stamps: Vec<Stamp>,
}

/// A weight's share of an entry.
#[derive(Clone, Copy, Debug)]
struct Stamp {
    place: u32,
    negative: bool,
    share: Share,
}

/// What a stamp takes from its block.
#[derive(Clone, Copy, Debug)]
enum Share {
    /// Weight of an option over the weight of the empty option.
    Over { block: usize, choice: usize },
    /// Weight of an option.
    Whole { block: usize, choice: usize },
    /// Weight of an option over that of the block's first.
    First { block: usize, choice: usize },
    /// 1.
    One,
}

/// Multiplications for each state that the budget allows.
const WORK: usize = 2000;

/// Entries of a matrix with 16 lanes each; 8 bytes a lane.
const MOST_ENTRIES: usize = 4_000_000;

/// Builds the matrix of a network.
struct Stamping {
    size: u32,
    numbers: BTreeMap<(u32, u32), u32>,
    stamps: Vec<Stamp>,
}

impl Stamping {
    fn add(&mut self, row: u32, column: u32, negative: bool, share: Share) {
        let next = u32::try_from(self.numbers.len()).unwrap_or(u32::MAX);
        let place = *self.numbers.entry((row, column)).or_insert(next);
        self.stamps.push(Stamp {
            place,
            negative,
            share,
        });
    }

    /// An edge of the current graph as a column.
    fn column(&mut self, edge: Edge, column: u32, share: Share) {
        for (node, negative) in [(edge.0, false), (edge.1, true)] {
            if node != 0 {
                self.add(node - 1, column, negative, share);
            }
        }
    }

    /// The negative of an edge of the voltage graph as a row.
    fn row(&mut self, edge: Edge, row: u32, share: Share) {
        for (node, negative) in [(edge.0, true), (edge.1, false)] {
            if node != 0 {
                self.add(row, node - 1, negative, share);
            }
        }
    }

    fn border(&mut self) -> u32 {
        self.size += 1;
        self.size - 1
    }

    /// `None` for a block that cannot be stamped.
    fn block(&mut self, index: usize, block: &Block) -> Option<()> {
        let single = |choice: &usize| block.choices[*choice].current.len() == 1;
        let choices = 0..block.choices.len();
        if block.choices.iter().any(|choice| choice.current.is_empty()) {
            for choice in choices.filter(single) {
                let taken = &block.choices[choice];
                let (current, voltage) = (
                    block.current[taken.current[0]],
                    block.voltage[taken.voltage[0]],
                );
                let share = Share::Over {
                    block: index,
                    choice,
                };
                for (from, minus) in [(current.0, false), (current.1, true)] {
                    for (at, back) in [(voltage.0, false), (voltage.1, true)] {
                        if from != 0 && at != 0 {
                            self.add(from - 1, at - 1, minus ^ back, share);
                        }
                    }
                }
            }
            return Some(());
        }
        if block.choices.iter().all(|choice| choice.current.len() == 1) {
            let border = self.border();
            let first = block.choices.first()?;
            let (a, b) = (first.current[0], first.voltage[0]);
            for (choice, taken) in block.choices.iter().enumerate() {
                if taken.voltage[0] == b {
                    let share = Share::Whole {
                        block: index,
                        choice,
                    };
                    self.column(block.current[taken.current[0]], border, share);
                }
                if taken.current[0] == a {
                    let share = Share::First {
                        block: index,
                        choice,
                    };
                    self.row(block.voltage[taken.voltage[0]], border, share);
                }
            }
            return Some(());
        }
        // A meter that carries its current to a node: K = [0 0; 1 0], P = 1.
        let is_meter = block.choices.len() == 2
            && block.choices[0].current == [0, 1]
            && block.choices[1].current == [1]
            && block.choices[1].voltage == [0];
        if !is_meter {
            return None;
        }
        let (own, carrier) = (self.border(), self.border());
        for (border, edge) in [(own, 0), (carrier, 1)] {
            self.column(block.current[edge], border, Share::One);
            self.row(block.voltage[edge], border, Share::One);
        }
        self.add(carrier, own, false, Share::One);
        Some(())
    }
}

impl Sampled {
    /// The matrix of a network; `Ok(None)` when its determinant is zero for all values.
    pub(crate) fn build(assembly: Assembly, budget: &Budget) -> Result<Option<Self>, Exceeded> {
        let limit = budget.limits().states;
        let too_wide = Exceeded::States(limit);
        let mut stamping = Stamping {
            size: assembly.nodes - 1,
            numbers: BTreeMap::new(),
            stamps: Vec::new(),
        };
        for (index, block) in assembly.blocks.iter().enumerate() {
            stamping.block(index, block).ok_or(too_wide)?;
        }
        let mut places = vec![(0, 0); stamping.numbers.len()];
        for (place, number) in stamping.numbers {
            places[number as usize] = place;
        }
        let built = Self {
            blocks: assembly.blocks,
            slots: assembly.slots,
            size: stamping.size as usize,
            places,
            stamps: stamping.stamps,
        };
        // Independent values: what vanishes here vanishes for all values.
        let field = PrimeField::default_prime();
        for seed in 1..=2_u64 {
            let value = |slot: usize, side: u64| {
                let number = (slot as u64 * 2 + side).wrapping_add(seed << 40);
                // Powers with irregular exponents: no product of values is another's.
                field.pow(
                    3,
                    number.wrapping_mul(0x9E37_79B9_7F4A_7C15) ^ (number << 17),
                )
            };
            let slots: Vec<(u64, u64)> = (0..built.slots.len())
                .map(|slot| (value(slot, 0), value(slot, 1)))
                .collect();
            let Some(at) = built.at(&field, &slots, field.pow(5, seed + 77)) else {
                continue;
            };
            if let Some(plan) = Plan::new(&field, built.size, &built.places, &at.entries) {
                let points = built.slots.len() + built.blocks.len();
                let work = plan.cost().saturating_mul(points);
                if work > limit.saturating_mul(WORK) || plan.entries() > MOST_ENTRIES {
                    return Err(too_wide);
                }
                return Ok(Some(built));
            }
        }
        Ok(None)
    }

    /// The symbols its values are made of.
    pub(crate) fn slots(&self) -> &[Slot] {
        &self.slots
    }

    /// The entries and the factor outside at one s; `None` where an empty option weighs nothing.
    fn at(&self, field: &PrimeField, slots: &[(u64, u64)], s: u64) -> Option<Entries> {
        let weigh = |weight: &Weight| match weight.value(field, slots, &s) {
            Ok(value) => value,
            Err(never) => match never {},
        };
        let mut factor = 1;
        let mut weights: Vec<Vec<u64>> = Vec::with_capacity(self.blocks.len());
        let mut divisors = Vec::with_capacity(self.blocks.len());
        for block in &self.blocks {
            let own: Vec<u64> = block.choices.iter().map(|it| weigh(&it.weight)).collect();
            let empty = block.choices.iter().position(|it| it.current.is_empty());
            let divisor = own.get(empty.unwrap_or(0)).copied().unwrap_or(1);
            divisors.push(divisor);
            if empty.is_some() {
                factor = field.mul(factor, divisor);
            }
            weights.push(own);
        }
        let inverses = field.inverses(&divisors)?;
        let mut entries = vec![0; self.places.len()];
        for stamp in &self.stamps {
            let value = match stamp.share {
                Share::Over { block, choice } | Share::First { block, choice } => {
                    field.mul(weights[block][choice], inverses[block])
                }
                Share::Whole { block, choice } => weights[block][choice],
                Share::One => 1,
            };
            let entry = &mut entries[stamp.place as usize];
            *entry = if stamp.negative {
                field.sub(*entry, value)
            } else {
                field.add(*entry, value)
            };
        }
        Some(Entries { entries, factor })
    }

    /// The determinant as a polynomial in s at a point.
    pub(crate) fn value(&self, field: &PrimeField, point: &Point) -> Univariate {
        let ring = UnivariateRing { field: *field };
        let slots = match slot_values(&self.slots, &ring, point) {
            Ok(slots) => slots,
            Err(never) => match never {},
        };
        let wanted = self.degree(&slots) + 1;
        let mut candidates = (1_u64..).map(|step| field.pow(7, step));
        let mut next = || {
            let s = candidates.next()?;
            let at = |side: &Univariate| side.evaluate(s, field);
            let slots: Vec<(u64, u64)> = slots.iter().map(|(a, b)| (at(a), at(b))).collect();
            Some((s, self.at(field, &slots, s)?))
        };
        let mut plan = None;
        let mut found: Vec<(u64, u64)> = Vec::with_capacity(wanted);
        // A point is lost with a probability of about the degree over 2^61.
        for batch in 0..2 * wanted.div_ceil(LANES) + 3 {
            if batch == 3 && plan.is_none() {
                break;
            }
            let batch: Vec<(u64, Entries)> = (0..LANES).filter_map(|_| next()).collect();
            let Some((_, first)) = batch.first() else {
                continue;
            };
            if plan.is_none() {
                plan = Plan::new(field, self.size, &self.places, &first.entries);
            }
            let Some(plan) = &plan else { continue };
            let mut values: Vec<Lane> = vec![[0; LANES]; plan.entries()];
            for (lane, (_, at)) in batch.iter().enumerate() {
                for (value, entry) in values.iter_mut().zip(&at.entries) {
                    value[lane] = *entry;
                }
            }
            let determinants = plan.determinants(field, &mut values);
            for ((s, at), determinant) in batch.iter().zip(determinants) {
                if let Some(determinant) = determinant {
                    found.push((*s, field.mul(determinant, at.factor)));
                }
            }
            if found.len() >= wanted {
                found.truncate(wanted);
                return Univariate::interpolate(&found, field);
            }
        }
        // No pivots at three points.
        Univariate::zero()
    }

    /// A bound of the degree in s.
    fn degree(&self, slots: &[(Univariate, Univariate)]) -> usize {
        let degree = |side: &Univariate| side.degree().unwrap_or(0);
        let of = |weight: &Weight| -> usize {
            let atoms = weight.atoms.iter();
            atoms
                .map(|atom| match atom {
                    Atom::Above(slot) => degree(&slots[*slot].0),
                    Atom::Below(slot) => degree(&slots[*slot].1),
                    Atom::S => 1,
                })
                .sum()
        };
        let most = |block: &Block| block.choices.iter().map(|it| of(&it.weight)).max();
        self.blocks.iter().filter_map(most).sum()
    }
}

/// A matrix at one value of s.
struct Entries {
    entries: Vec<u64>,
    factor: u64,
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::analysis::assembly::assemble;
    use crate::analysis::determinant::Determinant;
    use crate::analysis::point::Choice;
    use crate::analysis::setup::{Frame, Insertion};
    use crate::network::Port;
    use crate::network::scatter::{Dice, active};

    #[test]
    fn values_are_those_of_the_diagram_sign_included() {
        let mut dice = Dice(97);
        let field = PrimeField::default_prime();
        let ring = UnivariateRing { field };
        let budget = Budget::unlimited();
        let (mut zero, mut other) = (0, 0);
        for round in 0..600_u64 {
            let network = active(&mut dice).finish();
            let ports: Vec<Port> = network.elements().filter_map(|(_, it)| it.port()).collect();
            let mut insertions = vec![Insertion::None];
            insertions.extend(ports.first().map(|&port| Insertion::Short(port)));
            let quiet = network
                .elements()
                .map(|(id, _)| id)
                .last()
                .into_iter()
                .collect();
            insertions.push(Insertion::Quiet(quiet));
            for insertion in &insertions {
                let frame = Frame::default();
                let diagram = Determinant::build(&network, &frame, insertion, &budget);
                let diagram = diagram.expect("no budget").ok();
                let assembly = assemble(&network, &frame, insertion);
                let sampled = Sampled::build(assembly, &budget).expect("no budget");
                let choice = Choice {
                    seed: round,
                    shift: 0,
                    released: &|_| false,
                    salt: None,
                };
                let Some(point) = Point::new(&network, &field, &choice) else {
                    continue;
                };
                let expected = match &diagram {
                    Some(diagram) => match diagram.value(&ring, &point) {
                        Ok(value) => value,
                        Err(never) => match never {},
                    },
                    None => Univariate::zero(),
                };
                let found = match &sampled {
                    Some(sampled) => sampled.value(&field, &point),
                    None => Univariate::zero(),
                };
                assert_eq!(found, expected, "round {round}, {insertion:?}");
                if found.is_zero() {
                    zero += 1;
                } else {
                    other += 1;
                }
            }
        }
        assert!(zero > 20 && other > 200, "{zero} {other}");
    }
}
