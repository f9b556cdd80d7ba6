//! Expressions to exact fractions, with dimensions, warnings and linear responses.

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

    fn product(
        &mut self,
        factors: &[(bool, Expression)],
        scope: &Rc<Scope>,
        allowed: Allowed,
        place: Span,
    ) -> Out<Linear> {
        let mut product = Linear::number(Fraction::one(), Some(Dimension::NUMBER));
        let mut hertz = false;
        let mut has_s = false;
        let mut has_pi = false;
        let plain_number = |factor: &Expression| match &factor.node {
            ExpressionNode::Number(literal) => literal.dimension.is_none(),
            _ => false,
        };
        // A number without a unit may be a value in SI units; as a factor it is a pure number.
        let all_plain = factors.iter().all(|(_, factor)| plain_number(factor));
        for (over, factor) in factors {
            let mut value = self.linear(factor, scope, allowed)?;
            if plain_number(factor) && !all_plain {
                value.dimension = Some(Dimension::NUMBER);
            }
            if let ExpressionNode::Name(name) = &factor.node {
                let text = plain(name);
                has_s |= text == "s";
                has_pi |= text == "pi";
                hertz |= self.is_in_hertz(&scope.own(&text));
            }
            product = self.times(product, value, *over, factor.place, place)?;
        }
        if hertz && has_s && !has_pi {
            self.warning(
                place,
                "a frequency in hertz stands beside s without 2*pi",
                "s is in rad/s: write 2*pi*f0",
            );
        }
        Ok(product)
    }

    fn is_in_hertz(&self, name: &str) -> bool {
        let network = self.builder.network();
        network
            .symbols()
            .find(name)
            .and_then(|symbol| network.facts(symbol))
            .is_some_and(|facts| facts.in_hertz)
    }

    fn times(
        &mut self,
        left: Linear,
        right: Linear,
        over: bool,
        factor_place: Span,
        place: Span,
    ) -> Out<Linear> {
        let dimension = match (left.dimension, right.dimension) {
            (Some(a), Some(b)) => Some(a.times(if over { b.power(-1) } else { b })),
            _ => None,
        };
        if over {
            return self.divided(left, right, dimension, factor_place, place);
        }
        let (linear, constant) = if right.is_constant() {
            (left, right.constant)
        } else if left.is_constant() {
            (right, left.constant)
        } else {
            self.not_linear(factor_place);
            return Err(Reported);
        };
        self.scaled(linear, &constant, dimension, place)
    }

    fn divided(
        &mut self,
        left: Linear,
        right: Linear,
        dimension: Option<Dimension>,
        factor_place: Span,
        place: Span,
    ) -> Out<Linear> {
        if let ([], [(coefficient, drive)]) = (right.probes.as_slice(), right.drives.as_slice()) {
            let is_drive = right.constant.is_zero() && right.over.is_none();
            if is_drive && left.over.is_none() && left.drives.is_empty() {
                let Some(inverse) = coefficient.recip() else {
                    return self.divides_by_zero(factor_place);
                };
                let mut over = self.scaled(left, &inverse, dimension, place)?;
                over.over = Some((*drive, factor_place));
                return Ok(over);
            }
        }
        if !right.is_constant() {
            self.not_linear(factor_place);
            return Err(Reported);
        }
        let Some(inverse) = right.constant.recip() else {
            return self.divides_by_zero(factor_place);
        };
        self.scaled(left, &inverse, dimension, place)
    }

    fn scaled(
        &mut self,
        mut linear: Linear,
        factor: &Fraction,
        dimension: Option<Dimension>,
        place: Span,
    ) -> Out<Linear> {
        linear.dimension = dimension;
        let constant = linear.constant.mul(factor, &self.budget);
        linear.constant = self.exceeded(place, constant)?;
        for (coefficient, _) in &mut linear.probes {
            let product = coefficient.mul(factor, &self.budget);
            match product {
                Ok(value) => *coefficient = value,
                Err(exceeded) => return self.exceeded(place, Err(exceeded)),
            }
        }
        for (coefficient, _) in &mut linear.drives {
            let product = coefficient.mul(factor, &self.budget);
            match product {
                Ok(value) => *coefficient = value,
                Err(exceeded) => return self.exceeded(place, Err(exceeded)),
            }
        }
        Ok(linear)
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

    /// The value a name stands for.
    fn name_value(&mut self, name: &Name, scope: &Rc<Scope>, allowed: Allowed) -> Out<Linear> {
        let text = plain(name);
        if text == "s" {
            return Ok(Linear::number(
                Fraction::symbol(Symbol::S),
                Some(Dimension::PER_SECOND),
            ));
        }
        if text == "pi" {
            return Ok(Linear::number(
                Fraction::symbol(Symbol::PI),
                Some(Dimension::NUMBER),
            ));
        }
        if let Some(given) = scope.parameters.get(&text).cloned() {
            return match given {
                Given::Outer(expression, outer) | Given::Exactly(expression, outer) => {
                    self.linear(&expression, &outer, allowed)
                }
                Given::Own(default) => self.own_parameter(&text, default, scope, name.place),
            };
        }
        let global = scope.own(&text);
        // `A1.R` is the parameter of an instance that has a symbol of its own.
        if let Some((instance, parameter)) = global.rsplit_once('.')
            && let Some(inner) = self.instances.get(instance).cloned()
            && inner.parameters.contains_key(parameter)
            && !self.names.contains_key(&global)
        {
            let inner_name = Name {
                parts: vec![crate::language::syntax::NamePart::Text(
                    parameter.to_owned(),
                )],
                place: name.place,
            };
            return self.name_value(&inner_name, &inner, allowed);
        }
        self.used.insert(global.clone());
        let Some(entry) = self.names.get(&global).cloned() else {
            if let Some(symbol) = self.written_mutual(&global) {
                return Ok(Linear::number(
                    Fraction::symbol(symbol),
                    Some(Dimension::HENRY),
                ));
            }
            self.unknown(&global, name.place, scope);
            return Err(Reported);
        };
        match entry.what {
            What::Part(id) => {
                let element = self.builder.network().element(id);
                if element.value().is_some() {
                    return Ok(self.symbol_value(&global));
                }
                let is_source = matches!(element.kind, Kind::Source(_));
                if allowed.drives
                    && is_source
                    && let Some(&drive) = self.drive_ids.get(&global)
                {
                    return Ok(self.drive_value(drive));
                }
                let help = if is_source && allowed.drives {
                    format!("{text} is a controlled source; ask over an independent source")
                } else if is_source {
                    format!(
                        "a source has no value in an expression; ask voltage({text}) or current({text})"
                    )
                } else {
                    format!("ask current({text})")
                };
                self.error(name.place, format!("{text} cannot stand here"), help);
                Err(Reported)
            }
            What::Drive(drive) if allowed.drives => Ok(self.drive_value(drive)),
            What::Derived if allowed.functions => Ok(self.symbol_value(&global)),
            What::Symbol | What::Set => Ok(self.symbol_value(&global)),
            What::Derived => {
                self.error(
                    name.place,
                    format!("{text} is a derived function"),
                    "derived functions stand in later derive lines and in claims",
                );
                Err(Reported)
            }
            What::Drive(_) | What::Device(_) | What::Coupling => {
                self.error(
                    name.place,
                    format!("{text} is no value"),
                    "values are made of parts, free symbols and relations",
                );
                Err(Reported)
            }
        }
    }

    /// `M_T1` of a coupling given by its factor.
    fn written_mutual(&mut self, name: &str) -> Option<Symbol> {
        let coupling = name.strip_prefix("M_")?;
        let network = self.builder.network();
        network
            .couplings()
            .iter()
            .any(|found| found.name == coupling)
            .then(|| self.builder.symbols().intern(name))
    }

    fn drive_value(&self, drive: DriveId) -> Linear {
        let mut linear = Linear::number(Fraction::zero(), None);
        linear.drives.push((Fraction::one(), drive));
        linear
    }

    fn symbol_value(&mut self, name: &str) -> Linear {
        let symbol = self.builder.symbols().intern(name);
        let dimension = self
            .builder
            .network()
            .facts(symbol)
            .and_then(|facts| facts.dimension);
        Linear::number(Fraction::symbol(symbol), dimension)
    }

    /// A parameter that was given no expression: a symbol `A1.R`, with a number as its nominal.
    fn own_parameter(
        &mut self,
        text: &str,
        default: Option<Expression>,
        scope: &Rc<Scope>,
        place: Span,
    ) -> Out<Linear> {
        let global = scope.own(text);
        if !self.names.contains_key(&global) {
            let place = default.as_ref().map_or(place, |value| value.place);
            self.enter(&global, What::Symbol, place);
            let symbol = self.new_symbol(&global, Origin::Parameter, None, place);
            if let Some(default) = default {
                let value = self.linear(&default, scope, VALUES)?;
                match value.constant.as_rational() {
                    Some(number) => {
                        if let Some(facts) = self.builder.facts_mut(symbol) {
                            facts.nominal = Some(number);
                            facts.dimension = value.dimension;
                        }
                    }
                    None => {
                        self.error(
                            default.place,
                            "the default of a parameter is a number",
                            "give the expression in the line of the instance",
                        );
                        return Err(Reported);
                    }
                }
            }
        }
        Ok(self.symbol_value(&global))
    }

    /// A response.
    pub(crate) fn probe(&mut self, expression: &Expression, scope: &Rc<Scope>) -> Out<Probe> {
        match &expression.node {
            ExpressionNode::Voltage(names) => match names.as_slice() {
                [one] => self.voltage_of(one, scope),
                [a, b] => {
                    let from = self.node_of(a, scope)?;
                    let to = self.node_of(b, scope)?;
                    Ok(Probe::Voltage(Port { from, to }))
                }
                _ => Err(Reported),
            },
            ExpressionNode::Current(name) => {
                let text = plain(name);
                let global = scope.own(&text);
                match self.names.get(&global).map(|entry| entry.what.clone()) {
                    Some(What::Part(id)) => Ok(Probe::Current(id)),
                    Some(What::Device(_)) => {
                        self.error(
                            name.place,
                            format!("{text} has more than two terminals; it has no single current"),
                            "put a meter in the lead: a -m1- b, m1 is meter, current(m1)",
                        );
                        Err(Reported)
                    }
                    _ => {
                        if let Some(id) = self.device_part(&global) {
                            return Ok(Probe::Current(id));
                        }
                        self.unknown_part(name, scope);
                        Err(Reported)
                    }
                }
            }
            _ => {
                self.not_linear(expression.place);
                Err(Reported)
            }
        }
    }

    /// A part of a device by its symbol, such as rpi_Q1.
    pub(crate) fn device_part(&self, name: &str) -> Option<crate::network::ElementId> {
        self.builder
            .network()
            .elements()
            .find(|(_, element)| {
                element.device.is_some() && element.name == name && element.port().is_some()
            })
            .map(|(id, _)| id)
    }

    pub(crate) fn unknown_part(&mut self, name: &Name, scope: &Scope) {
        let text = plain(name);
        let known: Vec<String> = self
            .names
            .iter()
            .filter(|(_, entry)| matches!(entry.what, What::Part(_)))
            .map(|(name, _)| name.clone())
            .collect();
        let near = crate::language::nearest::nearest(&text, known.iter().map(String::as_str));
        let help = near.map_or_else(
            || "parts stand on paths: a -R1- b".to_owned(),
            |near| format!("did you mean {near}?"),
        );
        self.error(name.place, format!("there is no part {text}"), help);
        self.through(scope);
    }

    pub(crate) fn node_of(&mut self, name: &Name, scope: &Scope) -> Out<NodeId> {
        match self.find_node(&plain(name), scope) {
            Some(node) => Ok(node),
            None => {
                self.unknown_node(name, scope);
                Err(Reported)
            }
        }
    }

    fn voltage_of(&mut self, name: &Name, scope: &Rc<Scope>) -> Out<Probe> {
        let text = plain(name);
        let global = scope.own(&text);
        let part = match self.names.get(&global).map(|entry| entry.what.clone()) {
            Some(What::Part(id)) => Some(id),
            _ => self.device_part(&global),
        };
        let node = self.find_node(&text, scope);
        match (part, node) {
            (Some(_), Some(_)) => {
                let error = Diagnostic::error(name.place, format!("{text} is a node and a part"))
                    .help(format!(
                        "write voltage({text}, ground) for the node, or rename one of them"
                    ));
                self.messages.push(error);
                Err(Reported)
            }
            (Some(id), None) => match self.builder.network().element(id).port() {
                Some(port) => Ok(Probe::Voltage(port)),
                None => Err(Reported),
            },
            (None, Some(node)) => Ok(Probe::Voltage(Port {
                from: node,
                to: NodeId::GROUND,
            })),
            (None, None) => {
                let known: Vec<String> = self
                    .node_index
                    .keys()
                    .chain(self.names.keys())
                    .cloned()
                    .collect();
                let near =
                    crate::language::nearest::nearest(&text, known.iter().map(String::as_str));
                let help = near.map_or_else(
                    || "nodes stand in paths and in the parentheses of devices".to_owned(),
                    |near| format!("did you mean {near}?"),
                );
                self.error(name.place, format!("there is no node or part {text}"), help);
                self.through(scope);
                Err(Reported)
            }
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
