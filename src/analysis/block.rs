//! Parts as blocks (K, P): which sets of current edges and voltage edges a part can give to a pair of
//! common spanning trees, and with which weight.
//!
//! A part with branches (current edges, currents i) and voltage edges (voltages u) obeys K·i = P·u.
//! For sets α of its branches and β of its voltage edges of one size its option weighs
//! det(K with its columns α replaced by the columns β of P).

use crate::algebra::{Integer, Polynomial, Rational, Ring};
use crate::network::{ElementId, Value};

/// Ends of an edge; node 0 is the reference.
pub(crate) type Edge = (u32, u32);

/// Something a weight is made of, with numerator and denominator.
#[derive(Clone, Debug, PartialEq)]
pub(crate) enum Slot {
    /// A value of the network.
    Value(Value),
    /// A polynomial in the network's symbols (coefficient of a response).
    Polynomial(Polynomial),
    /// Mutual inductance of a coupling, by its index.
    Mutual(usize),
}

/// A factor of a weight.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Atom {
    /// Numerator of a slot.
    Above(usize),
    /// Denominator of a slot.
    Below(usize),
    /// The complex frequency.
    S,
}

/// A product of atoms with an integer.
#[derive(Clone, Debug)]
pub(crate) struct Weight {
    /// Integer factor, not zero.
    pub(crate) number: Integer,
    /// Atoms.
    pub(crate) atoms: Vec<Atom>,
}

impl Weight {
    /// A product of atoms.
    pub(crate) fn of(atoms: impl IntoIterator<Item = Atom>) -> Self {
        Self {
            number: Integer::one(),
            atoms: atoms.into_iter().collect(),
        }
    }

    /// An integer times it.
    pub(crate) fn times(mut self, number: &Integer) -> Self {
        self.number *= number;
        self
    }

    /// The negative.
    pub(crate) fn negated(self) -> Self {
        self.times(&Integer::from(-1))
    }

    /// The value in a ring.
    pub(crate) fn value<R: Ring>(
        &self,
        ring: &R,
        slots: &[(R::Element, R::Element)],
        s: &R::Element,
    ) -> Result<R::Element, R::Error> {
        let mut product = if self.number.is_one() {
            ring.one()
        } else {
            ring.integer(&self.number)
        };
        for atom in &self.atoms {
            product = match atom {
                Atom::Above(slot) => ring.mul(&product, &slots[*slot].0)?,
                Atom::Below(slot) => ring.mul(&product, &slots[*slot].1)?,
                Atom::S => ring.mul(&product, s)?,
            };
        }
        Ok(product)
    }
}

/// One way a part takes part.
#[derive(Clone, Debug)]
pub(crate) struct Choice {
    /// Indices of current edges, ascending.
    pub(crate) current: Vec<usize>,
    /// Indices of voltage edges, ascending, as many.
    pub(crate) voltage: Vec<usize>,
    /// Its weight.
    pub(crate) weight: Weight,
    /// Sign gathered by contraction.
    pub(crate) negative: bool,
}

/// A part as edges and choices.
#[derive(Clone, Debug)]
pub(crate) struct Block {
    /// The part, if one stands behind it.
    pub(crate) element: Option<ElementId>,
    /// Current edges.
    pub(crate) current: Vec<Edge>,
    /// Voltage edges.
    pub(crate) voltage: Vec<Edge>,
    /// Its options.
    pub(crate) choices: Vec<Choice>,
}

impl Block {
    /// A block without choices.
    pub(crate) fn new(
        element: Option<ElementId>,
        current: impl Into<Vec<Edge>>,
        voltage: impl Into<Vec<Edge>>,
    ) -> Self {
        Self {
            element,
            current: current.into(),
            voltage: voltage.into(),
            choices: Vec::new(),
        }
    }

    /// Adds a choice.
    pub(crate) fn choice(
        mut self,
        current: impl Into<Vec<usize>>,
        voltage: impl Into<Vec<usize>>,
        weight: Weight,
    ) -> Self {
        self.choices.push(Choice {
            current: current.into(),
            voltage: voltage.into(),
            weight,
            negative: false,
        });
        self
    }

    /// A connection: one edge, always taken.
    pub(crate) fn join(element: Option<ElementId>, edge: Edge) -> Self {
        Self::new(element, [edge], [edge]).choice([0], [0], Weight::of([]))
    }
}

/// A term of a source: `factor · slot · voltage of an edge`, times s where `rate` says so.
#[derive(Clone, Debug)]
pub(crate) struct Term {
    /// Exact factor.
    pub(crate) factor: Rational,
    /// Coefficient.
    pub(crate) slot: usize,
    /// Sensed voltage.
    pub(crate) edge: Edge,
    /// Times s.
    pub(crate) rate: bool,
    /// Kept in this determinant; a dropped term still clears its denominator.
    pub(crate) alive: bool,
    /// Set by the source's relation: all such terms have one common denominator.
    pub(crate) shared: bool,
}

/// A source as a row: every denominator of its terms cleared, those of one relation once.
pub(crate) fn source(
    element: Option<ElementId>,
    is_voltage: bool,
    edge: Edge,
    terms: &[Term],
) -> Block {
    let own = if is_voltage { vec![edge] } else { Vec::new() };
    let mut voltage = own.clone();
    voltage.extend(terms.iter().map(|term| term.edge));
    let mut block = Block::new(element, [edge], voltage);
    let others = |skip: Option<usize>| {
        let mut weight = Weight::of([]);
        let mut cleared = skip.is_some_and(|index| terms[index].shared);
        for (index, term) in terms.iter().enumerate() {
            if Some(index) == skip {
                continue;
            }
            if !term.shared || !cleared {
                weight.atoms.push(Atom::Below(term.slot));
            }
            cleared |= term.shared;
            weight.number *= term.factor.denominator();
        }
        weight
    };
    block = if is_voltage {
        block.choice([0], [0], others(None))
    } else {
        block.choice([], [], others(None))
    };
    for (index, term) in terms.iter().enumerate() {
        if !term.alive || term.factor.is_zero() {
            continue;
        }
        let mut weight = others(Some(index)).times(term.factor.numerator());
        weight.atoms.push(Atom::Above(term.slot));
        if term.rate {
            weight.atoms.push(Atom::S);
        }
        if is_voltage {
            weight = weight.negated();
        }
        block = block.choice([0], [index + own.len()], weight);
    }
    block
}
