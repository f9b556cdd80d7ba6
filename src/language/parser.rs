//! Statements to the typed tree; the only file that sees pest.

use pest::Parser as _;
use pest::iterators::Pair;

use crate::diagnostic::Diagnostic;
use crate::language::mistake;
use crate::language::number::{NumberError, read};
use crate::language::statement::{Form, Piece, form, split};
use crate::language::syntax::{
    Asked, Claimed, Compare, Deviation, Expression, ExpressionNode, Group, Link, Listed, Literal,
    Module, Name, NamePart, OptionValue, Parameter, PartValue, Statement, StatementKind, Terminal,
    Whole,
};
use crate::network::{CancellationClass, Side};
use crate::source::{SourceId, Span};

mod generated {
    #![allow(missing_docs, unreachable_pub, clippy::all)]
    //! What pest makes of the grammar.

    #[derive(pest_derive::Parser)]
    #[grammar = "grammar/cutloop.pest"]
    pub(super) struct Grammar;
}

use generated::{Grammar, Rule};

/// Largest exponent an expression may hold.
const MAX_POWER: i32 = 1000;

/// A block that is open: its head and the statements so far.
enum Open {
    For {
        name: Name,
        from: Whole,
        to: Whole,
        place: Span,
        body: Vec<Statement>,
    },
    Module {
        head: Module,
        body: Vec<Statement>,
    },
}

impl Open {
    fn body(&mut self) -> &mut Vec<Statement> {
        match self {
            Self::For { body, .. } | Self::Module { body, .. } => body,
        }
    }

    fn place(&self) -> Span {
        match self {
            Self::For { place, .. } => *place,
            Self::Module { head, .. } => head.place,
        }
    }

    fn close(self) -> Statement {
        match self {
            Self::For {
                name,
                from,
                to,
                place,
                body,
            } => Statement {
                kind: StatementKind::For {
                    name,
                    from,
                    to,
                    body,
                },
                place,
            },
            Self::Module { head, body } => Statement {
                place: head.place,
                kind: StatementKind::Module(Module { body, ..head }),
            },
        }
    }
}

/// Reads a whole text; goes on behind a mistake.
#[must_use]
pub(crate) fn parse(source: SourceId, text: &str) -> (Vec<Statement>, Vec<Diagnostic>) {
    let (pieces, mut errors) = split(source, text);
    let mut top = Vec::new();
    let mut open: Vec<Open> = Vec::new();
    for piece in pieces {
        let reader = Reader {
            source,
            base: piece.start,
            text: &text[piece.start..piece.end],
        };
        match reader.statement(piece) {
            Ok(Item::Statement(statement)) => match open.last_mut() {
                Some(block) => block.body().push(*statement),
                None => top.push(*statement),
            },
            Ok(Item::Open(block)) => open.push(*block),
            Ok(Item::End(place)) => match open.pop() {
                Some(block) => {
                    let statement = block.close();
                    match open.last_mut() {
                        Some(outer) => outer.body().push(statement),
                        None => top.push(statement),
                    }
                }
                None => errors.push(
                    Diagnostic::error(place, "this end closes nothing")
                        .help("take it out, or open a block with for or module before it"),
                ),
            },
            Err(error) => {
                // A head that cannot be read still opens its block, so that its end does.
                if matches!(form(reader.text), Form::For | Form::Module) {
                    open.push(Open::For {
                        name: Name {
                            parts: vec![NamePart::Text("_".to_owned())],
                            place: reader.span(0, 1),
                        },
                        from: Whole::Number(1, reader.span(0, 1)),
                        to: Whole::Number(0, reader.span(0, 1)),
                        place: reader.span(0, 1),
                        body: Vec::new(),
                    });
                }
                errors.push(*error);
            }
        }
    }
    for block in open {
        errors.push(
            Diagnostic::error(block.place(), "this block is never closed")
                .help("write end on a line of its own behind its last statement"),
        );
    }
    (top, errors)
}

enum Item {
    Statement(Box<Statement>),
    Open(Box<Open>),
    End(Span),
}

type Read<T> = Result<T, Box<Diagnostic>>;

/// One statement's text.
#[derive(Clone, Copy)]
struct Reader<'a> {
    source: SourceId,
    base: usize,
    text: &'a str,
}

fn rule_of(form: Form) -> Rule {
    match form {
        Form::Title => Rule::only_title,
        Form::Use => Rule::only_use,
        Form::Let => Rule::only_let,
        Form::For => Rule::only_for,
        Form::End => Rule::only_end,
        Form::Module => Rule::only_module,
        Form::Free => Rule::only_free,
        Form::Drive => Rule::only_drive,
        Form::Assume => Rule::only_assume,
        Form::Derive => Rule::only_derive,
        Form::Claim => Rule::only_claim,
        Form::Starts => Rule::only_starts,
        Form::Is => Rule::only_is,
        Form::Parts => Rule::only_parts,
        Form::Relation => Rule::only_relation,
        Form::Path => Rule::only_path,
    }
}

/// Reads a nominal value that stands outside a file; places are all `place`.
pub(crate) fn value(place: Span, text: &str) -> Result<Box<PartValue>, Box<Diagnostic>> {
    let failed = || Box::new(Diagnostic::error(place, "this is not a value"));
    let mut pairs = Grammar::parse(Rule::only_value, text.trim()).map_err(|_| failed())?;
    let pair = pairs.next().ok_or_else(failed)?;
    let reader = Reader {
        source: place.source,
        base: 0,
        text,
    };
    let mut value = reader.part_value(pair)?;
    value.place = place;
    Ok(value)
}

/// Whether a text is a whole expression.
pub(crate) fn is_expression(text: &str) -> bool {
    let wrapped = format!("x = {text}");
    Grammar::parse(Rule::only_relation, &wrapped).is_ok()
}

impl Reader<'_> {
    fn span(&self, start: usize, end: usize) -> Span {
        Span::new(self.source, self.base + start, self.base + end)
    }

    fn place(&self, pair: &Pair<'_, Rule>) -> Span {
        let span = pair.as_span();
        let trimmed = span.as_str().trim_end();
        self.span(span.start(), span.start() + trimmed.len())
    }

    fn statement(&self, piece: Piece) -> Read<Item> {
        let form = form(self.text);
        if let Some(error) = mistake::before(self.text, form) {
            return Err(Box::new(error.at(self.source, self.base)));
        }
        let mut pairs = Grammar::parse(rule_of(form), self.text).map_err(|error| {
            let at = match error.location {
                pest::error::InputLocation::Pos(at) => at,
                pest::error::InputLocation::Span((at, _)) => at,
            };
            let expected = match &error.variant {
                pest::error::ErrorVariant::ParsingError { positives, .. } => {
                    positives.iter().filter_map(|rule| words(*rule)).collect()
                }
                pest::error::ErrorVariant::CustomError { .. } => Vec::new(),
            };
            Box::new(mistake::after(self.text, form, at, expected).at(self.source, self.base))
        })?;
        let place = self.span(0, piece.end - piece.start);
        let Some(pair) = pairs.next() else {
            return Err(Box::new(Diagnostic::error(
                place,
                "nothing can be read here",
            )));
        };
        self.item(pair, place)
    }

    fn item(&self, pair: Pair<'_, Rule>, place: Span) -> Read<Item> {
        let rule = pair.as_rule();
        if rule == Rule::end {
            return Ok(Item::End(place));
        }
        let inner: Vec<Pair<'_, Rule>> = pair
            .into_inner()
            .filter(|inner| !is_keyword(inner.as_rule()))
            .collect();
        let kind = match rule {
            Rule::for_head => {
                let [name, from, to] = take(inner);
                return Ok(Item::Open(Box::new(Open::For {
                    name: self.name(name)?,
                    from: self.whole(from)?,
                    to: self.whole(to)?,
                    place,
                    body: Vec::new(),
                })));
            }
            Rule::module_head => {
                return Ok(Item::Open(Box::new(Open::Module {
                    head: self.module(inner, place)?,
                    body: Vec::new(),
                })));
            }
            Rule::title => StatementKind::Title(string_text(&inner[0])),
            Rule::use_file => StatementKind::Use(string_text(&inner[0]), self.place(&inner[0])),
            Rule::let_whole => {
                let [name, value] = take(inner);
                StatementKind::Let(self.name(name)?, self.whole(value)?)
            }
            Rule::free => self.free(inner)?,
            Rule::drive => StatementKind::Drive(self.names(inner.into_iter().next())?),
            Rule::assume => self.assume(inner)?,
            Rule::parts => self.parts(inner)?,
            Rule::relation => self.relation(inner)?,
            Rule::is_statement => self.is_statement(inner)?,
            Rule::derive => self.derive(inner)?,
            Rule::claim => {
                let text = squeeze(
                    self.text
                        .trim_start()
                        .strip_prefix("claim")
                        .unwrap_or(self.text),
                );
                let mut inner = inner.into_iter();
                let body = inner.next().and_then(|body| body.into_inner().next());
                let Some(body) = body else {
                    return Err(Box::new(Diagnostic::error(
                        place,
                        "nothing is claimed here",
                    )));
                };
                StatementKind::Claim(self.claimed(body)?, text)
            }
            Rule::starts => {
                let [call, value] = take(inner);
                let call_place = self.place(&call);
                match self.call(call)? {
                    ExpressionNode::Voltage(mut names) if names.len() == 1 => {
                        StatementKind::Starts {
                            part: names.remove(0),
                            is_voltage: true,
                            value: self.expression(value)?,
                        }
                    }
                    ExpressionNode::Current(part) => StatementKind::Starts {
                        part,
                        is_voltage: false,
                        value: self.expression(value)?,
                    },
                    _ => {
                        return Err(Box::new(
                            Diagnostic::error(call_place, "an initial value belongs to one part")
                                .help("write starts voltage(C1) = V0 or starts current(L1) = I0"),
                        ));
                    }
                }
            }
            _ => self.path(inner)?,
        };
        Ok(Item::Statement(Box::new(Statement { kind, place })))
    }

    fn name(&self, pair: Pair<'_, Rule>) -> Read<Name> {
        let place = self.place(&pair);
        let mut parts: Vec<NamePart> = Vec::new();
        let text = pair.as_str().to_owned();
        let base = pair.as_span().start();
        let mut rest = text.as_str();
        let mut at = 0;
        while !rest.is_empty() {
            if let Some(inside) = rest.strip_prefix('{') {
                let end = inside.find('}').unwrap_or(inside.len());
                parts.push(NamePart::Brace(self.brace(&inside[..end], base + at + 1)?));
                let step = (end + 2).min(rest.len());
                at += step;
                rest = &rest[step..];
            } else {
                let end = rest.find('{').unwrap_or(rest.len());
                parts.push(NamePart::Text(one_letter(&rest[..end])));
                at += end;
                rest = &rest[end..];
            }
        }
        Ok(Name { parts, place })
    }

    fn brace(&self, text: &str, at: usize) -> Read<Whole> {
        let reader = Reader {
            source: self.source,
            base: self.base + at,
            text,
        };
        let parsed = Grammar::parse(Rule::only_whole, text);
        let pair = parsed
            .ok()
            .and_then(|mut pairs| pairs.next())
            .ok_or_else(|| {
                Box::new(
                    Diagnostic::error(
                        reader.span(0, text.len().max(1)),
                        "braces hold a whole-number expression",
                    )
                    .help("use + - * on numbers and on names of let and for, such as {k-1}"),
                )
            })?;
        reader.whole(pair)
    }

    fn whole(&self, pair: Pair<'_, Rule>) -> Read<Whole> {
        let place = self.place(&pair);
        Ok(match pair.as_rule() {
            Rule::digits => Whole::Number(
                pair.as_str().parse().map_err(|_| {
                    Box::new(
                        Diagnostic::error(place, "this whole number is too large")
                            .help("whole numbers go up to 9223372036854775807"),
                    )
                })?,
                place,
            ),
            Rule::letter_start => Whole::Name(one_letter(pair.as_str()), place),
            Rule::whole_minus => {
                let inner = pair
                    .into_inner()
                    .find(|inner| inner.as_rule() != Rule::minus);
                let value = match inner {
                    Some(inner) => self.whole(inner)?,
                    None => Whole::Number(0, place),
                };
                Whole::Sub(Box::new(Whole::Number(0, place)), Box::new(value))
            }
            _ => {
                let mut sum: Option<Whole> = None;
                let mut operator = Rule::plus;
                for inner in pair.into_inner() {
                    match inner.as_rule() {
                        Rule::plus | Rule::minus | Rule::times => operator = inner.as_rule(),
                        _ => {
                            let value = self.whole(inner)?;
                            sum = Some(match (sum, operator) {
                                (None, _) => value,
                                (Some(left), Rule::minus) => {
                                    Whole::Sub(Box::new(left), Box::new(value))
                                }
                                (Some(left), Rule::times) => {
                                    Whole::Mul(Box::new(left), Box::new(value))
                                }
                                (Some(left), _) => Whole::Add(Box::new(left), Box::new(value)),
                            });
                        }
                    }
                }
                sum.unwrap_or(Whole::Number(0, place))
            }
        })
    }

    fn names(&self, pair: Option<Pair<'_, Rule>>) -> Read<Vec<Name>> {
        pair.into_iter()
            .flat_map(Pair::into_inner)
            .map(|name| self.name(name))
            .collect()
    }

    fn literal(&self, pair: Pair<'_, Rule>) -> Read<Literal> {
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

    fn signed_literal(&self, pair: Pair<'_, Rule>) -> Read<Literal> {
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

    fn deviation(&self, pair: Pair<'_, Rule>) -> Read<Deviation> {
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

    fn range(&self, pair: Pair<'_, Rule>) -> Read<(Literal, Literal)> {
        let [low, high] = take(pair.into_inner().collect());
        Ok((self.signed_literal(low)?, self.signed_literal(high)?))
    }

    fn part_value(&self, pair: Pair<'_, Rule>) -> Read<Box<PartValue>> {
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

    fn call(&self, pair: Pair<'_, Rule>) -> Read<ExpressionNode> {
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

    fn expression(&self, pair: Pair<'_, Rule>) -> Read<Expression> {
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

    fn power(&self, pair: Pair<'_, Rule>) -> Read<Expression> {
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

    fn signed(&self, pair: Pair<'_, Rule>) -> Read<Expression> {
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

    fn product(&self, pair: Pair<'_, Rule>) -> Read<Expression> {
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
    fn mixed(&self, place: Span) -> Diagnostic {
        let start = place.start as usize - self.base;
        let end = place.end as usize - self.base;
        let text = self.text[start..end].replace('∥', "||");
        let (first, second) = mistake::both_readings(&text);
        Diagnostic::error(place, "|| beside *, /, ^ or a sign can be read in two ways")
            .help(format!("write {first} or {second}"))
    }

    fn module(&self, inner: Vec<Pair<'_, Rule>>, place: Span) -> Read<Module> {
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

    fn free(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
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

    fn assume(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
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

    fn parts(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
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

    fn relation(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
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

    fn option(&self, pair: Pair<'_, Rule>) -> Read<OptionValue> {
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

    fn is_statement(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
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

    fn terminal(&self, pair: Pair<'_, Rule>) -> Read<Terminal> {
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

    fn derive(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
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

    fn question(&self, pair: Pair<'_, Rule>) -> Read<Asked> {
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

    fn claimed(&self, pair: Pair<'_, Rule>) -> Read<Claimed> {
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

    fn claimed_value(&self, pair: Pair<'_, Rule>) -> Read<Option<Expression>> {
        let [inner] = take(pair.into_inner().collect());
        if inner.as_rule() == Rule::kw_infinite {
            return Ok(None);
        }
        self.expression(inner).map(Some)
    }

    fn path(&self, inner: Vec<Pair<'_, Rule>>) -> Read<StatementKind> {
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

    fn group(&self, pair: Pair<'_, Rule>) -> Read<Group> {
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

/// The pairs of a rule whose shape the grammar fixes.
fn take<const N: usize>(pairs: Vec<Pair<'_, Rule>>) -> [Pair<'_, Rule>; N] {
    match pairs.try_into() {
        Ok(array) => array,
        Err(pairs) => panic!("the grammar promises {N} parts, not {}", pairs.len()),
    }
}

fn is_keyword(rule: Rule) -> bool {
    matches!(
        rule,
        Rule::kw_title
            | Rule::kw_use
            | Rule::kw_let
            | Rule::kw_free
            | Rule::kw_drive
            | Rule::kw_assume
            | Rule::kw_module
            | Rule::kw_for
            | Rule::kw_derive
            | Rule::kw_claim
            | Rule::kw_starts
            | Rule::kw_with
            | Rule::kw_without
            | Rule::kw_is
            | Rule::kw_in
            | Rule::kw_of
    )
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

fn string_text(pair: &Pair<'_, Rule>) -> String {
    pair.clone()
        .into_inner()
        .next()
        .map(|inner| inner.as_str().to_owned())
        .unwrap_or_default()
}

/// Both code points of Ω and µ are one letter.
fn one_letter(text: &str) -> String {
    text.replace('\u{2126}', "\u{3A9}")
        .replace('\u{B5}', "\u{3BC}")
}

/// Comments out, blanks squeezed to one.
fn squeeze(text: &str) -> String {
    let lines: Vec<&str> = text
        .lines()
        .map(|line| line.split('#').next().unwrap_or(""))
        .collect();
    lines
        .join(" ")
        .split_whitespace()
        .collect::<Vec<_>>()
        .join(" ")
}

/// What a rule is called in a message.
fn words(rule: Rule) -> Option<&'static str> {
    Some(match rule {
        Rule::name | Rule::names | Rule::letter_start => "a name",
        Rule::node | Rule::anonymous => "a node",
        Rule::designator | Rule::group => "a part",
        Rule::link | Rule::joined => "-part- and a node",
        Rule::number | Rule::decimal | Rule::digits => "a number",
        Rule::value_number | Rule::signed_value | Rule::nominal | Rule::part_value => "a value",
        Rule::expression | Rule::product | Rule::signed | Rule::parallel | Rule::power => {
            "an expression"
        }
        Rule::plus | Rule::minus | Rule::times | Rule::over => "an operator",
        Rule::string => "a text in quotes",
        Rule::whole_sum | Rule::whole_product => "a whole number",
        Rule::terminal => "a terminal",
        Rule::comparison => "a comparison",
        Rule::kind => "a kind",
        Rule::question => "a question",
        Rule::claim_body => "a claim",
        Rule::call => "voltage(…) or current(…)",
        Rule::kw_with => "with",
        _ => return None,
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::source::Sources;

    fn read_all(text: &str) -> (Vec<Statement>, Vec<Diagnostic>) {
        let mut sources = Sources::new();
        let id = sources.add("x", text);
        parse(id, text)
    }

    fn message(text: &str) -> (String, String) {
        let (_, errors) = read_all(text);
        let error = errors
            .first()
            .unwrap_or_else(|| panic!("no error in {text}"));
        (
            error.message.clone(),
            error.help.clone().unwrap_or_default(),
        )
    }

    #[test]
    fn every_form_of_the_language_is_read() {
        let text = r#"
title "Load-cell filter # one"
use "sections.cutloop"
in  -Vs- ground
in  -R1- a  -R2(10 kΩ ± 1 %)- b -- c
a -(R3 || C3 + L1)- . -(R4(1k) + (C4 || R5))- 0
n{k-1} -R{k}- n{k + 1} -C1- 1
U1 is opamp(+ b, - out, out)
U2 is diffamp(+ a, - b, out+ c, out- d) with gain = 2*K, rin = exactly 10
load, aux is resistor
T1 is coupling of L1, L2 with k = k12
A1 is section(in a, out b, com ground) with R = Ra, C = 2*Ca
R1, R2 : 10 kΩ ± 1 %
R1 .. R8 : 10k
C : 100 nF +20 % -10 %
C2 : 3p3 ± 0.5 pF
R : 10 kΩ, 1 kΩ .. 100 kΩ
R : 1 kΩ .. 100 kΩ
R : R47
R1 = R2 = R
R2 = R1 ± 0.1 %
C1 = exactly 4n7
K = 1 + Rb/Ra
Z1 = R + 1/(s*C)
V3 = -K*voltage(x) + 2*voltage(a, b)
free gm, A0
free A0 : 1e5
free k real
free x in 0 .. 1
drive Vd, Vc
assume 0 < K < 3
let N = 2*(M+1) - 1
for k = 1 .. N
  n{k} -R{k}- ground
end
module section(in, out, com) with R, C = 1n, D = exactly 2
  in -R1- out
end
derive H = voltage(out) / Vs
derive H = (voltage(a) - 2*voltage(b)) / Vs without RL, R2
derive Zi = impedance(in, b) without Vs
derive Y = admittance(a,b)
derive q = ratio(voltage(a), voltage(b)) with Vs
derive T = return_ratio(U1)
derive F = 1/(1 + T)
derive Hi = H with A0 -> infinite, d -> 0
derive e = first_order(H, 1/A0)
claim H = 1/(1 + s*R1*C1)
claim order(H) = 2; claim order(network) = 3; claim static(network) = 1
claim dc(H) = infinite; claim hf(H) = 0
claim coefficient(H, den, 1) = R1*C1
claim pole(H) = -1/(R*C); claim zero(H) = 0; claim same(H1, H2)
claim cancels(H) = none; claim cancels(H) = structural, matched
claim stable(H) within tolerance; claim stable(network)
starts voltage(C1) = V0; starts current(L1) = I0
x = R1 || R2 + R3^2 - (a || b)^-1
"#;
        let (statements, errors) = read_all(text);
        assert!(errors.is_empty(), "{errors:?}");
        assert_eq!(statements.len(), 59);
    }

    #[test]
    fn mistakes_have_a_way_out() {
        assert!(message("R1 : 2*R2").1.contains("R1 = 2*R2"));
        assert!(
            message("x = 2*R1 || R2")
                .1
                .contains("2*(R1 || R2) or (2*R1) || R2")
        );
        assert!(message("x = 2 R1").1.contains("2*R1"));
        assert!(message("R1 : 4,7 k").1.contains("4.7"));
        assert!(
            message("V+ -R1- a").1.contains("v_p"),
            "{:?}",
            message("V+ -R1- a")
        );
        assert!(
            message("3V3 -R1- a").1.contains("v3v3"),
            "{:?}",
            message("3V3 -R1- a")
        );
        assert!(message("derve H = voltage(out)/Vs").1.contains("derive"));
        assert!(message("x = y^1000000000").0.contains("1000"));
        assert!(message("end").0.contains("closes nothing"));
        assert!(
            message("for k = 1 .. 2\n a -R1- b")
                .0
                .contains("never closed")
        );
        assert!(message("x = (1 + 2").0.contains("never closed"));
    }
}
