//! What is asked and claimed, as ids and fractions, with its text and place.

use crate::algebra::{Fraction, Rational, Symbol};
use crate::network::element::Port;
use crate::network::id::{DriveId, ElementId};
use crate::source::Span;

/// A response of the network.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Probe {
    /// Voltage of a node pair.
    Voltage(Port),
    /// Current of a part with two ends.
    Current(ElementId),
}

/// A linear combination of responses, coefficients without s.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Combination {
    /// Coefficient and response.
    pub terms: Vec<(Fraction, Probe)>,
}

/// What a derived function asks.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Ask {
    /// Response over one drive; the other drives are zeroed.
    Transfer {
        /// The response.
        response: Combination,
        /// The excitation.
        drive: DriveId,
    },
    /// Driving-point impedance, every independent source zeroed.
    Impedance(Port),
    /// Driving-point admittance.
    Admittance(Port),
    /// Quotient of two responses to one drive.
    Ratio {
        /// Response above.
        upper: Combination,
        /// Response below.
        lower: Combination,
        /// The excitation.
        drive: DriveId,
    },
    /// Return ratio (Bode) of the gains of these parts, scaled together.
    ReturnRatio(Vec<ElementId>),
    /// A rational expression in earlier derived functions, symbols and s.
    Function(Fraction),
    /// `function with symbol -> value`.
    Limit {
        /// The derived function.
        function: Symbol,
        /// Symbol and what it tends to, one after the other.
        steps: Vec<(Symbol, LimitPoint)>,
    },
    /// The exact first-order term in a small quantity: `first_order(H, 1/A0)`.
    FirstOrder {
        /// The derived function.
        function: Symbol,
        /// The small quantity.
        small: Fraction,
    },
}

/// Where a limit goes.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum LimitPoint {
    /// Infinity.
    Infinite,
    /// A value.
    Value(Fraction),
}

/// A `derive` line.
#[derive(Clone, Debug)]
pub struct Question {
    /// Name of the derived function.
    pub name: String,
    /// The symbol that stands for it in functions of functions.
    pub symbol: Symbol,
    /// What is asked.
    pub ask: Ask,
    /// Parts taken out (opened).
    pub without: Vec<ElementId>,
    /// Text right of the `=`, blanks as in the file: `voltage(out) / Vs`.
    pub text: String,
    /// Where.
    pub place: Span,
}

/// A claimed value that may be infinite.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum ClaimedValue {
    /// `infinite`.
    Infinite,
    /// An expression.
    Value(Fraction),
}

/// Numerator or denominator.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Side {
    /// Numerator.
    Numerator,
    /// Denominator.
    Denominator,
}

/// Why a factor cancels.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum CancellationClass {
    /// Holds for all independent values.
    Structural,
    /// Rests on relations of the file.
    Matched,
    /// Happens at the nominal values only.
    Coincidental,
}

/// Which system a claim speaks of.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Subject {
    /// The network as a whole.
    Network,
    /// A derived function.
    Function(Symbol),
}

/// What is claimed.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Assertion {
    /// `H = expression`; the expression may name other derived functions.
    Equals(Symbol, Fraction),
    /// `order(H) = n`.
    Order(Subject, Rational),
    /// `static(network) = n`.
    Static(Rational),
    /// `dc(H) = …`.
    Dc(Symbol, ClaimedValue),
    /// `hf(H) = …`.
    Hf(Symbol, ClaimedValue),
    /// `coefficient(H, den, k) = …`.
    Coefficient {
        /// The function.
        function: Symbol,
        /// Which polynomial.
        side: Side,
        /// Power of s.
        power: u32,
        /// Claimed value after normalisation.
        value: Fraction,
    },
    /// `pole(H) = …`.
    Pole(Symbol, Fraction),
    /// `zero(H) = …`.
    Zero(Symbol, Fraction),
    /// `same(H1, H2)`.
    Same(Symbol, Symbol),
    /// `cancels(H) = none` (empty) or a set of classes, sorted.
    Cancels(Symbol, Vec<CancellationClass>),
    /// `stable(H)`, `stable(network)`.
    Stable {
        /// Of what.
        subject: Subject,
        /// Only within the tolerance box.
        within_tolerance: bool,
    },
}

/// A `claim` line.
#[derive(Clone, Debug)]
pub struct Claim {
    /// What is claimed.
    pub assertion: Assertion,
    /// Text after the word `claim`.
    pub text: String,
    /// Where.
    pub place: Span,
}

/// Order relation of an assumption.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Comparison {
    /// `difference > 0`.
    Positive,
    /// `difference >= 0`.
    NonNegative,
}

/// One link of an `assume` line, brought to `difference > 0` or `difference >= 0`.
#[derive(Clone, Debug)]
pub struct Assumption {
    /// Larger side minus smaller side.
    pub difference: Fraction,
    /// Strict or not.
    pub comparison: Comparison,
    /// As written.
    pub text: String,
    /// Where.
    pub place: Span,
}

/// An initial value for state equations: `starts voltage(C1) = V0`.
#[derive(Clone, Debug)]
pub struct Start {
    /// The capacitor or inductor.
    pub element: ElementId,
    /// Its voltage or current.
    pub value: Fraction,
    /// Where.
    pub place: Span,
}
