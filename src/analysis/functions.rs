//! Functions of functions, limits and first-order terms; which questions a run needs.

use std::collections::{BTreeMap, BTreeSet};

use crate::algebra::{Fraction, Polynomial, Symbol};
use crate::analysis::relations::Substitution;
use crate::analysis::report::Wanted;
use crate::budget::{Budget, Exceeded};
use crate::diagnostic::Diagnostic;
use crate::network::{Ask, Assertion, ClaimedValue, LimitPoint, Network, Question, Subject};

/// Why a function has no value.
pub(crate) enum Trouble {
    /// A budget was reached.
    Exceeded(Exceeded),
    /// It is not defined.
    Wrong(Box<Diagnostic>),
}

impl From<Exceeded> for Trouble {
    fn from(exceeded: Exceeded) -> Self {
        Self::Exceeded(exceeded)
    }
}

/// Whether a function is among those asked for.
pub(crate) fn is_wanted(name: &str, wanted: &Wanted) -> bool {
    wanted.functions.is_empty() || wanted.functions.iter().any(|asked| asked == name)
}

/// Indices of the questions that are wanted, and of those they and the claims are made of.
pub(crate) fn needed(network: &Network, wanted: &Wanted) -> BTreeSet<usize> {
    let mut stack: Vec<usize> = network
        .questions()
        .iter()
        .enumerate()
        .filter(|(_, question)| is_wanted(&question.name, wanted))
        .map(|(index, _)| index)
        .collect();
    if wanted.claims {
        let symbols = network
            .claims()
            .iter()
            .flat_map(|claim| named(&claim.assertion));
        stack.extend(symbols.filter_map(|symbol| network.question_of(symbol)));
    }
    let mut needed = BTreeSet::new();
    while let Some(index) = stack.pop() {
        if !needed.insert(index) {
            continue;
        }
        let symbols = match &network.questions()[index].ask {
            Ask::Function(fraction) => fraction.symbols(),
            Ask::Limit { function, steps } => {
                let mut symbols = vec![*function];
                for (_, point) in steps {
                    if let LimitPoint::Value(value) = point {
                        symbols.extend(value.symbols());
                    }
                }
                symbols
            }
            Ask::FirstOrder { function, small } => {
                let mut symbols = small.symbols();
                symbols.push(*function);
                symbols
            }
            Ask::Transfer { .. }
            | Ask::Impedance(_)
            | Ask::Admittance(_)
            | Ask::Ratio { .. }
            | Ask::ReturnRatio(_) => Vec::new(),
        };
        stack.extend(
            symbols
                .into_iter()
                .filter_map(|symbol| network.question_of(symbol)),
        );
    }
    needed
}

/// Derived functions a claim names.
fn named(assertion: &Assertion) -> Vec<Symbol> {
    let with = |function: Symbol, value: &Fraction| {
        let mut symbols = value.symbols();
        symbols.push(function);
        symbols
    };
    let claimed = |function: Symbol, value: &ClaimedValue| match value {
        ClaimedValue::Infinite => vec![function],
        ClaimedValue::Value(value) => with(function, value),
    };
    match assertion {
        Assertion::Equals(function, value)
        | Assertion::Pole(function, value)
        | Assertion::Zero(function, value)
        | Assertion::Coefficient {
            function, value, ..
        } => with(*function, value),
        Assertion::Dc(function, value) | Assertion::Hf(function, value) => {
            claimed(*function, value)
        }
        Assertion::Same(first, second) => vec![*first, *second],
        Assertion::Cancels(function, _)
        | Assertion::Order(Subject::Function(function), _)
        | Assertion::Stable {
            subject: Subject::Function(function),
            ..
        } => vec![*function],
        Assertion::Order(Subject::Network, _)
        | Assertion::Static(_)
        | Assertion::Stable {
            subject: Subject::Network,
            ..
        } => Vec::new(),
    }
}

/// The value of a function of functions; `Ok(None)` when a function it needs was not completed.
pub(crate) fn evaluate(
    network: &Network,
    question: &Question,
    known: &BTreeMap<Symbol, Fraction>,
    substitution: &Substitution,
    budget: &Budget,
) -> Result<Option<Fraction>, Trouble> {
    let resolve = |value: &Fraction| -> Result<Option<Fraction>, Trouble> {
        let missing = value
            .symbols()
            .into_iter()
            .any(|symbol| network.question_of(symbol).is_some() && !known.contains_key(&symbol));
        if missing {
            return Ok(None);
        }
        let result = value.substitute(
            &|symbol| {
                known
                    .get(&symbol)
                    .cloned()
                    .or_else(|| Some(substitution.value(symbol)))
            },
            budget,
        )?;
        result.map(Some).ok_or_else(|| {
            Trouble::Wrong(Box::new(
                Diagnostic::error(question.place, "this function divides by zero")
                    .help("its divisor is zero for all values"),
            ))
        })
    };
    match &question.ask {
        Ask::Function(fraction) => resolve(fraction),
        Ask::Limit { function, steps } => {
            let Some(mut value) = known.get(function).cloned() else {
                return Ok(None);
            };
            for (symbol, point) in steps {
                free_of_relations(network, *symbol, question)?;
                value = match point {
                    LimitPoint::Infinite => at_infinity(&value, *symbol, question, budget)?,
                    LimitPoint::Value(to) => {
                        let Some(to) = resolve(to)? else {
                            return Ok(None);
                        };
                        at_value(&value, *symbol, &to, question, budget)?
                    }
                };
            }
            Ok(Some(value))
        }
        Ask::FirstOrder { function, small } => {
            let Some(value) = known.get(function) else {
                return Ok(None);
            };
            first_order(network, value, small, question, budget).map(Some)
        }
        Ask::Transfer { .. }
        | Ask::Impedance(_)
        | Ask::Admittance(_)
        | Ask::Ratio { .. }
        | Ask::ReturnRatio(_) => Ok(None),
    }
}

fn wrong(question: &Question, message: String, help: &str) -> Trouble {
    Trouble::Wrong(Box::new(
        Diagnostic::error(question.place, message).help(help),
    ))
}

fn free_of_relations(
    network: &Network,
    symbol: Symbol,
    question: &Question,
) -> Result<(), Trouble> {
    if network.set_by(symbol).is_none() {
        return Ok(());
    }
    let name = network.symbols().name(symbol);
    Err(wrong(
        question,
        format!("{name} is set by a relation and cannot go anywhere by itself"),
        "take the limit in the symbol the relation is made of",
    ))
}

/// Highest powers of a symbol decide.
fn at_infinity(
    value: &Fraction,
    symbol: Symbol,
    question: &Question,
    budget: &Budget,
) -> Result<Fraction, Trouble> {
    let (up, down) = (
        value.numerator().degree(symbol),
        value.denominator().degree(symbol),
    );
    if value.is_zero() || up < down {
        return Ok(Fraction::zero());
    }
    if up > down {
        return Err(wrong(
            question,
            "this limit is infinite".to_owned(),
            "ask the limit of its inverse: derive G = 1/H, then G with …",
        ));
    }
    let lead = |polynomial: &Polynomial| polynomial.leading_coefficient(symbol);
    let limit = Fraction::new(lead(value.numerator()), lead(value.denominator()), budget)?;
    Ok(limit.unwrap_or_else(Fraction::zero))
}

/// The value, or the limit where both sides vanish cannot occur in lowest terms.
fn at_value(
    value: &Fraction,
    symbol: Symbol,
    to: &Fraction,
    question: &Question,
    budget: &Budget,
) -> Result<Fraction, Trouble> {
    let put = |found: Symbol| (found == symbol).then(|| to.clone());
    match value.substitute(&put, budget)? {
        Some(found) => Ok(found),
        None => Err(wrong(
            question,
            "this limit is infinite".to_owned(),
            "ask the limit of its inverse: derive G = 1/H, then G with …",
        )),
    }
}

/// The exact first-order term in a small quantity e = x or e = 1/x, the quantity included.
fn first_order(
    network: &Network,
    value: &Fraction,
    small: &Fraction,
    question: &Question,
    budget: &Budget,
) -> Result<Fraction, Trouble> {
    let inverse = small.recip();
    let direct = small.as_symbol();
    let symbol = direct.or_else(|| inverse.and_then(|inverse| inverse.as_symbol()));
    let Some(symbol) = symbol else {
        return Err(wrong(
            question,
            "the small quantity is a symbol or one over a symbol".to_owned(),
            "write first_order(H, 1/A0) or first_order(H, d)",
        ));
    };
    free_of_relations(network, symbol, question)?;
    // As a function of the small quantity itself.
    let in_small = if direct.is_some() {
        value.clone()
    } else {
        let one_over = Fraction::symbol(symbol).recip();
        let put = |found: Symbol| {
            if found == symbol {
                one_over.clone()
            } else {
                None
            }
        };
        value
            .substitute(&put, budget)?
            .unwrap_or_else(Fraction::zero)
    };
    let slope = in_small.derivative(symbol, budget)?;
    let at_zero = at_value(&slope, symbol, &Fraction::zero(), question, budget)?;
    Ok(at_zero.mul(small, budget)?)
}
