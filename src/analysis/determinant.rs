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
        let order = order(&assembly.blocks, assembly.nodes);
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
        let slots = self
            .slots
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
            .collect::<Result<Vec<_>, _>>()?;
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
        let slots = self
            .slots
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
            .collect::<Result<Vec<_>, _>>()?;
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

fn is_one(weight: &Weight) -> bool {
    weight.number.is_one()
        && weight
            .atoms
            .iter()
            .all(|atom| !matches!(atom, Atom::S | Atom::Above(_) | Atom::Below(_)))
}
