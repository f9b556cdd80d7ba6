//! State equations in names and expressions, for every writer.

use crate::algebra::{Fraction, Symbol};
use crate::analysis::report::states::{Affine, Inside, State, StateInput, StateSystem};
use crate::network::{Ask, NodeId, Port};
use crate::render::answer::Answer;
use crate::render::math::{self, Math};
use crate::render::names::Names;

/// How expressions are made.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Manner {
    /// Common symbols in front, derivatives as `dVs/dt`.
    Reading,
    /// The same with derivatives as powers of s before the input.
    Laplace,
    /// Flat sums, powers of s before the input.
    Machine,
}

/// Name of a state: `vC1`, `iL1`, `vU1`, `xZ1_1`.
#[must_use]
pub fn state_name(answer: &Answer<'_>, state: &State) -> String {
    match state {
        State::Voltage(part) => format!("v{}", answer.part(*part)),
        State::Current(part) => format!("i{}", answer.part(*part)),
        State::Inside {
            element,
            number,
            of,
            value,
        } => {
            let part = answer.part(*element);
            match value {
                Inside::Voltage => format!("v{part}"),
                Inside::Current => format!("i{part}"),
                Inside::Other if *of == 1 => format!("x{part}"),
                Inside::Other => format!("x{part}_{number}"),
            }
        }
    }
}

/// What a state is: `voltage of C1`.
#[must_use]
pub fn state_means(answer: &Answer<'_>, state: &State) -> String {
    match state {
        State::Voltage(part) => format!("voltage of {}", answer.part(*part)),
        State::Current(part) => format!("current of {}", answer.part(*part)),
        State::Inside {
            element,
            number,
            of,
            value,
        } => {
            let own = answer.network.element(*element);
            let part = &own.name;
            match value {
                Inside::Voltage if own.port().is_none() => {
                    format!("voltage behind the output of {part}")
                }
                Inside::Voltage => format!("voltage of {part}"),
                Inside::Current => format!("current of {part}"),
                Inside::Other if *of == 1 => format!("value kept inside {part}"),
                Inside::Other => format!("value {number} of {of} kept inside {part}"),
            }
        }
    }
}

fn port(answer: &Answer<'_>, port: Port, between: &str) -> String {
    let name = |node: NodeId| answer.network.node(node).name.clone();
    match (port.from, port.to) {
        (from, NodeId::GROUND) => name(from),
        (from, to) => format!("{}{between}{}", name(from), name(to)),
    }
}

/// Name of an input.
#[must_use]
pub fn input_name(answer: &Answer<'_>, input: &StateInput) -> String {
    match input {
        StateInput::Drive(drive) => answer.network.drive(*drive).name.clone(),
        StateInput::CurrentInto(it) => format!("i_{}", port(answer, *it, "_")),
        StateInput::VoltageAcross(it) => format!("v_{}", port(answer, *it, "_")),
    }
}

/// What an input is.
#[must_use]
pub fn input_means(answer: &Answer<'_>, input: &StateInput) -> String {
    match input {
        StateInput::Drive(_) => "source".to_owned(),
        StateInput::CurrentInto(it) => format!("current into {}", port(answer, *it, ", out of ")),
        StateInput::VoltageAcross(it) => {
            format!("source across {}", port(answer, *it, " and "))
        }
    }
}

/// What an output is: `voltage(out)`.
#[must_use]
pub fn output_name(answer: &Answer<'_>, question: usize) -> String {
    let question = &answer.network.questions()[question];
    match &question.ask {
        Ask::Transfer { .. } => match question.text.rsplit_once('/') {
            Some((response, _)) => bare(response.trim()).to_owned(),
            None => question.name.clone(),
        },
        Ask::Impedance(it) => format!("voltage({})", port(answer, *it, ", ")),
        Ask::Admittance(it) => format!("current into {}", port(answer, *it, ", out of ")),
        _ => question.name.clone(),
    }
}

/// Without the parentheses around the whole.
fn bare(text: &str) -> &str {
    let inner = text.strip_prefix('(').and_then(|it| it.strip_suffix(')'));
    inner
        .filter(|inner| {
            let mut depth = 0_i32;
            inner.chars().all(|letter| {
                depth += i32::from(letter == '(') - i32::from(letter == ')');
                depth >= 0
            })
        })
        .unwrap_or(text)
}

/// `Vs`, `dVs/dt` or `s·Vs`, `d²Vs/dt²`.
#[must_use]
pub fn derivative(name: &str, power: u32, manner: Manner) -> Math {
    match (manner, power) {
        (_, 0) => Math::name(name),
        (Manner::Reading, 1) => Math::name(&format!("d{name}/dt")),
        (Manner::Reading, _) => {
            let raised = crate::render::linear::superscript(power);
            Math::name(&format!("d{raised}{name}/dt{raised}"))
        }
        _ => Math::product([Math::name("s").power(power), Math::name(name)]),
    }
}

/// One entry of a matrix.
#[must_use]
pub fn entry(value: &Fraction, names: &Names<'_>, manner: Manner) -> Math {
    let side = |polynomial| match manner {
        Manner::Machine => math::polynomial(polynomial, names),
        _ if value.contains(Symbol::S) => math::by_powers_of_s(polynomial, names),
        _ => math::for_reading(polynomial, names),
    };
    Math::quotient(side(value.numerator()), side(value.denominator()))
}

fn term(value: &Fraction, of: Math, names: &Names<'_>, manner: Manner) -> Math {
    let slash = matches!(&of, Math::Symbol(name) if name.contains('/'));
    if slash {
        return Math::product([entry(value, names, manner), of]);
    }
    let (above, below) = match entry(value, names, manner).split_sign() {
        (minus, Math::Quotient(above, below)) => (above.signed(minus), Some(*below)),
        (minus, whole) => (whole.signed(minus), None),
    };
    let product = Math::product([above, of]);
    match below {
        Some(below) => Math::quotient(product, below),
        None => product,
    }
}

/// A sum over states and inputs.
#[must_use]
pub fn affine(
    answer: &Answer<'_>,
    system: &StateSystem,
    sum: &Affine,
    names: &Names<'_>,
    manner: Manner,
) -> Math {
    let mut terms = Vec::new();
    if !sum.constant.is_zero() {
        terms.push(entry(&sum.constant, names, manner));
    }
    for (state, value) in system.vector.iter().zip(&sum.states) {
        if !value.is_zero() {
            let of = Math::name(&state_name(answer, state));
            terms.push(term(value, of, names, manner));
        }
    }
    for (power, row) in (0..).zip(&sum.inputs) {
        for (input, value) in system.inputs.iter().zip(row) {
            if !value.is_zero() {
                let of = derivative(&input_name(answer, input), power, manner);
                terms.push(term(value, of, names, manner));
            }
        }
    }
    Math::sum(terms).positive_first()
}

/// A row of matrices as a sum.
#[must_use]
pub fn row(states: &[Fraction], inputs: &[Vec<Vec<Fraction>>], index: usize) -> Affine {
    Affine {
        states: states.to_vec(),
        inputs: inputs.iter().map(|matrix| matrix[index].clone()).collect(),
        constant: Fraction::zero(),
    }
}
