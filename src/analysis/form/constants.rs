//! Coefficients of a denominator as sums of time constants (Cochrun & Grabel 1973).
//!
//! With den(0) = 1 the coefficient of s is the sum of the time constants of the reactive parts, each
//! with all others at zero value: C open, L shorted. That of s² is the sum over pairs of τi·τj, the
//! second with the first at infinite value (C shorted, L open) and the others at zero value.

use std::collections::BTreeMap;

use crate::algebra::{Fraction, Monomial, Polynomial, Symbol};
use crate::analysis::form::tree::Form;
use crate::analysis::form::write::Writer;
use crate::analysis::report::{Expanded, FunctionReport};
use crate::budget::{Budget, Exceeded};
use crate::network::{Ask, Kind, Network, Value};

/// Denominator coefficients as sums, or why there is no such sum.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum TimeConstants {
    /// The sums.
    Sums(Sums),
    /// A clause.
    None(&'static str),
}

/// The first two coefficients.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Sums {
    /// Terms of the coefficient of s.
    pub first: Vec<Constant>,
    /// Terms of the coefficient of s².
    pub second: Vec<Pair>,
    /// b1 − a1: the first moment of the answer to an impulse (Elmore 1948), for transfer functions that
    /// do not vanish at s = 0.
    pub elmore: Option<Form>,
}

/// Which kind of part a time constant belongs to.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Reactive {
    /// τ = R·C
    Capacitor,
    /// τ = L/R
    Inductor,
}

/// A part with the resistance it sees.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Constant {
    /// Its value.
    pub part: Symbol,
    /// Its kind.
    pub kind: Reactive,
    /// The resistance it sees.
    pub sees: Form,
    /// Its time constant.
    pub tau: Form,
}

/// A pair of parts and the product of their time constants.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Pair {
    /// The part at infinite value.
    pub at_infinity: Symbol,
    /// Its kind.
    pub kind: Reactive,
    /// The other part, with what it sees then; `None` where the time constant of the first is zero.
    pub other: Result<Constant, Symbol>,
    /// The product.
    pub product: Form,
}

/// The sums of a function that is asked of the network itself.
///
/// # Errors
/// When the budget is reached.
pub(crate) fn time_constants(
    network: &Network,
    result: &FunctionReport,
    formula: &Expanded,
    budget: &Budget,
) -> Result<TimeConstants, Exceeded> {
    if result.network.is_none() {
        return Ok(TimeConstants::None(
            "it is asked of other functions, not of a network",
        ));
    }
    let (Some(constant), true) = (formula.denominator.first(), formula.denominator.len() > 1)
    else {
        return Ok(TimeConstants::None("it has no poles"));
    };
    if constant.is_zero() {
        return Ok(TimeConstants::None(
            "it has a pole at s = 0, where every sum refers to the value at s = 0",
        ));
    }
    if !network.couplings().is_empty() {
        return Ok(TimeConstants::None(
            "coupled coils have no time constants of their own",
        ));
    }
    let parts = reactive(network);
    if !each_power_has_its_part(formula, &parts) {
        return Ok(TimeConstants::None(
            "values of C and L are tied by relations, or s stands inside a device",
        ));
    }
    if shares_a_hidden_mode(result, formula, &parts) {
        return Ok(TimeConstants::None(
            "a mode that cancels holds parts that stand in it",
        ));
    }
    let maker = Maker {
        constant,
        parts: &parts,
        writer: &Writer::new(network, budget),
        budget,
    };
    let first = maker.first(&formula.denominator[1])?;
    let second = match formula.denominator.get(2) {
        Some(square) => maker.second(square, &formula.denominator[1])?,
        None => Vec::new(),
    };
    Ok(TimeConstants::Sums(Sums {
        first,
        second,
        elmore: match network.questions()[result.question].ask {
            Ask::Transfer { .. } => maker.elmore(formula)?,
            _ => None,
        },
    }))
}

/// Values of capacitors and inductors that are symbols.
fn reactive(network: &Network) -> BTreeMap<Symbol, Reactive> {
    let parts = network
        .elements()
        .filter_map(|(_, element)| match &element.kind {
            Kind::Capacitor(_, Value::Symbol(symbol)) => Some((*symbol, Reactive::Capacitor)),
            Kind::Inductor(_, Value::Symbol(symbol)) => Some((*symbol, Reactive::Inductor)),
            _ => None,
        });
    let sets = || network.relations().flat_map(|(_, relation)| &relation.sets);
    // The option of a device is a name for what was given; a value that several relations use stands
    // for several parts.
    let given = |symbol: Symbol| match network.set_by(symbol) {
        None => Some((symbol, 0)),
        Some(_) => {
            let (_, value) = sets().find(|(own, _)| *own == symbol)?;
            Some((value.as_symbol()?, 1))
        }
    };
    parts
        .filter_map(|(symbol, kind)| {
            let (own, uses) = given(symbol)?;
            let count = sets().filter(|(_, value)| value.contains(own)).count();
            (count == uses && network.set_by(own).is_none()).then_some((own, kind))
        })
        .collect()
}

/// Whether each term with s^k holds exactly k different reactive values.
fn each_power_has_its_part(formula: &Expanded, parts: &BTreeMap<Symbol, Reactive>) -> bool {
    (0..).zip(&formula.denominator).all(|(power, coefficient)| {
        coefficient.terms().iter().all(|(monomial, _)| {
            let stored = monomial.factors().filter(|(it, _)| parts.contains_key(it));
            let stored: Vec<u32> = stored.map(|(_, exponent)| exponent).collect();
            stored.len() == power && stored.iter().all(|exponent| *exponent == 1)
        })
    })
}

/// Whether a cancelled factor holds reactive values of the function, or is not known.
fn shares_a_hidden_mode(
    result: &FunctionReport,
    formula: &Expanded,
    parts: &BTreeMap<Symbol, Reactive>,
) -> bool {
    if result.hidden == Some(0) {
        return false;
    }
    let Some(cancelled) = &result.cancellations else {
        return true;
    };
    let stands = |symbol: Symbol| formula.denominator.iter().any(|it| it.contains(symbol));
    let degree: u32 = cancelled.iter().map(|it| it.degree * it.multiplicity).sum();
    degree != result.hidden.unwrap_or(0)
        || cancelled.iter().any(|it| {
            let symbols = it.factor.symbols().into_iter();
            symbols.filter(|it| parts.contains_key(it)).any(stands)
        })
}

struct Maker<'a> {
    constant: &'a Polynomial,
    parts: &'a BTreeMap<Symbol, Reactive>,
    writer: &'a Writer<'a>,
    budget: &'a Budget,
}

impl Maker<'_> {
    fn first(&self, slope: &Polynomial) -> Result<Vec<Constant>, Exceeded> {
        let mut list = Vec::new();
        for (&part, &kind) in self.parts {
            let seen = of_parts(slope, &[part]);
            if !seen.is_zero() {
                list.push(self.constant(part, kind, &seen, self.constant)?);
            }
        }
        Ok(list)
    }

    /// The part whose time constant is x·above/below.
    fn constant(
        &self,
        part: Symbol,
        kind: Reactive,
        above: &Polynomial,
        below: &Polynomial,
    ) -> Result<Constant, Exceeded> {
        let sees = match kind {
            Reactive::Capacitor => self.writer.ratio(above, below)?,
            Reactive::Inductor => self.writer.ratio(below, above)?,
        };
        let times = above.mul_monomial(&Monomial::symbol(part));
        Ok(Constant {
            part,
            kind,
            sees,
            tau: self.writer.ratio(&times, below)?,
        })
    }

    fn second(&self, square: &Polynomial, slope: &Polynomial) -> Result<Vec<Pair>, Exceeded> {
        let mut list = Vec::new();
        let all: Vec<(Symbol, Reactive)> = self.parts.iter().map(|(a, b)| (*a, *b)).collect();
        for (place, &one) in all.iter().enumerate() {
            for &other in &all[place + 1..] {
                let both = of_parts(square, &[one.0, other.0]);
                if both.is_zero() {
                    continue;
                }
                let alone = |part: Symbol| of_parts(slope, &[part]);
                let (one, other) = match alone(one.0).is_zero() {
                    true => (other, one),
                    false => (one, other),
                };
                let below = alone(one.0);
                let seen = if below.is_zero() {
                    Err(other.0)
                } else {
                    Ok(self.constant(other.0, other.1, &both, &below)?)
                };
                let pair = Monomial::symbol(one.0).mul(&Monomial::symbol(other.0));
                let product = self
                    .writer
                    .ratio(&both.mul_monomial(&pair), self.constant)?;
                list.push(Pair {
                    at_infinity: one.0,
                    kind: one.1,
                    other: seen,
                    product,
                });
            }
        }
        Ok(list)
    }

    fn elmore(&self, formula: &Expanded) -> Result<Option<Form>, Exceeded> {
        let (above, below) = (&formula.numerator, &formula.denominator);
        if above[0].is_zero() {
            return Ok(None);
        }
        let over =
            |a: &Polynomial, b: &Polynomial| Fraction::new(a.clone(), b.clone(), self.budget);
        let rise = above.get(1).cloned().unwrap_or_default();
        match (over(&below[1], &below[0])?, over(&rise, &above[0])?) {
            (Some(fall), Some(rise)) => {
                let delay = fall.sub(&rise, self.budget)?;
                self.writer.write(&delay).map(Some)
            }
            _ => Ok(None),
        }
    }
}

/// The terms that hold these symbols, divided by them.
fn of_parts(sum: &Polynomial, parts: &[Symbol]) -> Polynomial {
    let divisor = parts
        .iter()
        .fold(Monomial::one(), |all, it| all.mul(&Monomial::symbol(*it)));
    let terms = sum.terms().iter();
    Polynomial::from_terms(
        terms.filter_map(|(monomial, number)| Some((monomial.div(&divisor)?, number.clone()))),
    )
}
