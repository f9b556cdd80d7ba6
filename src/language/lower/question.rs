//! Questions, claims, initial values.

use std::rc::Rc;

use crate::algebra::{Fraction, Symbol};
use crate::language::expand::{Scope, plain};
use crate::language::lower::expression::{Allowed, Linear};
use crate::language::lower::{Lowering, What};
use crate::language::nearest::nearest;
use crate::language::syntax::{Asked, Claimed, Expression, Name};
use crate::network::{
    Ask, Assertion, Claim, ClaimedValue, Combination, DriveId, ElementId, Kind, LimitPoint, NodeId,
    Origin, Port, Question, Start, Subject,
};
use crate::source::Span;

const FUNCTIONS: Allowed = Allowed {
    responses: false,
    drives: false,
    functions: true,
};

const RESPONSES: Allowed = Allowed {
    responses: true,
    drives: true,
    functions: true,
};

impl Lowering<'_> {
    pub(crate) fn derive(
        &mut self,
        name: &Name,
        asked: &Asked,
        without: &[Name],
        text: String,
        place: Span,
    ) {
        let own = plain(name);
        self.reserved(&own, name.place);
        let top = Rc::new(Scope::default());
        let ask = self.ask(asked, &top, place);
        let without = self.taken_out(without, &top);
        if !self.enter(&own, What::Derived, name.place) {
            return;
        }
        let symbol = self.new_symbol(&own, Origin::Derived, None, name.place);
        let (Some(ask), Some(without)) = (ask, without) else {
            return;
        };
        if !without.is_empty()
            && matches!(
                ask,
                Ask::Function(_) | Ask::Limit { .. } | Ask::FirstOrder { .. }
            )
        {
            self.error(
                place,
                "a function of functions has no parts to take out",
                "put without … into the lines of the functions it is made of",
            );
            return;
        }
        self.builder.question(Question {
            name: own,
            symbol,
            ask,
            without,
            text,
            place,
        });
    }

    fn taken_out(&mut self, names: &[Name], scope: &Scope) -> Option<Vec<ElementId>> {
        let mut parts = Vec::new();
        let mut good = true;
        for name in names {
            let own = scope.own(&plain(name));
            match self.names.get(&own).map(|entry| entry.what.clone()) {
                Some(What::Part(id)) => parts.push(id),
                Some(What::Device(id)) => {
                    parts.extend(self.builder.network().device(id).elements.iter().copied());
                }
                _ => match self.device_part(&own) {
                    Some(id) => parts.push(id),
                    None => {
                        self.unknown_part(name, scope);
                        good = false;
                    }
                },
            }
        }
        good.then_some(parts)
    }

    fn ask(&mut self, asked: &Asked, scope: &Rc<Scope>, place: Span) -> Option<Ask> {
        match asked {
            Asked::Impedance(nodes) => self.port(nodes, scope, place).map(Ask::Impedance),
            Asked::Admittance(nodes) => self.port(nodes, scope, place).map(Ask::Admittance),
            Asked::Ratio(upper, lower, drive) => {
                let upper = self.combination(upper, scope);
                let lower = self.combination(lower, scope);
                let drive = self.drive(drive, scope);
                Some(Ask::Ratio {
                    upper: upper?,
                    lower: lower?,
                    drive: drive?,
                })
            }
            Asked::ReturnRatio(name) => self.return_ratio(name, scope),
            Asked::FirstOrder(name, small) => {
                let function = self.function(name);
                let small = self.linear(small, scope, FUNCTIONS).ok();
                Some(Ask::FirstOrder {
                    function: function?,
                    small: small?.constant,
                })
            }
            Asked::Limit(name, steps) => {
                let function = self.function(name);
                let mut read = Vec::new();
                for (symbol, value) in steps {
                    let found = self
                        .linear(
                            &Expression {
                                node: crate::language::syntax::ExpressionNode::Name(symbol.clone()),
                                place: symbol.place,
                            },
                            scope,
                            FUNCTIONS,
                        )
                        .ok()?
                        .constant
                        .as_symbol()?;
                    let point = match value {
                        None => LimitPoint::Infinite,
                        Some(value) => {
                            LimitPoint::Value(self.linear(value, scope, FUNCTIONS).ok()?.constant)
                        }
                    };
                    read.push((found, point));
                }
                Some(Ask::Limit {
                    function: function?,
                    steps: read,
                })
            }
            Asked::Expression(expression) => self.transfer(expression, scope),
        }
    }

    fn port(&mut self, nodes: &[Name], scope: &Scope, place: Span) -> Option<Port> {
        let from = self.node_of(nodes.first()?, scope).ok()?;
        let to = match nodes.get(1) {
            Some(node) => self.node_of(node, scope).ok()?,
            None => NodeId::GROUND,
        };
        if from == to {
            self.error(
                place,
                "the two nodes of this port are one node",
                "ask between two different nodes",
            );
            return None;
        }
        Some(Port { from, to })
    }

    fn drive(&mut self, name: &Name, scope: &Scope) -> Option<DriveId> {
        let own = scope.own(&plain(name));
        if let Some(&drive) = self.drive_ids.get(&own) {
            return Some(drive);
        }
        let help = nearest(&own, self.drive_ids.keys().map(String::as_str)).map_or_else(
            || "ask over an independent source or a declared drive".to_owned(),
            |near| format!("did you mean {near}?"),
        );
        self.error(name.place, format!("{own} is no independent source"), help);
        None
    }

    fn combination(&mut self, expression: &Expression, scope: &Rc<Scope>) -> Option<Combination> {
        let linear = self.linear(expression, scope, RESPONSES).ok()?;
        if linear.probes.is_empty() || !linear.constant.is_zero() || linear.over.is_some() {
            self.error(
                expression.place,
                "a response is expected here",
                "write voltage(a), current(R1) or a linear combination of them",
            );
            return None;
        }
        self.responses(linear, expression.place)
    }

    fn responses(&mut self, linear: Linear, place: Span) -> Option<Combination> {
        if linear
            .probes
            .iter()
            .any(|(coefficient, _)| coefficient.contains(Symbol::S))
        {
            self.error(
                place,
                "s stands in the coefficient of a response",
                "derive the function without it and multiply in a second derive line",
            );
            return None;
        }
        Some(Combination {
            terms: linear
                .probes
                .into_iter()
                .filter(|(coefficient, _)| !coefficient.is_zero())
                .collect(),
        })
    }

    fn transfer(&mut self, expression: &Expression, scope: &Rc<Scope>) -> Option<Ask> {
        let linear = self.linear(expression, scope, RESPONSES).ok()?;
        if linear.is_constant() {
            return Some(Ask::Function(linear.constant));
        }
        let Some((drive, over_place)) = linear.over else {
            let source = self
                .drive_ids
                .keys()
                .next()
                .cloned()
                .unwrap_or_else(|| "Vs".to_owned());
            self.error(
                expression.place,
                "this response is not taken over a source",
                format!("divide by the source: voltage(out) / {source}"),
            );
            return None;
        };
        if linear.probes.is_empty() || !linear.constant.is_zero() || !linear.drives.is_empty() {
            self.error(
                over_place,
                "only responses can be taken over a source",
                "write (voltage(a) - 2*voltage(b)) / Vs",
            );
            return None;
        }
        let response = self.responses(linear, expression.place)?;
        Some(Ask::Transfer { response, drive })
    }

    fn return_ratio(&mut self, name: &Name, scope: &Scope) -> Option<Ask> {
        let own = scope.own(&plain(name));
        let candidates: Vec<ElementId> = match self.names.get(&own).map(|entry| entry.what.clone())
        {
            Some(What::Part(id)) => vec![id],
            Some(What::Device(id)) => self.builder.network().device(id).elements.clone(),
            _ => {
                self.unknown_part(name, scope);
                return None;
            }
        };
        let network = self.builder.network();
        let has_gain = |id: &ElementId| match &network.element(*id).kind {
            Kind::Source(source) => source.controls.iter().any(|control| control.gain),
            Kind::Amplifier { gain, .. } => gain.is_some(),
            Kind::Conveyor { .. } => true,
            _ => false,
        };
        let ideal = candidates.iter().any(|id| {
            matches!(
                network.element(*id).kind,
                Kind::Amplifier { gain: None, .. } | Kind::Nullor { .. }
            )
        });
        let parts: Vec<ElementId> = candidates.iter().copied().filter(has_gain).collect();
        if ideal {
            self.error(
                name.place,
                format!("{own} is ideal: T is infinite"),
                format!("give a gain: {own} is opamp(…) with gain = A0"),
            );
            return None;
        }
        if parts.is_empty() {
            self.error(
                name.place,
                format!("{own} has no gain to scale"),
                "ask around a controlled source or an amplifier of finite gain",
            );
            return None;
        }
        Some(Ask::ReturnRatio(parts))
    }

    /// An earlier derived function.
    fn function(&mut self, name: &Name) -> Option<Symbol> {
        let own = plain(name);
        if matches!(
            self.names.get(&own).map(|entry| &entry.what),
            Some(What::Derived)
        ) {
            return self.builder.symbols().find(&own);
        }
        let known: Vec<String> = self
            .names
            .iter()
            .filter(|(_, entry)| matches!(entry.what, What::Derived))
            .map(|(name, _)| name.clone())
            .collect();
        let help = match nearest(&own, known.iter().map(String::as_str)) {
            Some(near) => format!("did you mean {near}?"),
            None if known.is_empty() => "derive it first: derive H = voltage(out) / Vs".to_owned(),
            None => format!("derived functions are {}", known.join(", ")),
        };
        self.error(
            name.place,
            format!("there is no derived function {own}"),
            help,
        );
        None
    }

    pub(crate) fn claim(&mut self, claimed: Claimed, text: String, place: Span) {
        let scope = Rc::new(Scope::default());
        if let Some(assertion) = self.assertion(claimed, &scope) {
            self.builder.claim(Claim {
                assertion,
                text,
                place,
            });
        }
    }

    fn claimed_expression(
        &mut self,
        expression: &Expression,
        scope: &Rc<Scope>,
    ) -> Option<Fraction> {
        Some(self.linear(expression, scope, FUNCTIONS).ok()?.constant)
    }

    fn claimed_value(
        &mut self,
        expression: Option<Expression>,
        scope: &Rc<Scope>,
    ) -> Option<ClaimedValue> {
        match expression {
            None => Some(ClaimedValue::Infinite),
            Some(expression) => Some(ClaimedValue::Value(self.without_s(&expression, scope)?)),
        }
    }

    fn without_s(&mut self, expression: &Expression, scope: &Rc<Scope>) -> Option<Fraction> {
        let value = self.claimed_expression(expression, scope)?;
        if value.contains(Symbol::S) {
            self.error(
                expression.place,
                "s stands in a value that does not depend on it",
                "write the value in parts and symbols alone",
            );
            return None;
        }
        Some(value)
    }

    fn number(
        &mut self,
        expression: &Expression,
        scope: &Rc<Scope>,
    ) -> Option<crate::algebra::Rational> {
        let value = self.claimed_expression(expression, scope)?;
        let whole = |number: &crate::algebra::Rational| number.is_integer() && number.signum() >= 0;
        let number = value.as_rational().filter(whole);
        if number.is_none() {
            self.error(
                expression.place,
                "an order is a whole number",
                "write claim order(H) = 2",
            );
        }
        number
    }

    fn subject(&mut self, name: &Name) -> Option<Subject> {
        if plain(name) == "network" && !self.names.contains_key("network") {
            return Some(Subject::Network);
        }
        self.function(name).map(Subject::Function)
    }

    fn assertion(&mut self, claimed: Claimed, scope: &Rc<Scope>) -> Option<Assertion> {
        Some(match claimed {
            Claimed::Equals(name, value) => {
                let function = self.function(&name);
                let value = self.claimed_expression(&value, scope)?;
                Assertion::Equals(function?, value)
            }
            Claimed::Order(name, value) => {
                let subject = self.subject(&name);
                Assertion::Order(subject?, self.number(&value, scope)?)
            }
            Claimed::Static(name, value) => {
                if plain(&name) != "network" {
                    self.error(
                        name.place,
                        "static modes belong to the network",
                        "write claim static(network) = 1",
                    );
                    return None;
                }
                Assertion::Static(self.number(&value, scope)?)
            }
            Claimed::Dc(name, value) => {
                let function = self.function(&name);
                let value = self.claimed_value(value, scope)?;
                Assertion::Dc(function?, value)
            }
            Claimed::Hf(name, value) => {
                let function = self.function(&name);
                let value = self.claimed_value(value, scope)?;
                Assertion::Hf(function?, value)
            }
            Claimed::Coefficient(name, side, power, value) => {
                let function = self.function(&name);
                let value = self.without_s(&value, scope)?;
                Assertion::Coefficient {
                    function: function?,
                    side,
                    power,
                    value,
                }
            }
            Claimed::Pole(name, value) => {
                let function = self.function(&name);
                let value = self.without_s(&value, scope)?;
                Assertion::Pole(function?, value)
            }
            Claimed::Zero(name, value) => {
                let function = self.function(&name);
                let value = self.without_s(&value, scope)?;
                Assertion::Zero(function?, value)
            }
            Claimed::Same(first, second) => {
                let first = self.function(&first);
                let second = self.function(&second);
                Assertion::Same(first?, second?)
            }
            Claimed::Cancels(name, classes) => Assertion::Cancels(self.function(&name)?, classes),
            Claimed::Stable(name, within_tolerance) => Assertion::Stable {
                subject: self.subject(&name)?,
                within_tolerance,
            },
        })
    }

    pub(crate) fn start(
        &mut self,
        part: &Name,
        is_voltage: bool,
        value: &Expression,
        scope: &Rc<Scope>,
        place: Span,
    ) {
        let own = scope.own(&plain(part));
        let Some(What::Part(id)) = self.names.get(&own).map(|entry| entry.what.clone()) else {
            self.unknown_part(part, scope);
            return;
        };
        let fits = match self.builder.network().element(id).kind {
            Kind::Capacitor(..) => is_voltage,
            Kind::Inductor(..) => !is_voltage,
            _ => false,
        };
        if !fits {
            self.error(
                part.place,
                format!("{own} does not start with this quantity"),
                "capacitors start with a voltage, inductors with a current",
            );
            return;
        }
        let Ok(value) = self.fraction(value, scope) else {
            return;
        };
        self.builder.start(Start {
            element: id,
            value,
            place,
        });
    }
}
