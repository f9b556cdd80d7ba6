//! Whole numbers of repetition, and how much a repetition makes.

use super::*;

/// Statements of one round of a repetition: the mean of its first and its last round.
pub(super) fn estimate(
    body: &[Statement],
    names: &mut Names,
    counter: &str,
    ends: (i64, i64),
) -> u128 {
    let mut sum = 0_u128;
    for value in [ends.0, ends.1] {
        names.insert(counter.to_owned(), value);
        for statement in body {
            let StatementKind::For {
                name,
                from,
                to,
                body,
            } = &statement.kind
            else {
                sum = sum.saturating_add(1);
                continue;
            };
            let (Ok(from), Ok(to)) = (whole(from, names), whole(to, names)) else {
                continue;
            };
            let rounds = i128::from(to) - i128::from(from) + 1;
            if rounds > 0 {
                let each = estimate(body, &mut names.clone(), &plain(name), (from, to));
                sum = sum.saturating_add(each.saturating_mul(rounds.unsigned_abs()));
            }
        }
    }
    sum / 2
}

pub(super) fn whole(expression: &Whole, names: &Names) -> Result<i64, Diagnostic> {
    let beyond = |place| {
        Diagnostic::error(place, "this whole number is too large")
            .help("whole numbers go up to 9223372036854775807")
    };
    Ok(match expression {
        Whole::Number(value, _) => *value,
        Whole::Name(name, place) => match names.get(name) {
            Some(value) => *value,
            None => {
                let error = Diagnostic::error(*place, format!("{name} is no whole number here"));
                return Err(match nearest(name, names.keys().map(String::as_str)) {
                    Some(near) => error.help(format!("did you mean {near}?")),
                    None => error.help(format!("write let {name} = 5 before this line")),
                });
            }
        },
        Whole::Add(a, b) | Whole::Sub(a, b) | Whole::Mul(a, b) => {
            let (left, right) = (whole(a, names)?, whole(b, names)?);
            let value = match expression {
                Whole::Add(..) => left.checked_add(right),
                Whole::Sub(..) => left.checked_sub(right),
                _ => left.checked_mul(right),
            };
            value.ok_or_else(|| beyond(first_place(a)))?
        }
    })
}

fn first_place(expression: &Whole) -> Span {
    match expression {
        Whole::Number(_, place) | Whole::Name(_, place) => *place,
        Whole::Add(a, _) | Whole::Sub(a, _) | Whole::Mul(a, _) => first_place(a),
    }
}
