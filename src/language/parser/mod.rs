//! Statements to the typed tree; the only file that sees pest.

use pest::Parser as _;
use pest::iterators::Pair;

use crate::diagnostic::Diagnostic;
use crate::language::mistake;
use crate::language::number::{NumberError, read};
use crate::language::path_scan::scan;
use crate::language::statement::{Form, Piece, form, split, squeeze};
use crate::language::syntax::{
    Asked, Claimed, Compare, Deviation, Expression, ExpressionNode, Group, Link, Listed, Literal,
    Module, Name, NamePart, OptionValue, Parameter, PartValue, Statement, StatementKind, Terminal,
    Whole,
};
use crate::network::{CancellationClass, Side};
use crate::source::{SourceId, Span};

mod expression;
mod line;
mod literal;
mod question;

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
        if let Some(kind) = scan(self.source, self.base, self.text) {
            let place = self.span(0, piece.end - piece.start);
            return Ok(Item::Statement(Box::new(Statement { kind, place })));
        }
        self.by_grammar(piece)
    }

    fn by_grammar(&self, piece: Piece) -> Read<Item> {
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
mod tests;
