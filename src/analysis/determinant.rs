//! The determinant of a network, as a structure that is built once and evaluated over any ring.

use crate::algebra::{Integer, Polynomial, Ring, Symbol, SymbolTable};
use crate::analysis::assembly::assemble;
use crate::analysis::block::{Atom, Block, Slot, Weight};
use crate::analysis::contraction::{Singular, SingularKind, contract};
use crate::analysis::diagram::Diagram;
use crate::analysis::ordering::order;
use crate::analysis::setup::{Frame, Insertion};
use crate::budget::{Budget, Exceeded};
use crate::network::{Network, Value};

/// Cost of an order of parts from which on no diagram is begun: a frontier of some 15 nodes in each
/// graph.
const HOPELESS: u64 = 1 << 32;

/// A determinant before any value is put in.
#[derive(Clone, Debug)]
pub struct Determinant {
    blocks: Vec<Block>,
    slots: Vec<Slot>,
    diagram: Diagram,
}

/// What a layer of values has to answer.
pub trait Values<R: Ring> {
    /// Numerator and denominator of a symbol's value.
    ///
    /// # Errors
    /// When a budget is reached.
    fn symbol(&self, symbol: Symbol) -> Result<(R::Element, R::Element), R::Error>;
    /// Numerator and denominator of the mutual inductance of a coupling that is given by its factor.
    ///
    /// # Errors
    /// When a budget is reached.
    fn mutual(&self, coupling: usize) -> Result<(R::Element, R::Element), R::Error>;
    /// The complex frequency.
    fn s(&self) -> R::Element;
    /// A polynomial in the network's symbols.
    ///
    /// # Errors
    /// When a budget is reached.
    fn polynomial(&self, polynomial: &Polynomial) -> Result<(R::Element, R::Element), R::Error>;
}

/// Numerators and denominators over a ring.
type Slots<R> = Vec<(<R as Ring>::Element, <R as Ring>::Element)>;

impl Determinant {
    /// Builds the structure; the inner error says that there is no unique solution whatever the values.
    ///
    /// # Errors
    /// When the diagram exceeds its budget of states.
    pub fn build(
        network: &Network,
        frame: &Frame,
        insertion: &Insertion,
        budget: &Budget,
    ) -> Result<Result<Self, Singular>, Exceeded> {
        let mut assembly = assemble(network, frame, insertion);
        if let Err(singular) = contract(&mut assembly) {
            return Ok(Err(singular));
        }
        let (order, cost) = order(&assembly.blocks, assembly.nodes);
        let blocks = assembly.blocks.len() as u64;
        if cost > HOPELESS.min(budget.width().saturating_mul(blocks)) {
            return Err(Exceeded::States(budget.limits().states));
        }
        let diagram = Diagram::build(&assembly.blocks, &order, assembly.nodes, budget)?;
        Ok(match diagram {
            Some(diagram) => Ok(Self {
                blocks: assembly.blocks,
                slots: assembly.slots,
                diagram,
            }),
            None => Err(Singular {
                elements: Vec::new(),
                kind: SingularKind::NoTree,
            }),
        })
    }

    /// What its weights are made of.
    pub(crate) fn slots(&self) -> &[Slot] {
        &self.slots
    }

    /// States of the diagram.
    #[must_use]
    pub fn states(&self) -> usize {
        self.diagram.states()
    }

    /// The determinant over a ring.
    ///
    /// Cost: one multiplication and one addition in the ring for each arc of the diagram.
    ///
    /// # Errors
    /// When the ring's budget is reached.
    pub fn value<R: Ring>(&self, ring: &R, values: &dyn Values<R>) -> Result<R::Element, R::Error> {
        let slots = slot_values(&self.slots, ring, values)?;
        let s = values.s();
        let mut states = vec![ring.one()];
        for layer in &self.diagram.layers {
            let choices = &self.blocks[layer.block].choices;
            let weights = choices
                .iter()
                .map(|choice| choice.weight.value(ring, &slots, &s))
                .collect::<Result<Vec<_>, _>>()?;
            let plain: Vec<bool> = choices
                .iter()
                .map(|choice| is_one(&choice.weight))
                .collect();
            let mut next = vec![ring.zero(); layer.states];
            for arc in &layer.arcs {
                let before = &states[arc.from as usize];
                let choice = arc.choice as usize;
                if ring.is_zero(before) || ring.is_zero(&weights[choice]) {
                    continue;
                }
                let mut term = if plain[choice] {
                    before.clone()
                } else {
                    ring.mul(before, &weights[choice])?
                };
                if arc.negative {
                    term = ring.neg(&term);
                }
                let target = &mut next[arc.to as usize];
                *target = if ring.is_zero(target) {
                    term
                } else {
                    ring.add(target, &term)?
                };
            }
            ring.room(&next)?;
            states = next;
        }
        let value = states.into_iter().next().unwrap_or_else(|| ring.zero());
        Ok(if self.diagram.negative {
            ring.neg(&value)
        } else {
            value
        })
    }

    /// Number of terms of the expanded determinant before like terms are gathered.
    #[must_use]
    pub fn term_count(&self) -> Integer {
        let mut states = vec![Integer::one()];
        for layer in &self.diagram.layers {
            let mut next = vec![Integer::zero(); layer.states];
            for arc in &layer.arcs {
                next[arc.to as usize] += &states[arc.from as usize];
            }
            states = next;
        }
        states.into_iter().next().unwrap_or_default()
    }

    /// Terms that stay apart when like terms are gathered, where no two sets of choices can give one
    /// monomial: every value stands in one part, and the options of a part weigh differently.
    /// Relations must not tie values; `None` where that cannot be told.
    #[must_use]
    pub fn distinct_terms(&self) -> Option<Integer> {
        let mut owner = vec![None; self.slots.len()];
        for (index, block) in self.blocks.iter().enumerate() {
            let mut weights: Vec<Vec<Atom>> = Vec::with_capacity(block.choices.len());
            for choice in &block.choices {
                let mut symbols = Vec::new();
                for &atom in &choice.weight.atoms {
                    let Atom::Above(slot) = atom else { continue };
                    if !matches!(self.slots[slot], Slot::Value(Value::Symbol(_))) {
                        continue;
                    }
                    if *owner[slot].get_or_insert(index) != index {
                        return None;
                    }
                    symbols.push(atom);
                }
                if weights.contains(&symbols) {
                    return None;
                }
                weights.push(symbols);
            }
        }
        Some(self.term_count())
    }

    /// The determinant by shared sub-expressions: definitions in order, then the value.
    ///
    /// `value` gives each symbol's numerator and denominator.
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn nested(
        &self,
        ring: &crate::algebra::PolynomialRing<'_>,
        values: &dyn for<'b> Values<crate::algebra::PolynomialRing<'b>>,
        table: &mut SymbolTable,
        definitions: &mut Vec<(Symbol, Polynomial)>,
    ) -> Result<Polynomial, Exceeded> {
        let slots = slot_values(&self.slots, ring, values)?;
        let s = Polynomial::symbol(Symbol::S);
        let mut states = vec![Polynomial::one()];
        for layer in &self.diagram.layers {
            let mut next = vec![Polynomial::zero(); layer.states];
            for arc in &layer.arcs {
                let choice = &self.blocks[layer.block].choices[arc.choice as usize];
                let weight = choice.weight.value(ring, &slots, &s)?;
                let term = ring.mul(&states[arc.from as usize], &weight)?;
                let term = if arc.negative { -term } else { term };
                next[arc.to as usize] = ring.add(&next[arc.to as usize], &term)?;
            }
            for state in &mut next {
                if state.len() > 1 && layer.states > 0 {
                    let symbol = table.fresh("t");
                    definitions.push((symbol, std::mem::take(state)));
                    *state = Polynomial::symbol(symbol);
                }
            }
            states = next;
        }
        let value = states.into_iter().next().unwrap_or_default();
        Ok(if self.diagram.negative { -value } else { value })
    }
}

/// Numerator and denominator of every slot.
pub(crate) fn slot_values<R: Ring>(
    slots: &[Slot],
    ring: &R,
    values: &dyn Values<R>,
) -> Result<Slots<R>, R::Error> {
    slots
        .iter()
        .map(|slot| match slot {
            Slot::Value(Value::Symbol(symbol)) => values.symbol(*symbol),
            Slot::Value(Value::Number(number)) => Ok((
                ring.integer(number.numerator()),
                ring.integer(number.denominator()),
            )),
            Slot::Polynomial(polynomial) => values.polynomial(polynomial),
            Slot::Mutual(coupling) => values.mutual(*coupling),
        })
        .collect()
}

/// The symbols that slots are made of.
pub(crate) fn slot_symbols(slots: &[Slot]) -> Vec<Symbol> {
    slots
        .iter()
        .flat_map(|slot| match slot {
            Slot::Value(Value::Symbol(symbol)) => vec![*symbol],
            Slot::Value(Value::Number(_)) | Slot::Mutual(_) => Vec::new(),
            Slot::Polynomial(polynomial) => polynomial.symbols(),
        })
        .collect()
}

fn is_one(weight: &Weight) -> bool {
    weight.number.is_one()
        && weight
            .atoms
            .iter()
            .all(|atom| !matches!(atom, Atom::S | Atom::Above(_) | Atom::Below(_)))
}

#[cfg(test)]
mod tests {
    use std::convert::Infallible;

    use super::*;
    use crate::algebra::{PolynomialRing, PrimeField};
    use crate::diagnostic::Diagnostic;
    use crate::network::check;
    use crate::network::oracle::{degrees, value_of};
    use crate::network::scatter::{Dice, active};
    use crate::network::sketch::Sketch;

    /// Every symbol stands for itself.
    struct Plain;

    impl Values<PolynomialRing<'_>> for Plain {
        fn symbol(&self, symbol: Symbol) -> Result<(Polynomial, Polynomial), Exceeded> {
            Ok((Polynomial::symbol(symbol), Polynomial::one()))
        }

        fn mutual(&self, _: usize) -> Result<(Polynomial, Polynomial), Exceeded> {
            Ok((Polynomial::zero(), Polynomial::one()))
        }

        fn s(&self) -> Polynomial {
            Polynomial::symbol(Symbol::S)
        }

        fn polynomial(
            &self,
            polynomial: &Polynomial,
        ) -> Result<(Polynomial, Polynomial), Exceeded> {
            Ok((polynomial.clone(), Polynomial::one()))
        }
    }

    /// Numbers modulo a prime, by name.
    struct Numbers<'a>(&'a Network);

    impl Values<PrimeField> for Numbers<'_> {
        fn symbol(&self, symbol: Symbol) -> Result<(u64, u64), Infallible> {
            Ok((value_of(self.0.symbols().name(symbol), 7) % (1 << 60), 1))
        }

        fn mutual(&self, _: usize) -> Result<(u64, u64), Infallible> {
            Ok((0, 1))
        }

        fn s(&self) -> u64 {
            12_345
        }

        fn polynomial(&self, _: &Polynomial) -> Result<(u64, u64), Infallible> {
            Ok((1, 1))
        }
    }

    fn determinant(network: &Network) -> Determinant {
        Determinant::build(
            network,
            &Frame::default(),
            &Insertion::None,
            &Budget::unlimited(),
        )
        .expect("no budget")
        .expect("a tree")
    }

    #[test]
    fn complete_graphs_have_as_many_trees_as_cayley_says() {
        // source: Cayley's formula n^(n−2) for the number of spanning trees of a complete graph
        for nodes in 2..7_usize {
            let mut parts = String::new();
            for a in 0..nodes {
                for b in a + 1..nodes {
                    let from = if a == 0 {
                        "ground".to_owned()
                    } else {
                        format!("n{a}")
                    };
                    parts.push_str(&format!("R{a}x{b} {from} n{b};"));
                }
            }
            let network = Sketch::of(&parts).finish();
            let exponent = u32::try_from(nodes - 2).expect("small");
            let expected = Integer::from(nodes).pow(exponent);
            assert_eq!(
                determinant(&network).term_count(),
                expected,
                "{nodes} nodes"
            );
        }
    }

    #[test]
    fn ladders_count_by_fibonacci_numbers() {
        // n sections of a series and a shunt part: trees of the fan, the Fibonacci number F(2n).
        let mut parts = String::new();
        let (mut before, mut last) = (0_u64, 1_u64);
        for section in 1..12 {
            let from = if section == 1 {
                "ground".to_owned()
            } else {
                format!("n{}", section - 1)
            };
            parts.push_str(&format!(
                "R{section} {from} n{section}; C{section} n{section} ground;"
            ));
            (before, last) = (before + last, before + 2 * last);
            let count = determinant(&Sketch::of(&parts).finish()).term_count();
            assert_eq!(count, Integer::from(last), "{section} sections");
        }
    }

    #[test]
    fn a_divider_is_written_as_it_should_be() {
        let network = Sketch::of("Vs in ground; R1 in out; C1 out ground").finish();
        let budget = Budget::unlimited();
        let ring = PolynomialRing { budget: &budget };
        let value = determinant(&network)
            .value(&ring, &Plain)
            .expect("no budget");
        let find = |name: &str| Polynomial::symbol(network.symbols().find(name).expect("known"));
        let (r, c, s) = (find("R1"), find("C1"), Polynomial::symbol(Symbol::S));
        let expected = &Polynomial::one() + &(&(&r * &c) * &s);
        assert!(value == expected || value == -expected);
    }

    #[test]
    fn nested_definitions_expand_to_the_determinant() {
        let mut parts = String::from("Vs n0 ground;");
        for section in 1..6 {
            let before = section - 1;
            parts.push_str(&format!(
                "R{section} n{before} n{section}; C{section} n{section} ground;"
            ));
        }
        let network = Sketch::of(&parts).finish();
        let budget = Budget::unlimited();
        let ring = PolynomialRing { budget: &budget };
        let built = determinant(&network);
        let mut table = network.symbols().clone();
        let mut definitions = Vec::new();
        let mut value = built
            .nested(&ring, &Plain, &mut table, &mut definitions)
            .expect("no budget");
        for (symbol, definition) in definitions.iter().rev() {
            value = value.substitute(*symbol, definition);
        }
        assert_eq!(value, built.value(&ring, &Plain).expect("no budget"));
    }

    #[test]
    fn random_active_networks_vanish_where_the_equations_do() {
        let mut dice = Dice(41);
        let (mut solvable, mut singular) = (0, 0);
        for round in 0..400 {
            let network = active(&mut dice).finish();
            let expected = degrees(&network, &[], 7).is_some();
            let built = Determinant::build(
                &network,
                &Frame::default(),
                &Insertion::None,
                &Budget::unlimited(),
            )
            .expect("no budget");
            let found = built.is_ok_and(|determinant| {
                let field = PrimeField::default_prime();
                match determinant.value(&field, &Numbers(&network)) {
                    Ok(value) => value != 0,
                    Err(never) => match never {},
                }
            });
            // Relations and couplings by factor are not what `Numbers` knows of.
            if network.relations().len() == 0 && network.couplings().is_empty() {
                // Islands float freely in a determinant; the wiring check refuses them.
                let floats = found && check::check(&network).iter().any(Diagnostic::is_error);
                assert!(found == expected || floats, "round {round}");
            }
            if found {
                solvable += 1;
            } else {
                singular += 1;
            }
        }
        assert!(solvable > 50 && singular > 5, "{solvable} {singular}");
    }
}
