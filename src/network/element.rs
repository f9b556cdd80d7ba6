//! Parts: what stands between nodes once devices have been taken apart.

use crate::algebra::Rational;
use crate::network::id::{DeviceId, DriveId, ElementId, NodeId};
use crate::network::value::Value;
use crate::source::Span;

/// An ordered pair of nodes: voltage is counted from `from` to `to`, current flows from `from` to
/// `to` inside the part.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Port {
    /// First node, left end on the path.
    pub from: NodeId,
    /// Second node.
    pub to: NodeId,
}

/// Voltage or current.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Quantity {
    /// Voltage.
    Voltage,
    /// Current.
    Current,
}

/// What a controlled source senses.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Sense {
    /// Voltage of a node pair.
    Voltage(Port),
    /// Current of a part with two ends.
    Current(ElementId),
}

/// One term of a controlled source: `factor · value · sensed`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Control {
    /// Exact factor beside the value (½ in differential amplifiers, ±1 for directions).
    pub factor: Rational,
    /// Coefficient.
    pub value: Value,
    /// What is sensed.
    pub sense: Sense,
    /// Whether a return ratio around this source scales the term.
    pub gain: bool,
}

/// One drive that a source follows: `factor · value · drive`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Follow {
    /// Exact factor.
    pub factor: Rational,
    /// Coefficient.
    pub value: Value,
    /// The drive.
    pub drive: DriveId,
}

/// A source; independent when `controls` is empty (zeroed when no drive it follows is asked).
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Source {
    /// Voltage source or current source.
    pub quantity: Quantity,
    /// Where it stands.
    pub port: Port,
    /// Drives it follows.
    pub drives: Vec<Follow>,
    /// Quantities it senses.
    pub controls: Vec<Control>,
}

/// What a part does.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Kind {
    /// v = R·i.
    Resistor(Port, Value),
    /// i = G·v.
    Conductance(Port, Value),
    /// i = s·C·v.
    Capacitor(Port, Value),
    /// v = s·L·i, plus mutual terms of the couplings.
    Inductor(Port, Value),
    /// v = Z·i, Z rational in s.
    Impedance(Port, Value),
    /// i = Y·v, Y rational in s.
    Admittance(Port, Value),
    /// v = 0, a connection whose current can be asked.
    Meter(Port),
    /// Independent or controlled source.
    Source(Source),
    /// Operational amplifier. Without `gain`: v(plus,minus) = 0 and the current out of `out` is
    /// whatever is needed. With it: v(out,reference) = gain·v(plus,minus) − rout·i.
    Amplifier {
        /// Sensed node pair (+, −).
        input: Port,
        /// Driven node pair (out, ref).
        output: Port,
        /// Finite gain.
        gain: Option<Value>,
        /// Output resistance; only together with a gain.
        rout: Option<Value>,
    },
    /// v(input) = 0, no current into the input, any current through the output.
    Nullor {
        /// (+, −).
        input: Port,
        /// (p, q).
        output: Port,
    },
    /// v(x) = v(y), current into z = polarity · current into x; both return at `reference`.
    Conveyor {
        /// Terminal x.
        x: NodeId,
        /// Terminal y.
        y: NodeId,
        /// Terminal z.
        z: NodeId,
        /// Common return.
        reference: NodeId,
        /// Current transfer.
        polarity: Value,
    },
    /// v(primary) = ratio · v(secondary), i into s1 = −ratio · i into p1.
    Transformer {
        /// (p1, p2).
        primary: Port,
        /// (s1, s2).
        secondary: Port,
        /// Ratio.
        ratio: Value,
    },
    /// i into p1 = g·v(secondary), i into s1 = −g·v(primary).
    Gyrator {
        /// (p1, p2).
        primary: Port,
        /// (s1, s2).
        secondary: Port,
        /// Gyration conductance.
        g: Value,
    },
}

/// A part with its name and place.
#[derive(Clone, Debug)]
pub struct Element {
    /// Name in answers; parts of a device read as their symbol, `cpi_Q1`.
    pub name: String,
    /// What it does.
    pub kind: Kind,
    /// The device it came from.
    pub device: Option<DeviceId>,
    /// Where it stands in the text.
    pub place: Span,
}

impl Element {
    /// The node pair of a part with two ends.
    #[must_use]
    pub fn port(&self) -> Option<Port> {
        match &self.kind {
            Kind::Resistor(port, _)
            | Kind::Conductance(port, _)
            | Kind::Capacitor(port, _)
            | Kind::Inductor(port, _)
            | Kind::Impedance(port, _)
            | Kind::Admittance(port, _)
            | Kind::Meter(port) => Some(*port),
            Kind::Source(source) => Some(source.port),
            Kind::Amplifier { .. }
            | Kind::Nullor { .. }
            | Kind::Conveyor { .. }
            | Kind::Transformer { .. }
            | Kind::Gyrator { .. } => None,
        }
    }

    /// The value of a passive part with two ends.
    #[must_use]
    pub fn value(&self) -> Option<&Value> {
        match &self.kind {
            Kind::Resistor(_, value)
            | Kind::Conductance(_, value)
            | Kind::Capacitor(_, value)
            | Kind::Inductor(_, value)
            | Kind::Impedance(_, value)
            | Kind::Admittance(_, value) => Some(value),
            Kind::Meter(_)
            | Kind::Source(_)
            | Kind::Amplifier { .. }
            | Kind::Nullor { .. }
            | Kind::Conveyor { .. }
            | Kind::Transformer { .. }
            | Kind::Gyrator { .. } => None,
        }
    }

    /// Whether it is a capacitor or an inductor.
    #[must_use]
    pub fn is_reactive(&self) -> bool {
        matches!(self.kind, Kind::Capacitor(..) | Kind::Inductor(..))
    }

    /// Whether it is a source without controls.
    #[must_use]
    pub fn independent_source(&self) -> Option<&Source> {
        match &self.kind {
            Kind::Source(source) if source.controls.is_empty() => Some(source),
            _ => None,
        }
    }
}

/// Magnetic coupling of two inductors; dots at the left ends on their paths.
#[derive(Clone, Debug)]
pub struct Coupling {
    /// `T1`.
    pub name: String,
    /// First coil.
    pub first: ElementId,
    /// Second coil.
    pub second: ElementId,
    /// How strong.
    pub strength: Strength,
    /// Where.
    pub place: Span,
}

/// Strength of a coupling.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Strength {
    /// M = k·√(L1·L2).
    Factor(Value),
    /// M itself.
    Mutual(Value),
}

/// A device statement: its name, kind and terminals, for messages and drawings.
#[derive(Clone, Debug)]
pub struct Device {
    /// `U1`.
    pub name: String,
    /// `opamp`.
    pub kind: &'static str,
    /// Terminal name and node, in the order of the kind's table.
    pub terminals: Vec<(String, NodeId)>,
    /// Its parts.
    pub elements: Vec<ElementId>,
    /// Where.
    pub place: Span,
}

/// An excitation: an independent source by itself, or a declared drive several sources follow.
#[derive(Clone, Debug)]
pub struct Drive {
    /// Name.
    pub name: String,
    /// Voltage or current, where its sources agree; `None` for a drive no source follows.
    pub quantity: Option<Quantity>,
    /// Where.
    pub place: Span,
}
