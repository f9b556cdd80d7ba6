//! Names in expressions, and responses.

use super::*;

impl Lowering<'_> {
    /// The value a name stands for.
    pub(super) fn name_value(
        &mut self,
        name: &Name,
        scope: &Rc<Scope>,
        allowed: Allowed,
    ) -> Out<Linear> {
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
    pub(super) fn written_mutual(&mut self, name: &str) -> Option<Symbol> {
        let coupling = name.strip_prefix("M_")?;
        let network = self.builder.network();
        network
            .couplings()
            .iter()
            .any(|found| found.name == coupling)
            .then(|| self.builder.symbols().intern(name))
    }

    pub(super) fn drive_value(&self, drive: DriveId) -> Linear {
        let mut linear = Linear::number(Fraction::zero(), None);
        linear.drives.push((Fraction::one(), drive));
        linear
    }

    pub(super) fn symbol_value(&mut self, name: &str) -> Linear {
        let symbol = self.builder.symbols().intern(name);
        let dimension = self
            .builder
            .network()
            .facts(symbol)
            .and_then(|facts| facts.dimension);
        Linear::number(Fraction::symbol(symbol), dimension)
    }

    /// A parameter that was given no expression: a symbol `A1.R`, with a number as its nominal.
    pub(super) fn own_parameter(
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

    pub(super) fn voltage_of(&mut self, name: &Name, scope: &Rc<Scope>) -> Out<Probe> {
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
