//! Braces filled in by the values of let and for.

use super::*;

pub(super) fn fill_name(name: Name, names: &Names) -> Filled<Name> {
    if matches!(name.parts.as_slice(), [NamePart::Text(_)]) {
        return Ok(name);
    }
    let mut text = String::new();
    for part in &name.parts {
        match part {
            NamePart::Text(part) => text.push_str(part),
            NamePart::Brace(value) => {
                let value = whole(value, names)?;
                if value < 0 {
                    return Err(Box::new(
                        Diagnostic::error(name.place, format!("the braces give {value} here"))
                            .help("numbers in names are not negative"),
                    ));
                }
                text.push_str(&value.to_string());
            }
        }
    }
    Ok(Name {
        parts: vec![NamePart::Text(text)],
        place: name.place,
    })
}

pub(super) fn fill_names(list: Vec<Name>, names: &Names) -> Filled<Vec<Name>> {
    list.into_iter()
        .map(|name| fill_name(name, names))
        .collect()
}

pub(super) fn fill_expression(expression: Expression, names: &Names) -> Filled<Expression> {
    let list = |list: Vec<(bool, Expression)>| -> Filled<Vec<(bool, Expression)>> {
        list.into_iter()
            .map(|(sign, inner)| Ok((sign, fill_expression(inner, names)?)))
            .collect()
    };
    let node = match expression.node {
        ExpressionNode::Number(literal) => ExpressionNode::Number(literal),
        ExpressionNode::Name(name) => ExpressionNode::Name(fill_name(name, names)?),
        ExpressionNode::Voltage(nodes) => ExpressionNode::Voltage(fill_names(nodes, names)?),
        ExpressionNode::Current(part) => ExpressionNode::Current(fill_name(part, names)?),
        ExpressionNode::Negate(inner) => {
            ExpressionNode::Negate(Box::new(fill_expression(*inner, names)?))
        }
        ExpressionNode::Power(inner, exponent) => {
            ExpressionNode::Power(Box::new(fill_expression(*inner, names)?), exponent)
        }
        ExpressionNode::Sum(terms) => ExpressionNode::Sum(list(terms)?),
        ExpressionNode::Product(factors) => ExpressionNode::Product(list(factors)?),
        ExpressionNode::Parallel(members) => ExpressionNode::Parallel(
            members
                .into_iter()
                .map(|inner| fill_expression(inner, names))
                .collect::<Filled<_>>()?,
        ),
    };
    Ok(Expression {
        node,
        place: expression.place,
    })
}

pub(super) fn fill_group(group: Group, names: &Names) -> Filled<Group> {
    let list = |list: Vec<Group>| -> Filled<Vec<Group>> {
        list.into_iter()
            .map(|inner| fill_group(inner, names))
            .collect()
    };
    Ok(match group {
        Group::One(name, value) => Group::One(fill_name(name, names)?, value),
        Group::Parallel(members) => Group::Parallel(list(members)?),
        Group::Series(members) => Group::Series(list(members)?),
    })
}

/// Fills the braces of a statement.
pub(super) fn fill(kind: StatementKind, names: &Names) -> Filled<StatementKind> {
    Ok(match kind {
        StatementKind::Path(nodes, links) => StatementKind::Path(
            fill_names(nodes, names)?,
            links
                .into_iter()
                .map(|link| match link {
                    Link::Join => Ok(Link::Join),
                    Link::Part(group) => fill_group(group, names).map(Link::Part),
                })
                .collect::<Filled<_>>()?,
        ),
        StatementKind::Parts(listed, value) => StatementKind::Parts(
            listed
                .into_iter()
                .map(|listed| {
                    Ok(match listed {
                        Listed::One(name) => Listed::One(fill_name(name, names)?),
                        Listed::Span(first, last) => {
                            Listed::Span(fill_name(first, names)?, fill_name(last, names)?)
                        }
                    })
                })
                .collect::<Filled<_>>()?,
            value,
        ),
        StatementKind::Relation {
            left,
            right,
            exactly,
            deviation,
        } => StatementKind::Relation {
            left: fill_names(left, names)?,
            right: fill_expression(right, names)?,
            exactly,
            deviation,
        },
        StatementKind::Is {
            names: own,
            kind,
            terminals,
            coils,
            options,
        } => StatementKind::Is {
            names: fill_names(own, names)?,
            kind: fill_name(kind, names)?,
            terminals: terminals
                .map(|list| {
                    list.into_iter()
                        .map(|terminal| {
                            Ok(Terminal {
                                node: terminal
                                    .node
                                    .map(|node| fill_name(node, names))
                                    .transpose()?,
                                ..terminal
                            })
                        })
                        .collect::<Filled<Vec<_>>>()
                })
                .transpose()?,
            coils: fill_names(coils, names)?,
            options: options
                .into_iter()
                .map(|option| {
                    Ok(OptionValue {
                        name: option.name,
                        value: option
                            .value
                            .map(|value| fill_expression(value, names))
                            .transpose()?,
                        exactly: option.exactly,
                    })
                })
                .collect::<Filled<_>>()?,
        },
        StatementKind::Free {
            names: own,
            value,
            real,
            within,
        } => StatementKind::Free {
            names: fill_names(own, names)?,
            value,
            real,
            within,
        },
        StatementKind::Drive(own) => StatementKind::Drive(fill_names(own, names)?),
        StatementKind::Assume(first, chain) => StatementKind::Assume(
            fill_expression(first, names)?,
            chain
                .into_iter()
                .map(|(sign, inner)| Ok((sign, fill_expression(inner, names)?)))
                .collect::<Filled<_>>()?,
        ),
        StatementKind::Derive {
            name,
            question,
            without,
            text,
        } => StatementKind::Derive {
            name: fill_name(name, names)?,
            question: fill_question(question, names)?,
            without: fill_names(without, names)?,
            text,
        },
        StatementKind::Claim(claimed, text) => {
            StatementKind::Claim(fill_claim(claimed, names)?, text)
        }
        StatementKind::Starts {
            part,
            is_voltage,
            value,
        } => StatementKind::Starts {
            part: fill_name(part, names)?,
            is_voltage,
            value: fill_expression(value, names)?,
        },
        other @ (StatementKind::Title(_)
        | StatementKind::Use(..)
        | StatementKind::Let(..)
        | StatementKind::For { .. }
        | StatementKind::Module(_)) => other,
    })
}

pub(super) fn fill_question(
    question: crate::language::syntax::Asked,
    names: &Names,
) -> Filled<crate::language::syntax::Asked> {
    use crate::language::syntax::Asked;
    Ok(match question {
        Asked::Impedance(nodes) => Asked::Impedance(fill_names(nodes, names)?),
        Asked::Admittance(nodes) => Asked::Admittance(fill_names(nodes, names)?),
        Asked::Ratio(upper, lower, drive) => Asked::Ratio(
            fill_expression(upper, names)?,
            fill_expression(lower, names)?,
            fill_name(drive, names)?,
        ),
        Asked::ReturnRatio(name) => Asked::ReturnRatio(fill_name(name, names)?),
        Asked::FirstOrder(name, small) => {
            Asked::FirstOrder(fill_name(name, names)?, fill_expression(small, names)?)
        }
        Asked::Limit(name, steps) => Asked::Limit(
            fill_name(name, names)?,
            steps
                .into_iter()
                .map(|(symbol, value)| {
                    let value = value
                        .map(|value| fill_expression(value, names))
                        .transpose()?;
                    Ok((fill_name(symbol, names)?, value))
                })
                .collect::<Filled<_>>()?,
        ),
        Asked::Expression(inner) => Asked::Expression(fill_expression(inner, names)?),
    })
}

pub(super) fn fill_claim(
    claimed: crate::language::syntax::Claimed,
    names: &Names,
) -> Filled<crate::language::syntax::Claimed> {
    use crate::language::syntax::Claimed;
    let one = |value: Expression| fill_expression(value, names);
    let maybe = |value: Option<Expression>| value.map(one).transpose();
    Ok(match claimed {
        Claimed::Equals(name, value) => Claimed::Equals(fill_name(name, names)?, one(value)?),
        Claimed::Order(name, value) => Claimed::Order(fill_name(name, names)?, one(value)?),
        Claimed::Static(name, value) => Claimed::Static(fill_name(name, names)?, one(value)?),
        Claimed::Dc(name, value) => Claimed::Dc(fill_name(name, names)?, maybe(value)?),
        Claimed::Hf(name, value) => Claimed::Hf(fill_name(name, names)?, maybe(value)?),
        Claimed::Coefficient(name, side, power, value) => {
            Claimed::Coefficient(fill_name(name, names)?, side, power, one(value)?)
        }
        Claimed::Pole(name, value) => Claimed::Pole(fill_name(name, names)?, one(value)?),
        Claimed::Zero(name, value) => Claimed::Zero(fill_name(name, names)?, one(value)?),
        Claimed::Same(a, b) => Claimed::Same(fill_name(a, names)?, fill_name(b, names)?),
        Claimed::Cancels(name, classes) => Claimed::Cancels(fill_name(name, names)?, classes),
        Claimed::Stable(name, within) => Claimed::Stable(fill_name(name, names)?, within),
    })
}
