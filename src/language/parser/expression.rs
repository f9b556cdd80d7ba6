//! Expressions.

use super::*;

impl Reader<'_> {
    pub(super) fn call(&self, pair: Pair<'_, Rule>) -> Read<ExpressionNode> {
        let place = self.place(&pair);
        let mut is_voltage = false;
        let mut names = Vec::new();
        for inner in pair.into_inner() {
            if inner.as_rule() == Rule::call_word {
                is_voltage = inner.as_str() == "voltage";
            } else {
                names.push(self.name(inner)?);
            }
        }
        if is_voltage && names.len() <= 2 {
            return Ok(ExpressionNode::Voltage(names));
        }
        if !is_voltage && names.len() == 1 {
            return Ok(ExpressionNode::Current(names.remove(0)));
        }
        Err(Box::new(if is_voltage {
            Diagnostic::error(place, "a voltage stands between two nodes")
                .help("write voltage(a), voltage(a, b) or voltage(R1)")
        } else {
            Diagnostic::error(place, "a current flows in one part").help("write current(R1)")
        }))
    }

    pub(super) fn expression(&self, pair: Pair<'_, Rule>) -> Read<Expression> {
        let place = self.place(&pair);
        let node = match pair.as_rule() {
            Rule::number => ExpressionNode::Number(self.literal(pair)?),
            Rule::name => ExpressionNode::Name(self.name(pair)?),
            Rule::call => self.call(pair)?,
            Rule::grouped => {
                let [inner] = take(pair.into_inner().collect());
                return self.expression(inner);
            }
            Rule::power => return self.power(pair),
            Rule::parallel => {
                let members: Vec<_> = pair
                    .into_inner()
                    .filter(|inner| inner.as_rule() != Rule::beside)
                    .collect();
                let alone = members.len() == 1;
                let mut read = Vec::with_capacity(members.len());
                for member in members {
                    if !alone && has_power(&member) {
                        return Err(Box::new(self.mixed(place)));
                    }
                    read.push(self.expression(member)?);
                }
                if alone {
                    return Ok(read.remove(0));
                }
                ExpressionNode::Parallel(read)
            }
            Rule::signed => return self.signed(pair),
            Rule::product => return self.product(pair),
            _ => {
                let mut terms = Vec::new();
                let mut minus = false;
                for inner in pair.into_inner() {
                    match inner.as_rule() {
                        Rule::minus => minus = true,
                        Rule::plus => minus = false,
                        _ => terms.push((minus, self.expression(inner)?)),
                    }
                }
                if terms.len() == 1 {
                    return Ok(terms.remove(0).1);
                }
                ExpressionNode::Sum(terms)
            }
        };
        Ok(Expression { node, place })
    }

    pub(super) fn power(&self, pair: Pair<'_, Rule>) -> Read<Expression> {
        let place = self.place(&pair);
        let mut inner = pair
            .into_inner()
            .filter(|inner| inner.as_rule() != Rule::power_sign);
        let Some(base) = inner.next() else {
            return Err(Box::new(Diagnostic::error(
                place,
                "a value is missing here",
            )));
        };
        let base = self.expression(base)?;
        let Some(exponent) = inner.next() else {
            return Ok(base);
        };
        let exponent_place = self.place(&exponent);
        let text = exponent.as_str().replace('−', "-").replace('+', "");
        let value: i32 = text.parse().unwrap_or(i32::MAX);
        if !(-MAX_POWER..=MAX_POWER).contains(&value) {
            return Err(Box::new(
                Diagnostic::error(exponent_place, format!("exponents go up to {MAX_POWER}"))
                    .help("write a smaller whole exponent"),
            ));
        }
        Ok(Expression {
            node: ExpressionNode::Power(Box::new(base), value),
            place,
        })
    }

    pub(super) fn signed(&self, pair: Pair<'_, Rule>) -> Read<Expression> {
        let place = self.place(&pair);
        let mut negative = false;
        let mut has_sign = false;
        let mut value = None;
        for inner in pair.into_inner() {
            match inner.as_rule() {
                Rule::minus => {
                    negative = !negative;
                    has_sign = true;
                }
                Rule::plus => has_sign = true,
                _ => {
                    if has_sign && is_parallel(&inner) {
                        return Err(Box::new(self.mixed(place)));
                    }
                    value = Some(self.expression(inner)?);
                }
            }
        }
        let value =
            value.ok_or_else(|| Box::new(Diagnostic::error(place, "a value is missing here")))?;
        if !negative {
            return Ok(value);
        }
        Ok(Expression {
            node: ExpressionNode::Negate(Box::new(value)),
            place,
        })
    }

    pub(super) fn product(&self, pair: Pair<'_, Rule>) -> Read<Expression> {
        let place = self.place(&pair);
        let inner: Vec<_> = pair.into_inner().collect();
        let alone = inner.len() == 1;
        let mut factors = Vec::new();
        let mut over = false;
        for pair in inner {
            match pair.as_rule() {
                Rule::times => over = false,
                Rule::over => over = true,
                _ => {
                    if !alone && pair.clone().into_inner().any(|inner| is_parallel(&inner)) {
                        return Err(Box::new(self.mixed(place)));
                    }
                    factors.push((over, self.expression(pair)?));
                }
            }
        }
        if factors.len() == 1 {
            return Ok(factors.remove(0).1);
        }
        Ok(Expression {
            node: ExpressionNode::Product(factors),
            place,
        })
    }

    /// `||` beside a stronger or weaker sign without parentheses: both readings are offered.
    pub(super) fn mixed(&self, place: Span) -> Diagnostic {
        let start = place.start as usize - self.base;
        let end = place.end as usize - self.base;
        let text = self.text[start..end].replace('∥', "||");
        let (first, second) = mistake::both_readings(&text);
        Diagnostic::error(place, "|| beside *, /, ^ or a sign can be read in two ways")
            .help(format!("write {first} or {second}"))
    }
}

/// Whether `||` stands directly in it.
fn is_parallel(pair: &Pair<'_, Rule>) -> bool {
    pair.as_rule() == Rule::parallel
        && pair
            .clone()
            .into_inner()
            .any(|inner| inner.as_rule() == Rule::beside)
}

fn has_power(pair: &Pair<'_, Rule>) -> bool {
    pair.as_rule() == Rule::power
        && pair
            .clone()
            .into_inner()
            .any(|inner| inner.as_rule() == Rule::power_sign)
}
