//! Derived functions as displayed equations.

use crate::algebra::Symbol;
use crate::analysis::form::{Form, Reactive, TimeConstants};
use crate::analysis::report::{Expanded, Formula, FunctionReport, Nested};
use crate::render::answer::{Answer, Detail, FormStyle};
use crate::render::character;
use crate::render::coefficients::{self, Definition, Manner, NamedForm};
use crate::render::designer::{StandardForm, standard};
use crate::render::form;
use crate::render::latex::escape::{escape, name};
use crate::render::latex::spell::{LINE, lines, spell, width};
use crate::render::math::{self, Bars, Math, Within};
use crate::render::names::{FrequencyPlace, Names};
use crate::render::sentence;

/// The equation of one function, or the sentence why there is none.
pub(super) fn function(answer: &Answer<'_>, result: &FunctionReport) -> String {
    let names = answer.names(FrequencyPlace::First);
    match &result.formula {
        Formula::Expanded(formula) => {
            let mut text = expanded(result, formula, &names, answer.style);
            if answer.style == FormStyle::Designer && answer.detail == Detail::Formula {
                text.push_str(&what_it_does(result, &names));
            }
            if let Some(found) = &result.forms.time_constants {
                text.push_str(&time_constants(found, &names));
            }
            text
        }
        Formula::Nested(form) => nested(&result.name, form, &names),
        Formula::OverBudget(exceeded) => format!("{}\n", escape(&sentence::over_budget(exceeded))),
    }
}

/// The time constants of the coefficients of s and s².
fn time_constants(found: &TimeConstants, names: &Names<'_>) -> String {
    let sums = match found {
        TimeConstants::Sums(sums) => sums,
        TimeConstants::None(why) => return format!("No sum of time constants: {}.\n", escape(why)),
    };
    let spelled = |it: &Form| spell(&form::math(it, names));
    let part = |symbol: Symbol| name(names.name(symbol));
    let mut rows: Vec<String> = sums
        .first
        .iter()
        .map(|it| format!("  \\tau({}) &= {}", part(it.part), spelled(&it.tau)))
        .collect();
    for it in &sums.second {
        let first = part(it.at_infinity);
        let state = match it.kind {
            Reactive::Capacitor => "shorted",
            Reactive::Inductor => "open",
        };
        rows.push(match &it.other {
            Ok(other) => format!(
                "  \\tau({}\\mid {first}\\ \\text{{{state}}}) &= {}",
                part(other.part),
                spelled(&other.tau)
            ),
            Err(other) => format!(
                "  \\tau({first})\\,\\tau({}) &= {}",
                part(*other),
                spelled(&it.product)
            ),
        });
    }
    if let Some(delay) = &sums.elmore {
        rows.push(format!("  b_1 - a_1 &= {}", spelled(delay)));
    }
    format!(
        "\\begin{{align*}}\n{}\n\\end{{align*}}\n",
        rows.join(" \\\\\n")
    )
}

/// Kind of the response, where the poles are conjugate, the answer to a step.
fn what_it_does(result: &FunctionReport, names: &Names<'_>) -> String {
    let forms = &result.forms;
    let Some(character) = &forms.character else {
        return String::new();
    };
    let mut sentences: Vec<String> = character::remarks(character, names)
        .into_iter()
        .map(|it| match it.inequality {
            Some((left, right)) => {
                let words = escape(&it.words);
                format!("{words} ${} > {}$", spell(&left), spell(&right))
            }
            None => escape(&it.words),
        })
        .collect();
    if let Some(step) = character::step(&result.name, &name(&result.name), forms, names) {
        let rest = if step.oscillates {
            " with $\\sigma = \\omega_0/(2Q)$, $\\omega_d = \\omega_0\\sqrt{1 - 1/(4Q^2)}$"
        } else {
            ""
        };
        sentences.push(format!("unit step: ${}${rest}", step.latex));
    }
    if sentences.is_empty() {
        return String::new();
    }
    format!("{}.\n", sentences.join("; "))
}

fn expanded(
    result: &FunctionReport,
    formula: &Expanded,
    names: &Names<'_>,
    style: FormStyle,
) -> String {
    let function = &result.name;
    let left = left_side(function, formula);
    let manner = coefficients::manner(formula);
    let form = (style == FormStyle::Designer)
        .then(|| result.forms.designer.as_ref().map(|it| standard(it, names)))
        .flatten();
    match (style, &result.forms.normalised) {
        (FormStyle::Normalised, Some(form)) => {
            return with_definitions(&left, &coefficients::normalised(form, names));
        }
        (FormStyle::Nested, _) => {
            return with_definitions(&left, &coefficients::named(formula, names, true));
        }
        _ if manner == Manner::InPlace => {}
        _ => {
            return match form {
                Some(form) => in_several_forms(&left, Vec::new(), Some(&form)),
                None => {
                    let nested = manner == Manner::Nested;
                    with_definitions(&left, &coefficients::named(formula, names, nested))
                }
            };
        }
    }
    let above = math::factored_series(&formula.numerator, names);
    let below = math::factored_series(&formula.denominator, names);
    let room = LINE - 60;
    if width(&above) <= room && width(&below) <= room {
        let right = spell(&Math::quotient(above, below));
        return in_several_forms(&left, vec![right], form.as_ref());
    }
    let mut sides: Vec<Side> = [("N", above), ("D", below)]
        .into_iter()
        .map(|(name, value)| Side {
            left: format!("{name}(s)"),
            value,
        })
        .collect();
    let mut rights = vec!["\\frac{N(s)}{D(s)}".to_owned()];
    if let Some(form) = &form {
        rights.push(in_designers_terms(form));
        sides.extend(form.definitions.iter().map(definition));
    }
    aligned(
        &format!("{left} &= {}", rights.join(" \\\\\n  &= ")),
        &sides,
    )
}

/// The fraction, the same in other forms, and what the names of the last one stand for.
fn in_several_forms(left: &str, mut rights: Vec<String>, form: Option<&StandardForm>) -> String {
    let other = form.map(in_designers_terms);
    rights.extend(other.filter(|it| rights.first() != Some(it)));
    let definitions = form.iter().flat_map(|form| &form.definitions);
    let sides: Vec<Side> = definitions.map(definition).collect();
    if let ([only], []) = (rights.as_slice(), sides.as_slice()) {
        return format!("\\begin{{equation*}}\n  {left} = {only}\n\\end{{equation*}}\n");
    }
    let first = format!("{left} &= {}", rights.join(" \\\\\n  &= "));
    aligned(&first, &sides)
}

/// Sign, gain and fraction.
fn in_designers_terms(form: &StandardForm) -> String {
    let sign = if form.negative { "-" } else { "" };
    let gain = form.gain.as_ref().map(|gain| {
        let group = gain.is_grouped(Within::Product, Bars::Drawn);
        let (open, close) = if group { ("(", ")") } else { ("", "") };
        format!("{open}{}{close} \\cdot ", spell(gain))
    });
    match (&form.gain, &form.fraction) {
        (Some(gain), None) => format!("{sign}{}", spell(gain)),
        (_, fraction) => {
            let fraction = fraction.as_ref().map_or("1".to_owned(), spell);
            format!("{sign}{}{fraction}", gain.unwrap_or_default())
        }
    }
}

fn left_side(function: &str, formula: &Expanded) -> String {
    let depends_on_s = formula.numerator.len() > 1 || formula.denominator.len() > 1;
    let argument = if depends_on_s { "(s)" } else { "" };
    format!("{}{argument}", name(function))
}

/// One equation of an aligned group.
struct Side {
    left: String,
    value: Math,
}

fn with_definitions(left: &str, form: &NamedForm) -> String {
    let definitions = form.definitions.iter().map(definition);
    let fits = |side: &Math| width(side) <= LINE - 60;
    if fits(&form.numerator) && fits(&form.denominator) {
        let quotient = Math::quotient(form.numerator.clone(), form.denominator.clone());
        let first = format!("{left} &= {}", spell(&quotient));
        return aligned(&first, &definitions.collect::<Vec<_>>());
    }
    let sides = [("N", &form.numerator), ("D", &form.denominator)].map(|(own, value)| Side {
        left: format!("{own}(s)"),
        value: value.clone(),
    });
    let sides: Vec<Side> = sides.into_iter().chain(definitions).collect();
    aligned(&format!("{left} &= \\frac{{N(s)}}{{D(s)}}"), &sides)
}

fn definition(definition: &Definition) -> Side {
    Side {
        left: name(&definition.name),
        value: definition.value.clone(),
    }
}

/// A first line and one equation for each definition, long ones broken.
fn aligned(first: &str, sides: &[Side]) -> String {
    let mut rows = vec![format!("  {first}")];
    for side in sides {
        for (index, line) in lines(&side.value, 50).into_iter().enumerate() {
            rows.push(match index {
                0 => format!("  {} &= {line}", side.left),
                _ => format!("  &{line}"),
            });
        }
    }
    format!(
        "\\begin{{align*}}\n{}\n\\end{{align*}}\n",
        rows.join(" \\\\\n")
    )
}

fn nested(function: &str, form: &Nested, names: &Names<'_>) -> String {
    let shared = form.definitions.iter().map(|(symbol, _)| *symbol);
    let names = names
        .clone()
        .with_shared(shared.zip(form.names.iter().map(String::as_str)));
    let mut sides: Vec<Side> = [("N", &form.numerator), ("D", &form.denominator)]
        .map(|(name, value)| Side {
            left: format!("{name}(s)"),
            value: math::by_powers_of_s(value, &names),
        })
        .into();
    let definitions = form.names.iter().zip(&form.definitions);
    sides.extend(definitions.map(|(own, (_, value))| Side {
        left: name(own),
        value: math::by_powers_of_s(value, &names),
    }));
    let first = format!("{}(s) &= \\frac{{N(s)}}{{D(s)}}", name(function));
    let mut text = aligned(&first, &sides);
    text.push_str(&format!(
        "Expanded, these are {} terms over {}.\n",
        form.terms.0, form.terms.1
    ));
    text
}
