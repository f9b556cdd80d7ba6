//! All exact findings, typed. Renderers read these and nothing else of the room.

pub mod states;

use crate::algebra::{Integer, Polynomial, Rational, Symbol};
use crate::analysis::form::Forms;
use crate::budget::Exceeded;
use crate::diagnostic::Diagnostic;
use crate::network::{CancellationClass, ElementId, RelationId};

/// Three-valued answer; `Undecided` never passes as true.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Verdict {
    /// Proven.
    Yes,
    /// Refuted.
    No,
    /// Neither.
    Undecided,
}

/// Everything one run answers.
#[derive(Clone, Debug)]
pub struct Report {
    /// The order ledger of the network.
    pub order: NetworkOrder,
    /// One for each derived function asked for, in file order.
    pub results: Vec<FunctionReport>,
    /// One for each claim, in file order; empty unless claims were asked for.
    pub claims: Vec<ClaimReport>,
    /// State equations, where they were asked for.
    pub states: Option<states::StatesReport>,
    /// Warnings found while answering.
    pub warnings: Vec<Diagnostic>,
}

/// From the parts to the number of natural frequencies. Always
/// `reactive + device_states − loops − cut-sets − constraints = network = static + moving`.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NetworkOrder {
    /// Capacitors and inductors, those of devices included.
    pub reactive: Vec<ElementId>,
    /// States inside gains, impedances and admittances.
    pub device_states: u32,
    /// The relations those states stand in.
    pub device_state_relations: Vec<RelationId>,
    /// Independent loops of capacitors, independent voltage sources and meters.
    pub capacitor_loops: Vec<Vec<ElementId>>,
    /// Independent cut-sets of inductors and independent current sources.
    pub inductor_cutsets: Vec<Vec<ElementId>>,
    /// States taken away by controlled sources, couplings, transformers, amplifiers and relations.
    pub constraints: u32,
    /// Why, as far as it is known by part.
    pub constraint_evidence: Vec<ConstraintEvidence>,
    /// Number of natural frequencies.
    pub network: u32,
    /// Multiplicity of s = 0 among them.
    pub static_modes: u32,
    /// Cut-sets and loops that hold a charge or a flux.
    pub static_sets: Vec<StaticSet>,
    /// Static modes made by controlled sources or relations.
    pub integrators: u32,
}

impl NetworkOrder {
    /// Natural frequencies other than s = 0.
    #[must_use]
    pub fn moving(&self) -> u32 {
        self.network - self.static_modes
    }
}

/// A part or coupling that takes states away, or a relation.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct ConstraintEvidence {
    /// Names of the parts, couplings or relation texts concerned.
    pub names: Vec<String>,
    /// A short clause: `U1 holds the voltage of C1`.
    pub clause: String,
}

/// What a static set stores.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub enum Stored {
    /// Charge on a cut-set of capacitors and current sources.
    Charge,
    /// Flux in a loop of inductors, voltage sources and joins.
    Flux,
}

/// A set of parts that keeps its charge or flux for ever.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct StaticSet {
    /// Charge or flux.
    pub stored: Stored,
    /// The parts.
    pub members: Vec<ElementId>,
}

/// A derived function and all that is known of it.
#[derive(Clone, Debug)]
pub struct FunctionReport {
    /// Name of the function.
    pub name: String,
    /// Index into the network's questions.
    pub question: usize,
    /// The function itself.
    pub formula: Formula,
    /// The same as a designer writes it; empty where formulas were not asked for.
    pub forms: Forms,
    /// Degree of the cancelled denominator.
    pub order: u32,
    /// Degree of the cancelled numerator.
    pub numerator_order: u32,
    /// Order of the network the question is asked in; `None` for functions of functions.
    pub network: Option<u32>,
    /// Modes of that network that do not show in the function.
    pub hidden: Option<u32>,
    /// The function is identically zero.
    pub zero: bool,
    /// Parts without any effect on it.
    pub no_effect: Vec<NoEffect>,
    /// Conditions at which the order is lower.
    pub drops_when: Vec<Drop>,
    /// Conditions at which a pole goes to s = 0: the lowest coefficient of the denominator vanishes.
    pub origin_when: Vec<Drop>,
    /// What cancels between numerator and denominator; `None` for functions of functions.
    pub cancellations: Option<Vec<Cancellation>>,
    /// The budget that cut the search for cancellations short: what stands in `cancellations` was
    /// reached before, and more may cancel.
    pub unaudited: Option<Exceeded>,
    /// Names of symbols with a nominal missing, when coincidental cancellations were not looked for.
    pub nominals_missing: Vec<String>,
    /// Signs and assumptions that were used, as text.
    pub relied_on: Vec<String>,
    /// Number of points at which the witness agreed.
    pub checked_points: u32,
}

impl FunctionReport {
    /// Whether order, numerator order and zero are known. They are found before the formula, from
    /// the network; a function of functions or a limit has them from its formula alone.
    #[must_use]
    pub fn degrees_known(&self) -> bool {
        self.network.is_some() || !matches!(self.formula, Formula::OverBudget(_))
    }
}

/// A rational function of s.
#[derive(Clone, Debug)]
pub enum Formula {
    /// Coprime, integer coefficients, no common number.
    Expanded(Expanded),
    /// Shared sub-expressions, for results that are long when expanded.
    Nested(Nested),
    /// The budget was reached before it was written down; see [`FunctionReport::degrees_known`].
    OverBudget(Exceeded),
}

/// Coefficients of s^0, s^1, …; the highest is non-zero. The zero function is `[0]` over `[1]`.
///
/// The first term (by total degree, then by names) of the first non-zero denominator coefficient is
/// positive.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Expanded {
    /// Numerator coefficients.
    pub numerator: Vec<Polynomial>,
    /// Denominator coefficients.
    pub denominator: Vec<Polynomial>,
}

/// N/D by definitions: each polynomial may use the symbols defined before it, and s.
#[derive(Clone, Debug)]
pub struct Nested {
    /// New symbols and what they stand for.
    pub definitions: Vec<(Symbol, Polynomial)>,
    /// Names of the new symbols, same order.
    pub names: Vec<String>,
    /// Numerator.
    pub numerator: Polynomial,
    /// Denominator.
    pub denominator: Polynomial,
    /// Terms of numerator and denominator when expanded, before anything cancels.
    pub terms: (Integer, Integer),
    /// Degree in s of a common factor that is not divided out.
    pub common_degree: u32,
}

/// A part without effect on a function.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct NoEffect {
    /// The part.
    pub element: ElementId,
    /// Why, where it is known: `its node is held by U1`.
    pub reason: Option<String>,
}

/// A condition on the parts at which the order drops.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Drop {
    /// The order drops where this polynomial is zero.
    pub condition: Polynomial,
    /// Whether the allowed values can make it zero.
    pub possible: Verdict,
    /// A set of values that does, where one was found.
    pub example: Vec<(Symbol, Rational)>,
}

/// Which side hides a mode.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Hides {
    /// The source does not excite it.
    NotDriven,
    /// The output does not show it.
    NotSeen,
    /// Neither.
    Both,
}

/// A common factor of numerator and denominator.
#[derive(Clone, Debug)]
pub struct Cancellation {
    /// Why it cancels.
    pub class: CancellationClass,
    /// The factor, irreducible unless `factored` is false; relations substituted.
    pub factor: Polynomial,
    /// Its degree in s.
    pub degree: u32,
    /// How often it cancels.
    pub multiplicity: u32,
    /// Which side hides it; `None` where the question has no sides.
    pub hides: Option<Hides>,
    /// Parts that leave the answer (structural), sorted by name.
    pub parts: Vec<String>,
    /// For a structural factor s: the parts of the static set that makes it.
    pub static_set: Vec<String>,
    /// Minimal sufficient relations (matched), in file order.
    pub because: Vec<RelationId>,
    /// Further disjoint minimal sufficient sets.
    pub also_because: Vec<Vec<RelationId>>,
    /// What happens to be zero at the nominals (coincidental).
    pub conditions: Vec<Polynomial>,
    /// Whether `factor` is irreducible.
    pub factored: bool,
}

/// The fate of a claim.
#[derive(Clone, Debug)]
pub struct ClaimReport {
    /// Index into the network's claims.
    pub claim: usize,
    /// Proven, refuted or not decided.
    pub holds: Verdict,
    /// What was found, for a refuted or undecided claim: lines of text parts and formulas.
    pub findings: Vec<Finding>,
    /// Signs and assumptions that were used.
    pub relied_on: Vec<String>,
}

/// One line of evidence beside a claim.
#[derive(Clone, Debug)]
pub struct Finding {
    /// What the line says: `claimed`, `found`, `difference`, `at R1 = 1, C1 = 2`.
    pub label: String,
    /// Text, when it is not a formula.
    pub text: Option<String>,
    /// A quotient of polynomials.
    pub formula: Option<(Polynomial, Polynomial)>,
    /// Whether its sides are to be written as products of their factors.
    pub as_product: bool,
}

/// What a run is to answer.
#[derive(Clone, Debug, Default)]
pub struct Wanted {
    /// Names of derived functions; empty for all.
    pub functions: Vec<String>,
    /// Formulas (else degrees alone).
    pub formulas: bool,
    /// Formulas as a designer writes them, too.
    pub forms: bool,
    /// Denominator coefficients as sums of time constants, too.
    pub time_constants: bool,
    /// Claims.
    pub claims: bool,
    /// Cancellations with class and cause.
    pub cancellations: bool,
    /// Figures at the nominals.
    pub figures: bool,
    /// State equations, and nothing but them.
    pub states: bool,
}

/// Why there is no report.
#[derive(Clone, Debug)]
pub enum Failure {
    /// The input cannot be used: exit 2.
    Unusable(Vec<Diagnostic>),
    /// A budget was reached before anything could be decided: exit 3.
    Budget(Exceeded),
    /// The independent check disagreed: our bug, exit 5.
    Witness(String),
}

impl From<Exceeded> for Failure {
    fn from(exceeded: Exceeded) -> Self {
        Self::Budget(exceeded)
    }
}
