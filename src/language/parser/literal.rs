//! Numbers, tolerances, ranges, values of the parts list.

use super::*;

impl Reader<'_> {
    pub(super) fn literal(&self, pair: Pair<'_, Rule>) -> Read<Literal> {
        let place = self.place(&pair);
        let mut magnitude = String::new();
        let mut suffix = String::new();
        let mut attached = true;
        let mut stack = vec![pair];
        while let Some(pair) = stack.pop() {
            match pair.as_rule() {
                Rule::decimal | Rule::code | Rule::letter_code => {
                    magnitude = pair.as_str().to_owned();
                }
                Rule::attached => suffix = pair.as_str().to_owned(),
                Rule::spaced => {
                    suffix = pair.as_str().to_owned();
                    attached = false;
                }
                _ => {
                    let inner: Vec<_> = pair.into_inner().collect();
                    stack.extend(inner.into_iter().rev());
                }
            }
        }
        read(&magnitude, &suffix, attached, place).map_err(|error| {
            Box::new(match error {
                NumberError::Exponent => {
                    Diagnostic::error(place, "the exponent of this number is beyond 1000")
                        .help("exponents go up to 1000")
                }
                NumberError::Form => Diagnostic::error(place, "this is not a number")
                    .help("write 10 kΩ, 4.7e3 or a code such as 4k7"),
            })
        })
    }

    pub(super) fn signed_literal(&self, pair: Pair<'_, Rule>) -> Read<Literal> {
        let place = self.place(&pair);
        let mut negative = false;
        let mut literal = None;
        for inner in pair.into_inner() {
            if inner.as_rule() == Rule::minus {
                negative = true;
            } else {
                literal = Some(self.literal(inner)?);
            }
        }
        let mut literal = literal
            .ok_or_else(|| Box::new(Diagnostic::error(place, "a number is missing here")))?;
        if negative {
            literal.value = -literal.value;
        }
        literal.place = place;
        Ok(literal)
    }

    pub(super) fn deviation(&self, pair: Pair<'_, Rule>) -> Read<Deviation> {
        let mut numbers = Vec::new();
        for inner in pair.into_inner() {
            if inner.as_rule() != Rule::minus {
                numbers.push(self.literal(inner)?);
            }
        }
        let up = numbers[0].clone();
        let down = numbers.get(1).unwrap_or(&up).clone();
        Ok(Deviation { up, down })
    }

    pub(super) fn range(&self, pair: Pair<'_, Rule>) -> Read<(Literal, Literal)> {
        let [low, high] = take(pair.into_inner().collect());
        Ok((self.signed_literal(low)?, self.signed_literal(high)?))
    }

    pub(super) fn part_value(&self, pair: Pair<'_, Rule>) -> Read<Box<PartValue>> {
        let mut value = Box::new(PartValue {
            nominal: None,
            deviation: None,
            range: None,
            place: self.place(&pair),
        });
        for inner in pair.into_inner() {
            if inner.as_rule() == Rule::range {
                value.range = Some(self.range(inner)?);
                continue;
            }
            for inner in inner.into_inner() {
                if inner.as_rule() == Rule::signed_value {
                    value.nominal = Some(self.signed_literal(inner)?);
                } else {
                    value.deviation = Some(self.deviation(inner)?);
                }
            }
        }
        Ok(value)
    }
}
