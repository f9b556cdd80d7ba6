//! Questions and claims.

use super::*;

impl Reader<'_> {
    pub(super) fn derive(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
        let mut name = None;
        let mut question = None;
        let mut without = Vec::new();
        let mut text = String::new();
        for pair in inner {
            match pair.as_rule() {
                Rule::name => name = Some(self.name(pair)?),
                Rule::question => {
                    text = squeeze(&self.text[pair.as_span().start()..]);
                    let [inner] = take(pair.into_inner().collect());
                    question = Some(self.question(inner)?);
                }
                _ => {
                    let list = pair
                        .into_inner()
                        .find(|inner| inner.as_rule() == Rule::names);
                    without = self.names(list)?;
                }
            }
        }
        match (name, question) {
            (Some(name), Some(question)) => Ok(StatementKind::Derive {
                name,
                question,
                without,
                text,
            }),
            _ => Err(Box::new(Diagnostic::error(
                self.span(0, 1),
                "nothing is asked here",
            ))),
        }
    }

    pub(super) fn question(&self, pair: Pair<'_, Rule>) -> Read<Asked> {
        let rule = pair.as_rule();
        if rule == Rule::expression {
            return Ok(Asked::Expression(self.expression(pair)?));
        }
        let place = self.place(&pair);
        let inner: Vec<_> = pair
            .into_inner()
            .filter(|inner| !is_keyword(inner.as_rule()))
            .collect();
        match rule {
            Rule::impedance | Rule::admittance => {
                let nodes: Read<Vec<Name>> =
                    inner.into_iter().map(|node| self.name(node)).collect();
                let nodes = nodes?;
                if nodes.len() > 2 {
                    return Err(Box::new(
                        Diagnostic::error(place, "a port has two nodes")
                            .help("write impedance(a) or impedance(a, b)"),
                    ));
                }
                Ok(if rule == Rule::impedance {
                    Asked::Impedance(nodes)
                } else {
                    Asked::Admittance(nodes)
                })
            }
            Rule::ratio => {
                let [upper, lower, drive] = take(inner);
                Ok(Asked::Ratio(
                    self.expression(upper)?,
                    self.expression(lower)?,
                    self.name(drive)?,
                ))
            }
            Rule::return_ratio => {
                let [name] = take(inner);
                Ok(Asked::ReturnRatio(self.name(name)?))
            }
            Rule::first_order => {
                let [name, small] = take(inner);
                Ok(Asked::FirstOrder(self.name(name)?, self.expression(small)?))
            }
            _ => {
                let mut inner = inner.into_iter();
                let Some(name) = inner.next() else {
                    return Err(Box::new(Diagnostic::error(place, "a function is missing")));
                };
                let name = self.name(name)?;
                let mut steps = Vec::new();
                for step in inner {
                    let mut symbol = None;
                    let mut value = None;
                    for inner in step.into_inner() {
                        match inner.as_rule() {
                            Rule::name => symbol = Some(self.name(inner)?),
                            Rule::expression => value = Some(self.expression(inner)?),
                            _ => {}
                        }
                    }
                    if let Some(symbol) = symbol {
                        steps.push((symbol, value));
                    }
                }
                Ok(Asked::Limit(name, steps))
            }
        }
    }

    pub(super) fn claimed(&self, pair: Pair<'_, Rule>) -> Read<Claimed> {
        let rule = pair.as_rule();
        let place = self.place(&pair);
        let inner: Vec<_> = pair.into_inner().collect();
        if rule == Rule::stable_of {
            let within = inner.iter().any(|inner| inner.as_rule() == Rule::kw_within);
            let name = inner
                .into_iter()
                .find(|inner| inner.as_rule() == Rule::name);
            return match name {
                Some(name) => Ok(Claimed::Stable(self.name(name)?, within)),
                None => Err(Box::new(Diagnostic::error(place, "a name is missing"))),
            };
        }
        if rule == Rule::cancels_of {
            let mut name = None;
            let mut classes = Vec::new();
            for inner in inner {
                match inner.as_rule() {
                    Rule::name => name = Some(self.name(inner)?),
                    Rule::class => classes.push(match inner.as_str() {
                        "structural" => CancellationClass::Structural,
                        "matched" => CancellationClass::Matched,
                        _ => CancellationClass::Coincidental,
                    }),
                    _ => {}
                }
            }
            classes.sort_unstable();
            classes.dedup();
            return match name {
                Some(name) => Ok(Claimed::Cancels(name, classes)),
                None => Err(Box::new(Diagnostic::error(place, "a name is missing"))),
            };
        }
        if rule == Rule::coefficient_of {
            let [name, side, power, value] = take(inner);
            let power_place = self.place(&power);
            let power = power
                .as_str()
                .parse()
                .ok()
                .filter(|&power: &u32| power <= 100_000);
            return Ok(Claimed::Coefficient(
                self.name(name)?,
                if side.as_str() == "den" {
                    Side::Denominator
                } else {
                    Side::Numerator
                },
                power.ok_or_else(|| {
                    Box::new(Diagnostic::error(
                        power_place,
                        "this power of s is too large",
                    ))
                })?,
                self.expression(value)?,
            ));
        }
        let [first, second] = take(inner);
        let name = self.name(first)?;
        Ok(match rule {
            Rule::order_of => Claimed::Order(name, self.expression(second)?),
            Rule::static_of => Claimed::Static(name, self.expression(second)?),
            Rule::dc_of => Claimed::Dc(name, self.claimed_value(second)?),
            Rule::hf_of => Claimed::Hf(name, self.claimed_value(second)?),
            Rule::pole_of => Claimed::Pole(name, self.expression(second)?),
            Rule::zero_of => Claimed::Zero(name, self.expression(second)?),
            Rule::same_as => Claimed::Same(name, self.name(second)?),
            _ => Claimed::Equals(name, self.expression(second)?),
        })
    }

    pub(super) fn claimed_value(&self, pair: Pair<'_, Rule>) -> Read<Option<Expression>> {
        let [inner] = take(pair.into_inner().collect());
        if inner.as_rule() == Rule::kw_infinite {
            return Ok(None);
        }
        self.expression(inner).map(Some)
    }
}
