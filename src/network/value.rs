//! What a value symbol is: its dimension, sign, nominal value and tolerance.

use crate::algebra::{Rational, Symbol};
use crate::source::Span;

/// The value of a part or of an option: a symbol of the network or a number that belongs to the device.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub enum Value {
    /// A symbol, independent or tied by a relation.
    Symbol(Symbol),
    /// A number; what it cancels is structural.
    Number(Rational),
}

impl Value {
    /// The number one.
    #[must_use]
    pub fn one() -> Self {
        Self::Number(Rational::from(1_i64))
    }
}

/// Physical dimension as exponents of volt, ampere, second and kelvin.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Dimension {
    /// Exponent of V.
    pub volt: i32,
    /// Exponent of A.
    pub ampere: i32,
    /// Exponent of s.
    pub second: i32,
    /// Exponent of K.
    pub kelvin: i32,
}

impl Dimension {
    /// A pure number.
    pub const NUMBER: Self = Self::of(0, 0, 0);
    /// V/A.
    pub const OHM: Self = Self::of(1, -1, 0);
    /// A/V.
    pub const SIEMENS: Self = Self::of(-1, 1, 0);
    /// A·s/V.
    pub const FARAD: Self = Self::of(-1, 1, 1);
    /// V·s/A.
    pub const HENRY: Self = Self::of(1, -1, 1);
    /// V.
    pub const VOLT: Self = Self::of(1, 0, 0);
    /// A.
    pub const AMPERE: Self = Self::of(0, 1, 0);
    /// s.
    pub const SECOND: Self = Self::of(0, 0, 1);
    /// 1/s, of frequencies and of the complex frequency s.
    pub const PER_SECOND: Self = Self::of(0, 0, -1);

    /// V^volt · A^ampere · s^second.
    #[must_use]
    pub const fn of(volt: i32, ampere: i32, second: i32) -> Self {
        Self {
            volt,
            ampere,
            second,
            kelvin: 0,
        }
    }

    /// Dimension of a product.
    #[must_use]
    pub fn times(self, other: Self) -> Self {
        Self {
            volt: self.volt.saturating_add(other.volt),
            ampere: self.ampere.saturating_add(other.ampere),
            second: self.second.saturating_add(other.second),
            kelvin: self.kelvin.saturating_add(other.kelvin),
        }
    }

    /// Dimension of a power.
    #[must_use]
    pub fn power(self, exponent: i32) -> Self {
        Self {
            volt: self.volt.saturating_mul(exponent),
            ampere: self.ampere.saturating_mul(exponent),
            second: self.second.saturating_mul(exponent),
            kelvin: self.kelvin.saturating_mul(exponent),
        }
    }
}

/// Deviation from a nominal value, as fractions of it.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Tolerance {
    /// Largest relative deviation upwards, ≥ 0.
    pub up: Rational,
    /// Largest relative deviation downwards, ≥ 0.
    pub down: Rational,
}

/// A closed interval; an open end is `None`.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Range {
    /// Lowest value.
    pub low: Option<Rational>,
    /// Highest value.
    pub high: Option<Rational>,
}

/// What is known of the sign of an independent symbol.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Sign {
    /// Greater than zero.
    Positive,
    /// Any real number.
    Real,
    /// In a closed interval that was stated for it (replaces positivity).
    Within(Range),
}

/// Where a symbol comes from.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Origin {
    /// The value of a part.
    Part,
    /// An option of a device that was left without a value, or tied by a relation.
    Option,
    /// The coefficient of a controlled source, tied by that source's relation; never shown.
    Coefficient,
    /// A `free` symbol, or a name of the parts list that relations use.
    Free,
    /// A parameter of a module instance.
    Parameter,
    /// A derived function, standing for its result inside functions of functions.
    Derived,
}

/// Everything known of one symbol.
#[derive(Clone, Debug)]
pub struct SymbolFacts {
    /// The symbol.
    pub symbol: Symbol,
    /// Where it comes from.
    pub origin: Origin,
    /// Dimension where it is known.
    pub dimension: Option<Dimension>,
    /// Sign where no relation sets the symbol.
    pub sign: Sign,
    /// Nominal value in SI units.
    pub nominal: Option<Rational>,
    /// Tolerance of the nominal.
    pub tolerance: Option<Tolerance>,
    /// Range stated in the parts list.
    pub range: Option<Range>,
    /// Whether the nominal was stated in hertz.
    pub in_hertz: bool,
    /// Where it was introduced.
    pub place: Span,
}
