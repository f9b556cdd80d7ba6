//! The two graphs of a network: where currents flow, and where voltages are fixed or sensed.
//!
//! The determinant is a sum over edge sets that are spanning trees of both the current graph and
//! the voltage graph. What this file says of a part follows from that: its *current edges* carry
//! the currents that its equations add to the nodes, its *voltage edges* the voltages they name. An
//! edge is *forced* when every term of the determinant contains it. Independent sources count with
//! the value zero: a voltage source is a forced edge of both graphs, a current source of none.

use std::collections::BTreeSet;

use smallvec::SmallVec;

use crate::algebra::Rational;
use crate::network::element::{Control, Element, Kind, Port, Quantity, Sense, Source};
use crate::network::id::{ElementId, NodeId};
use crate::network::value::Value;

/// The edges of one part in one graph.
pub type Edges = SmallVec<[Port; 2]>;

impl Element {
    /// Terminal pairs between which the part conducts, independent current sources included.
    #[must_use]
    pub fn conducting(&self) -> Edges {
        match &self.kind {
            Kind::Amplifier { output, .. } | Kind::Nullor { output, .. } => one(*output),
            Kind::Conveyor {
                x, z, reference, ..
            } => two(port(*x, *reference), port(*z, *reference)),
            Kind::Transformer {
                primary, secondary, ..
            }
            | Kind::Gyrator {
                primary, secondary, ..
            } => two(*primary, *secondary),
            Kind::Resistor(..)
            | Kind::Conductance(..)
            | Kind::Capacitor(..)
            | Kind::Inductor(..)
            | Kind::Impedance(..)
            | Kind::Admittance(..)
            | Kind::Meter(_)
            | Kind::Source(_) => self.port().map(one).unwrap_or_default(),
        }
    }

    /// Edges in the current graph: [`conducting`](Self::conducting) without independent current
    /// sources.
    #[must_use]
    pub fn current_edges(&self) -> Edges {
        if self.is_current_source() {
            return Edges::new();
        }
        self.conducting()
    }

    /// Edges in the voltage graph.
    #[must_use]
    pub fn voltage_edges(&self) -> Edges {
        match &self.kind {
            Kind::Source(source) => source_voltage_edges(source),
            Kind::Amplifier {
                input,
                output,
                gain,
                ..
            } => match gain {
                None => one(*input),
                Some(gain) if is_zero(gain) => one(*output),
                Some(_) => two(*output, *input),
            },
            Kind::Nullor { input, .. } => one(*input),
            Kind::Conveyor { x, y, .. } => one(port(*x, *y)),
            Kind::Resistor(..)
            | Kind::Conductance(..)
            | Kind::Capacitor(..)
            | Kind::Inductor(..)
            | Kind::Impedance(..)
            | Kind::Admittance(..)
            | Kind::Meter(_)
            | Kind::Transformer { .. }
            | Kind::Gyrator { .. } => self.conducting(),
        }
    }

    /// The forced edge in the current graph: a part whose current is whatever is needed, unless a
    /// controlled source senses it ([`sensed_currents`]).
    #[must_use]
    pub fn forced_current(&self) -> Option<Port> {
        match &self.kind {
            Kind::Meter(port) | Kind::Nullor { output: port, .. } => Some(*port),
            Kind::Source(source) if source.quantity == Quantity::Voltage => Some(source.port),
            Kind::Amplifier { output, rout, .. } if rout.as_ref().is_none_or(is_zero) => {
                Some(*output)
            }
            _ => None,
        }
    }

    /// The forced edge in the voltage graph: a node pair that the part holds at zero volts when
    /// the independent sources are zero; for a follower of gain exactly 1 its input and output.
    #[must_use]
    pub fn forced_voltage(&self) -> Option<Port> {
        match &self.kind {
            Kind::Meter(port) | Kind::Nullor { input: port, .. } => Some(*port),
            Kind::Amplifier {
                input, gain: None, ..
            } => Some(*input),
            Kind::Conveyor { x, y, .. } => Some(port(*x, *y)),
            Kind::Source(source) if source.quantity == Quantity::Voltage => {
                let mut acting = source.controls.iter().filter(|control| control.acts());
                match (acting.next(), acting.next()) {
                    (None, _) => Some(source.port),
                    (Some(only), None) => equal_ends(source.port, only),
                    (Some(_), Some(_)) => None,
                }
            }
            _ => None,
        }
    }

    /// Whether the part holds two nodes at one voltage by an output elsewhere: an ideal
    /// operational amplifier, a nullor.
    #[must_use]
    pub fn is_nullor(&self) -> bool {
        matches!(
            self.kind,
            Kind::Nullor { .. } | Kind::Amplifier { gain: None, .. }
        )
    }

    /// Whether it is an independent voltage source or a meter: a short when sources are zero.
    #[must_use]
    pub fn is_short(&self) -> bool {
        match &self.kind {
            Kind::Meter(_) => true,
            Kind::Source(source) => {
                source.quantity == Quantity::Voltage && source.controls.is_empty()
            }
            _ => false,
        }
    }

    /// Whether it is an independent current source.
    #[must_use]
    pub fn is_current_source(&self) -> bool {
        matches!(&self.kind, Kind::Source(source)
            if source.quantity == Quantity::Current && source.controls.is_empty())
    }
}

impl Control {
    /// Whether the term is not plainly zero.
    #[must_use]
    pub fn acts(&self) -> bool {
        !self.factor.is_zero() && !is_zero(&self.value)
    }

    /// The node pair it senses, when it senses a voltage.
    #[must_use]
    pub fn sensed_pair(&self) -> Option<Port> {
        match self.sense {
            Sense::Voltage(port) if self.acts() => Some(port),
            Sense::Voltage(_) | Sense::Current(_) => None,
        }
    }
}

/// The parts whose current a controlled source senses. Such a part is in series with a sensing
/// branch, and its edge in the current graph is no longer forced.
#[must_use]
pub fn sensed_currents<'a>(parts: impl Iterator<Item = &'a Element>) -> BTreeSet<ElementId> {
    parts
        .filter_map(|element| match &element.kind {
            Kind::Source(source) => Some(&source.controls),
            _ => None,
        })
        .flatten()
        .filter(|control| control.acts())
        .filter_map(|control| match control.sense {
            Sense::Current(part) => Some(part),
            Sense::Voltage(_) => None,
        })
        .collect()
}

/// The nodes that a source of gain 1 holds at one voltage, where its ends and what it senses share
/// a node: v(x,r) = v(a,r) is v(x,a) = 0.
fn equal_ends(driven: Port, control: &Control) -> Option<Port> {
    let sensed = control.sensed_pair()?;
    let Value::Number(gain) = &control.value else {
        return None;
    };
    let gain = gain * &control.factor;
    let sensed = if gain == Rational::one() {
        sensed
    } else if gain == -Rational::one() {
        port(sensed.to, sensed.from)
    } else {
        return None;
    };
    if driven.to == sensed.to {
        Some(port(driven.from, sensed.from))
    } else if driven.from == sensed.from {
        Some(port(driven.to, sensed.to))
    } else {
        None
    }
}

fn source_voltage_edges(source: &Source) -> Edges {
    let own = (source.quantity == Quantity::Voltage).then_some(source.port);
    own.into_iter()
        .chain(source.controls.iter().filter_map(Control::sensed_pair))
        .collect()
}

fn is_zero(value: &Value) -> bool {
    matches!(value, Value::Number(number) if number.is_zero())
}

fn port(from: NodeId, to: NodeId) -> Port {
    Port { from, to }
}

fn one(port: Port) -> Edges {
    let mut edges = Edges::new();
    edges.push(port);
    edges
}

fn two(first: Port, second: Port) -> Edges {
    Edges::from_buf([first, second])
}
