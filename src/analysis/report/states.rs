//! State equations as found.

use crate::algebra::Fraction;
use crate::network::{DriveId, ElementId, Port};

/// State equations of a network and of what its questions make of it.
#[derive(Clone, Debug)]
pub struct StatesReport {
    /// The network itself, then one system for each different frame of questions.
    pub systems: Vec<StateSystem>,
    /// Indices of questions that are no output of linear state equations.
    pub no_output: Vec<usize>,
}

/// `dx/dt = A·x + B0·u + B1·du/dt + …`, `y = C·x + D0·u + D1·du/dt + …`; entries in the symbols of
/// the file, relations put in.
#[derive(Clone, Debug)]
pub struct StateSystem {
    /// Parts taken out.
    pub without: Vec<ElementId>,
    /// What the inputs are.
    pub inputs: Vec<StateInput>,
    /// What the states are.
    pub vector: Vec<State>,
    /// Capacitors and inductors that keep no state of their own.
    pub dependent: Vec<Dependent>,
    /// Indices of the questions whose responses are the outputs.
    pub outputs: Vec<usize>,
    /// State by state.
    pub a: Vec<Vec<Fraction>>,
    /// One matrix for each derivative of the inputs, from the inputs themselves on; at least one.
    pub b: Vec<Vec<Vec<Fraction>>>,
    /// Output by state.
    pub c: Vec<Vec<Fraction>>,
    /// As `b`.
    pub d: Vec<Vec<Vec<Fraction>>>,
    /// How the states were chosen.
    pub method: StateMethod,
    /// What starting values do; `None` without `starts` lines.
    pub start: Option<Start>,
    /// Number of points at which the outputs agreed with the nodal equations.
    pub checked_points: u32,
}

/// What acts from outside.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum StateInput {
    /// An independent source or a drive.
    Drive(DriveId),
    /// A current into a port.
    CurrentInto(Port),
    /// The voltage of a source across a port.
    VoltageAcross(Port),
}

/// A state with its physical meaning.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum State {
    /// Voltage of a capacitor.
    Voltage(ElementId),
    /// Current of an inductor.
    Current(ElementId),
    /// A value kept inside a gain, an impedance or another relation with s.
    Inside {
        /// The part.
        element: ElementId,
        /// 1 … `of`, counted within the part.
        number: usize,
        /// How many the part has.
        of: usize,
        /// What the value is.
        value: Inside,
    },
}

/// What a value inside a part is.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Inside {
    /// The voltage of the part, or of its output.
    Voltage,
    /// The current of the part.
    Current,
    /// Neither by itself.
    Other,
}

/// A capacitor or inductor that follows the states and inputs.
#[derive(Clone, Debug)]
pub struct Dependent {
    /// Its voltage or current.
    pub quantity: State,
    /// What it equals.
    pub equals: Affine,
}

/// A sum over states and inputs.
#[derive(Clone, Debug)]
pub struct Affine {
    /// One coefficient for each state.
    pub states: Vec<Fraction>,
    /// One row of coefficients for each derivative of the inputs.
    pub inputs: Vec<Vec<Fraction>>,
    /// What is added.
    pub constant: Fraction,
}

/// How the states were chosen.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum StateMethod {
    /// Capacitors in a tree of V, C, R, L, and inductors outside it: the tree, in that order.
    NormalTree(Vec<ElementId>),
    /// Capacitors, then inductors, then values inside parts, in file order as far as they are
    /// independent under the equations.
    Pencil,
}

/// What starting values do.
#[derive(Clone, Debug)]
pub struct Start {
    /// Each state right after t = 0, over starting values and the inputs then (constant from then on).
    pub after: Vec<(State, Affine)>,
    /// The response to the starting values alone, one for each output.
    pub responses: Vec<Fraction>,
}
