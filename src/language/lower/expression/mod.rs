//! Expressions to exact fractions, with dimensions, warnings and linear responses.

mod name;
mod product;

use std::rc::Rc;

use crate::algebra::{Fraction, Symbol};
use crate::diagnostic::Diagnostic;
use crate::language::expand::{Given, Scope, plain};
use crate::language::lower::{Lowering, What};
use crate::language::syntax::{Expression, ExpressionNode, Literal, Name};
use crate::network::{Dimension, DriveId, Kind, NodeId, Origin, Port, Probe};
use crate::source::Span;

/// A value that is linear in responses and drives.
#[derive(Clone, Debug)]
pub(crate) struct Linear {
    pub(crate) constant: Fraction,
    pub(crate) probes: Vec<(Fraction, Probe)>,
    pub(crate) drives: Vec<(Fraction, DriveId)>,
    /// Divided by this drive.
    pub(crate) over: Option<(DriveId, Span)>,
    pub(crate) dimension: Option<Dimension>,
}

impl Linear {
    fn number(constant: Fraction, dimension: Option<Dimension>) -> Self {
        Self {
            constant,
            probes: Vec::new(),
            drives: Vec::new(),
            over: None,
            dimension,
        }
    }

    pub(crate) fn is_constant(&self) -> bool {
        self.probes.is_empty() && self.drives.is_empty() && self.over.is_none()
    }
}

/// What an expression may hold.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Allowed {
    /// voltage() and current().
    pub(crate) responses: bool,
    /// Independent sources and drives as values.
    pub(crate) drives: bool,
    /// Derived functions.
    pub(crate) functions: bool,
}

/// Values only.
pub(crate) const VALUES: Allowed = Allowed {
    responses: false,
    drives: false,
    functions: false,
};

/// An error that has been reported.
pub(crate) struct Reported;

type Out<T> = Result<T, Reported>;

impl Lowering<'_> {
    /// A plain value.
    pub(crate) fn fraction(&mut self, expression: &Expression, scope: &Rc<Scope>) -> Out<Fraction> {
        Ok(self.linear(expression, scope, VALUES)?.constant)
    }

    fn exceeded<T>(&mut self, place: Span, result: Result<T, crate::budget::Exceeded>) -> Out<T> {
        result.map_err(|exceeded| {
            self.error(
                place,
                format!("this expression is too large: {exceeded}"),
                "name a part of it by a relation and use the name",
            );
            Reported
        })
    }

    fn literal(&mut self, literal: &Literal, scope: &Scope) -> Linear {
        if let Some(suffix) = &literal.suffix {
            let known = self.names.contains_key(&scope.own(&suffix.text))
                || scope.parameters.contains_key(&suffix.text)
                || suffix.text == "s";
            if known {
                self.warning(
                    literal.place,
                    format!("read as {}", suffix.reading),
                    format!("write {}*{}", suffix.number, suffix.text),
                );
            }
        }
        if literal.rounded {
            self.warning(
                literal.place,
                "this ratio in decibels is no rational number; twelve digits of it are used",
                "multiples of 20 dB are exact",
            );
        }
        Linear::number(Fraction::from(literal.value.clone()), literal.dimension)
    }

    pub(crate) fn linear(
        &mut self,
        expression: &Expression,
        scope: &Rc<Scope>,
        allowed: Allowed,
    ) -> Out<Linear> {
        let place = expression.place;
        match &expression.node {
            ExpressionNode::Number(literal) => Ok(self.literal(literal, scope)),
            ExpressionNode::Name(name) => self.name_value(name, scope, allowed),
            ExpressionNode::Voltage(_) | ExpressionNode::Current(_) => {
                if !allowed.responses {
                    self.error(
                        place,
                        "a voltage or current cannot stand here",
                        "values are made of parts and symbols; responses stand in derive and in controlled sources",
                    );
                    return Err(Reported);
                }
                let probe = self.probe(expression, scope)?;
                let mut linear = Linear::number(Fraction::zero(), None);
                linear.dimension = Some(match probe {
                    Probe::Voltage(_) => Dimension::VOLT,
                    Probe::Current(_) => Dimension::AMPERE,
                });
                linear.probes.push((Fraction::one(), probe));
                Ok(linear)
            }
            ExpressionNode::Negate(inner) => {
                let value = self.linear(inner, scope, allowed)?;
                Ok(negated(value))
            }
            ExpressionNode::Sum(terms) => {
                let mut sum: Option<Linear> = None;
                for (minus, term) in terms {
                    let value = self.linear(term, scope, allowed)?;
                    let value = if *minus { negated(value) } else { value };
                    sum = Some(match sum {
                        None => value,
                        Some(sum) => self.plus(sum, value, place)?,
                    });
                }
                sum.ok_or(Reported)
            }
            ExpressionNode::Product(factors) => self.product(factors, scope, allowed, place),
            ExpressionNode::Parallel(members) => {
                let mut sum = Fraction::zero();
                let mut dimension = None;
                for member in members {
                    let value = self.linear(member, scope, allowed)?;
                    if !value.is_constant() {
                        self.not_linear(member.place);
                        return Err(Reported);
                    }
                    self.same_dimension(dimension, value.dimension, "||", place);
                    dimension = dimension.or(value.dimension);
                    let Some(inverse) = value.constant.recip() else {
                        self.error(
                            member.place,
                            "zero stands beside ||",
                            "the parallel value of zero and anything is zero",
                        );
                        return Err(Reported);
                    };
                    let added = sum.add(&inverse, &self.budget);
                    sum = self.exceeded(place, added)?;
                }
                match sum.recip() {
                    Some(value) => Ok(Linear::number(value, dimension)),
                    None => self.divides_by_zero(place),
                }
            }
            ExpressionNode::Power(inner, exponent) => {
                let value = self.linear(inner, scope, allowed)?;
                if !value.is_constant() {
                    self.not_linear(place);
                    return Err(Reported);
                }
                let power = value.constant.pow(*exponent, &self.budget);
                match self.exceeded(place, power)? {
                    Some(power) => Ok(Linear::number(
                        power,
                        value.dimension.map(|dimension| dimension.power(*exponent)),
                    )),
                    None => self.divides_by_zero(place),
                }
            }
        }
    }

    fn divides_by_zero<T>(&mut self, place: Span) -> Out<T> {
        self.error(
            place,
            "this divides by zero",
            "the divisor is zero for every value of its symbols",
        );
        Err(Reported)
    }

    fn not_linear(&mut self, place: Span) {
        self.error(
            place,
            "a response stands in a place where it is not linear",
            "write a sum of coefficient*voltage(…) and coefficient*current(…); for a quotient of two responses write ratio(x, y) with Vs",
        );
    }

    fn plus(&mut self, left: Linear, right: Linear, place: Span) -> Out<Linear> {
        self.same_dimension(left.dimension, right.dimension, "+ or -", place);
        if left.over.map(|over| over.0) != right.over.map(|over| over.0) {
            let is_zero = |linear: &Linear| linear.constant.is_zero() && linear.probes.is_empty();
            if !is_zero(&left) && !is_zero(&right) {
                self.error(
                    place,
                    "the terms are taken over different sources",
                    "write (voltage(a) + voltage(b)) / Vs",
                );
                return Err(Reported);
            }
        }
        let constant = left.constant.add(&right.constant, &self.budget);
        let mut sum = Linear {
            constant: self.exceeded(place, constant)?,
            probes: left.probes,
            drives: left.drives,
            over: left.over.or(right.over),
            dimension: left.dimension.or(right.dimension),
        };
        for (coefficient, probe) in right.probes {
            match sum.probes.iter_mut().find(|(_, found)| *found == probe) {
                Some((found, _)) => {
                    let added = found.add(&coefficient, &self.budget);
                    match added {
                        Ok(value) => *found = value,
                        Err(exceeded) => return self.exceeded(place, Err(exceeded)),
                    }
                }
                None => sum.probes.push((coefficient, probe)),
            }
        }
        for (coefficient, drive) in right.drives {
            match sum.drives.iter_mut().find(|(_, found)| *found == drive) {
                Some((found, _)) => {
                    let added = found.add(&coefficient, &self.budget);
                    match added {
                        Ok(value) => *found = value,
                        Err(exceeded) => return self.exceeded(place, Err(exceeded)),
                    }
                }
                None => sum.drives.push((coefficient, drive)),
            }
        }
        Ok(sum)
    }

    fn same_dimension(
        &mut self,
        left: Option<Dimension>,
        right: Option<Dimension>,
        sign: &str,
        place: Span,
    ) {
        if let (Some(a), Some(b)) = (left, right)
            && a != b
            && a.kelvin == b.kelvin
        {
            self.error(
                place,
                format!("the two sides of {sign} have unlike dimensions"),
                "resistances are added to resistances, products R*C to times, and so on",
            );
        }
    }
}

fn negated(mut linear: Linear) -> Linear {
    linear.constant = linear.constant.neg();
    for (coefficient, _) in &mut linear.probes {
        *coefficient = coefficient.neg();
    }
    for (coefficient, _) in &mut linear.drives {
        *coefficient = coefficient.neg();
    }
    linear
}
