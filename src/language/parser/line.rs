//! Lines that build the network: paths, parts lists, relations, devices, modules, declarations.

use super::*;

impl Reader<'_> {
    pub(super) fn module(&self, inner: Vec<Pair<'_, Rule>>, place: Span) -> Read<Module> {
        let mut inner = inner.into_iter().peekable();
        let Some(name) = inner.next() else {
            return Err(Box::new(Diagnostic::error(place, "a module has a name")));
        };
        let name = self.name(name)?;
        let ports = match inner.next_if(|pair| pair.as_rule() == Rule::names) {
            Some(names) => self.names(Some(names))?,
            None => Vec::new(),
        };
        let mut parameters = Vec::new();
        for pair in inner {
            let mut parameter = Parameter {
                name: name.clone(),
                default: None,
                exactly: false,
            };
            for inner in pair.into_inner() {
                match inner.as_rule() {
                    Rule::name => parameter.name = self.name(inner)?,
                    Rule::kw_exactly => parameter.exactly = true,
                    _ => parameter.default = Some(self.expression(inner)?),
                }
            }
            parameters.push(parameter);
        }
        Ok(Module {
            name,
            ports,
            parameters,
            body: Vec::new(),
            place,
        })
    }

    pub(super) fn free(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
        let mut names = Vec::new();
        let mut value = None;
        let mut within = None;
        let mut real = false;
        for pair in inner {
            match pair.as_rule() {
                Rule::names => names = self.names(Some(pair))?,
                Rule::part_value => value = Some(self.part_value(pair)?),
                Rule::range => within = Some(self.range(pair)?),
                _ => real = true,
            }
        }
        Ok(StatementKind::Free {
            names,
            value,
            real,
            within,
        })
    }

    pub(super) fn assume(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
        let mut first = None;
        let mut chain = Vec::new();
        let mut sign = Compare::Less;
        for pair in inner {
            if pair.as_rule() == Rule::comparison {
                sign = match pair.as_str() {
                    "<" => Compare::Less,
                    ">" => Compare::Greater,
                    "<=" | "≤" => Compare::LessOrEqual,
                    _ => Compare::GreaterOrEqual,
                };
            } else {
                let expression = self.expression(pair)?;
                if first.is_none() {
                    first = Some(expression);
                } else {
                    chain.push((sign, expression));
                }
            }
        }
        match first {
            Some(first) => Ok(StatementKind::Assume(first, chain)),
            None => Err(Box::new(Diagnostic::error(
                self.span(0, 1),
                "nothing is assumed here",
            ))),
        }
    }

    pub(super) fn parts(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
        let mut listed = Vec::new();
        let mut value = None;
        for pair in inner {
            if pair.as_rule() == Rule::part_value {
                value = Some(self.part_value(pair)?);
                continue;
            }
            let [inner] = take(pair.into_inner().collect());
            listed.push(if inner.as_rule() == Rule::span_names {
                let [first, last] = take(inner.into_inner().collect());
                Listed::Span(self.name(first)?, self.name(last)?)
            } else {
                Listed::One(self.name(inner)?)
            });
        }
        let value = value.ok_or_else(|| {
            Box::new(Diagnostic::error(
                self.span(0, 1),
                "a value is missing here",
            ))
        })?;
        Ok(StatementKind::Parts(listed, value))
    }

    pub(super) fn relation(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
        let mut left = Vec::new();
        let mut right = None;
        let mut exactly = false;
        let mut deviation = None;
        for pair in inner {
            match pair.as_rule() {
                Rule::name => left.push(self.name(pair)?),
                Rule::kw_exactly => exactly = true,
                Rule::expression => right = Some(self.expression(pair)?),
                _ => deviation = Some(self.deviation(pair)?),
            }
        }
        let right = right.ok_or_else(|| {
            Box::new(Diagnostic::error(
                self.span(0, 1),
                "the right side is missing",
            ))
        })?;
        Ok(StatementKind::Relation {
            left,
            right,
            exactly,
            deviation,
        })
    }

    pub(super) fn option(&self, pair: Pair<'_, Rule>) -> Read<OptionValue> {
        let mut name = None;
        let mut value = None;
        let mut exactly = false;
        let place = self.place(&pair);
        for inner in pair.into_inner() {
            match inner.as_rule() {
                Rule::name => name = Some(self.name(inner)?),
                Rule::kw_exactly => exactly = true,
                _ => value = Some(self.expression(inner)?),
            }
        }
        match name {
            Some(name) => Ok(OptionValue {
                name,
                value,
                exactly,
            }),
            None => Err(Box::new(Diagnostic::error(place, "an option has a name"))),
        }
    }

    pub(super) fn is_statement(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
        let mut names = Vec::new();
        let mut kind = None;
        let mut terminals = None;
        let mut coils = Vec::new();
        let mut options = Vec::new();
        for pair in inner {
            match pair.as_rule() {
                Rule::names => names = self.names(Some(pair))?,
                Rule::kind => kind = pair.into_inner().next(),
                Rule::terminals => {
                    let list: Read<Vec<Terminal>> =
                        pair.into_inner().map(|pair| self.terminal(pair)).collect();
                    terminals = Some(list?);
                }
                Rule::coils => {
                    let list = pair
                        .into_inner()
                        .find(|inner| inner.as_rule() == Rule::names);
                    coils = self.names(list)?;
                }
                _ => {
                    for inner in pair.into_inner() {
                        if inner.as_rule() == Rule::option {
                            options.push(self.option(inner)?);
                        }
                    }
                }
            }
        }
        let kind = kind
            .ok_or_else(|| Box::new(Diagnostic::error(self.span(0, 1), "the kind is missing")))?;
        Ok(StatementKind::Is {
            names,
            kind: self.name(kind)?,
            terminals,
            coils,
            options,
        })
    }

    pub(super) fn terminal(&self, pair: Pair<'_, Rule>) -> Read<Terminal> {
        let place = self.place(&pair);
        let mut name = String::new();
        let mut node = None;
        for inner in pair.into_inner() {
            if inner.as_rule() == Rule::terminal_name {
                name = one_letter(inner.as_str()).replace('−', "-");
            } else {
                node = Some(self.name(inner)?);
            }
        }
        Ok(Terminal { name, node, place })
    }

    pub(super) fn path(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
        let mut nodes = Vec::new();
        let mut links = Vec::new();
        for pair in inner {
            if pair.as_rule() == Rule::node {
                nodes.push(self.name(pair)?);
                continue;
            }
            let [inner] = take(pair.into_inner().collect());
            links.push(match inner.as_rule() {
                Rule::joined => Link::Join,
                _ => Link::Part(self.group(inner)?),
            });
        }
        Ok(StatementKind::Path(nodes, links))
    }

    pub(super) fn group(&self, pair: Pair<'_, Rule>) -> Read<Group> {
        match pair.as_rule() {
            Rule::designator => {
                let mut name = None;
                let mut value = None;
                let place = self.place(&pair);
                for inner in pair.into_inner() {
                    if inner.as_rule() == Rule::name {
                        name = Some(self.name(inner)?);
                    } else {
                        value = Some(self.part_value(inner)?);
                    }
                }
                let name =
                    name.ok_or_else(|| Box::new(Diagnostic::error(place, "a part has a name")))?;
                Ok(Group::One(name, value))
            }
            Rule::group => {
                let [inner] = take(pair.into_inner().collect());
                self.group(inner)
            }
            rule => {
                let mut members = Vec::new();
                for inner in pair.into_inner() {
                    if inner.as_rule() != Rule::beside {
                        members.push(self.group(inner)?);
                    }
                }
                Ok(if members.len() == 1 {
                    members.remove(0)
                } else if rule == Rule::series {
                    Group::Series(members)
                } else {
                    Group::Parallel(members)
                })
            }
        }
    }
}
