//! Parts of a network that is being reduced: those of the file and those that are made.

use crate::network::{ElementId, Kind, Value};

/// Position in the list of parts.
pub type PartId = usize;

/// What a part is; parts of one class merge.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Class {
    /// v = R·i.
    Resistor,
    /// i = G·v.
    Conductance,
    /// i = s·C·v.
    Capacitor,
    /// v = s·L·i.
    Inductor,
    /// v = Z·i.
    Impedance,
    /// i = Y·v.
    Admittance,
}

impl Class {
    /// The class and value of a passive part.
    pub(super) fn of(kind: &Kind) -> Option<(Self, &Value)> {
        match kind {
            Kind::Resistor(_, value) => Some((Self::Resistor, value)),
            Kind::Conductance(_, value) => Some((Self::Conductance, value)),
            Kind::Capacitor(_, value) => Some((Self::Capacitor, value)),
            Kind::Inductor(_, value) => Some((Self::Inductor, value)),
            Kind::Impedance(_, value) => Some((Self::Impedance, value)),
            Kind::Admittance(_, value) => Some((Self::Admittance, value)),
            _ => None,
        }
    }

    /// Whether values add in series; the others add in parallel.
    #[must_use]
    pub fn adds_in_series(self) -> bool {
        matches!(self, Self::Resistor | Self::Inductor | Self::Impedance)
    }

    /// First letter of made parts.
    #[must_use]
    pub fn letter(self) -> char {
        match self {
            Self::Resistor => 'R',
            Self::Conductance => 'G',
            Self::Capacitor => 'C',
            Self::Inductor => 'L',
            Self::Impedance => 'Z',
            Self::Admittance => 'Y',
        }
    }
}

/// What the value of a part is.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Definition {
    /// A part of the file with its value.
    Given(ElementId, Value),
    /// x + y + …
    Sum(Vec<PartId>),
    /// x ∥ y ∥ …, that is 1/(1/x + 1/y + …).
    Parallel(Vec<PartId>),
    /// One side of a triangle: x·y/z + x + y where values add in series, x·y/(x + y + z) else;
    /// z is the part of the star that the side does not touch.
    Side([PartId; 3]),
}

impl Definition {
    /// The parts it is made of.
    #[must_use]
    pub fn members(&self) -> &[PartId] {
        match self {
            Self::Given(..) => &[],
            Self::Sum(members) | Self::Parallel(members) => members,
            Self::Side(members) => members,
        }
    }
}

/// A part of the file or a made one.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Part {
    /// Name in the file, or a new one that is free; empty until the steps are in order.
    pub name: String,
    /// What it is.
    pub class: Class,
    /// Its value.
    pub definition: Definition,
    /// Whether parts were moved aside in making it.
    pub(super) exchanged: bool,
}
