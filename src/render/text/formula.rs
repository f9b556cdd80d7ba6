//! Derived functions as fractions.

use crate::algebra::{Polynomial, Symbol};
use crate::analysis::form::{Forms, Limit};
use crate::analysis::report::{Expanded, Formula, FunctionReport, Nested};
use crate::render::answer::{Answer, Detail, FormStyle};
use crate::render::character;
use crate::render::coefficients::{self, Definition, Manner, NamedForm};
use crate::render::designer::{self, StandardForm, standard};
use crate::render::form;
use crate::render::ledger;
use crate::render::linear::READING;
use crate::render::math::{self, Math, Within};
use crate::render::names::{FrequencyPlace, Names};
use crate::render::sentence;
use crate::render::text::Page;
use crate::render::text::block::{Block, columns};
use crate::render::text::constants;
use crate::render::text::fill;
use crate::render::text::order;
use crate::render::text::paint::Paint;

/// Columns left of everything drawn under a heading.
const INDENT: usize = 2;

/// One function: heading, formula, its degrees in a line.
pub(super) fn section(answer: &Answer<'_>, result: &FunctionReport, page: &Page) -> String {
    let paint = Paint(page.colour);
    let names = answer.names(FrequencyPlace::First);
    let mut text = order::heading(answer, result, page);
    text.push('\n');
    match &result.formula {
        Formula::Expanded(formula) => {
            text.push_str(&expanded(result, formula, &names, page, answer.style));
            if answer.style == FormStyle::Designer && answer.detail == Detail::Formula {
                text.push_str(&what_it_does(&result.name, &result.forms, &names, page));
            }
            if let Some(found) = &result.forms.time_constants {
                text.push_str(&constants::section(found, &names));
            }
        }
        Formula::Nested(form) => text.push_str(&nested(&result.name, form, &names, page)),
        Formula::OverBudget(exceeded) => {
            let sentence = sentence::over_budget(exceeded);
            text.push_str(&format!("  {}\n", paint.unsure(&sentence)));
            if result.degrees_known() {
                text.push_str(&remark("its degrees are exact all the same", page));
                let further = format!("more is tried with {}", exceeded.further());
                text.push_str(&remark(&further, page));
            }
        }
    }
    text.push('\n');
    text.push_str(&footer(result, page));
    text
}

/// Degrees, and how the formula was checked.
fn footer(result: &FunctionReport, page: &Page) -> String {
    let mut words = vec![ledger::degrees(result)];
    if result.checked_points > 0 {
        let points = sentence::counted(result.checked_points as usize, "point", "points");
        words.push(format!("agrees with the nodal equations at {points}"));
    }
    let mut text = String::new();
    for line in fill::words(&words, " · ", page.width - INDENT) {
        text.push_str(&format!("  {}\n", Paint(page.colour).quiet(&line)));
    }
    text
}

fn expanded(
    result: &FunctionReport,
    formula: &Expanded,
    names: &Names<'_>,
    page: &Page,
    style: FormStyle,
) -> String {
    let name = &result.name;
    let forms = &result.forms;
    let depends_on_s = formula.numerator.len() > 1 || formula.denominator.len() > 1;
    let left = left_side(name, depends_on_s);
    let nested = coefficients::manner(formula) == Manner::Nested;
    let mut text = match (style, &forms.normalised) {
        (FormStyle::Normalised, Some(form)) if depends_on_s => {
            named(&left, &coefficients::normalised(form, names), page)
        }
        (FormStyle::Nested, _) => named(&left, &coefficients::named(formula, names, true), page),
        _ => match coefficients::manner(formula) {
            Manner::InPlace => in_place(&left, formula, names, page),
            Manner::Named if style == FormStyle::Designer && forms.designer.is_some() => {
                String::new()
            }
            Manner::Named | Manner::Nested => {
                named(&left, &coefficients::named(formula, names, nested), page)
            }
        },
    };
    if nested {
        let (above, below) = coefficients::term_counts(formula);
        let terms = expanded_terms(&above.to_string(), &below.to_string());
        let note = format!("shared parts are named, common symbols taken out; {terms}");
        text.push('\n');
        text.push_str(&remark(&note, page));
    }
    if style == FormStyle::Designer
        && let Some(designer) = &forms.designer
        && (text.is_empty() || designer::says_more(formula, designer, names))
    {
        let form = standard(designer, names);
        let equals = format!("{}=  ", " ".repeat(columns(&left) - 3));
        let (gap, lead) = if text.is_empty() {
            ("", &left)
        } else {
            ("\n", &equals)
        };
        text.push_str(gap);
        text.push_str(&in_designers_terms(&form, lead, page));
    }
    if depends_on_s && !nested {
        let limits = frequency_limits(name, forms, names, page);
        if !limits.is_empty() {
            text.push('\n');
            text.push_str(&limits);
        }
    }
    text
}

/// Kind of the response, where the poles are conjugate, the answer to a step.
fn what_it_does(name: &str, forms: &Forms, names: &Names<'_>, page: &Page) -> String {
    let Some(character) = &forms.character else {
        return String::new();
    };
    let words: Vec<String> = character::remarks(character, names)
        .into_iter()
        .map(|it| match it.inequality {
            Some((left, right)) => {
                let (left, right) = (READING.spell(&left), READING.spell(&right));
                let line = format!("{} {left} > {right}", it.words);
                if INDENT + columns(&line) <= page.width {
                    line
                } else {
                    it.short
                }
            }
            None => it.words,
        })
        .collect();
    let mut lines = fill::words(&words, " · ", page.width - INDENT);
    if let Some(step) = character::step(name, name, forms, names) {
        lines.push(format!("unit step: {}", step.text));
        if step.oscillates {
            lines.push(format!("           {}", character::OSCILLATION));
        }
    }
    if lines.is_empty() {
        return String::new();
    }
    let lines = lines.iter().map(|line| format!("  {line}\n"));
    format!("\n{}", lines.collect::<String>())
}

/// How long a fraction would be.
fn expanded_terms(above: &str, below: &str) -> String {
    let counted = |digits: &str| {
        let noun = if digits == "1" { "term" } else { "terms" };
        format!("{} {noun}", sentence::grouped(digits))
    };
    format!("expanded: {} over {}", counted(above), counted(below))
}

/// `H(s)  =  `, or `K  =  ` where the function does not depend on s.
fn left_side(name: &str, depends_on_s: bool) -> String {
    let argument = if depends_on_s { "(s)" } else { "" };
    format!("{name}{argument}  =  ")
}

fn in_place(left: &str, formula: &Expanded, names: &Names<'_>, page: &Page) -> String {
    let width = page
        .width
        .saturating_sub(INDENT + columns(left) + 2)
        .max(20);
    let above = polynomial_lines(&formula.numerator, names, width);
    let is_number = |side: &[Polynomial]| matches!(side, [only] if only.is_constant());
    let right = if matches!(formula.denominator.as_slice(), [one] if one.is_one()) {
        Block::lines(above)
    } else if is_number(&formula.numerator) && is_number(&formula.denominator) {
        let value = math::ratio(&formula.numerator[0], &formula.denominator[0], names);
        Block::text(READING.spell(&value))
    } else {
        let below = polynomial_lines(&formula.denominator, names, width);
        Block::fraction(&Block::lines(above), &Block::lines(below))
    };
    Block::beside(&[Block::text(left), right]).indented(INDENT)
}

/// `dc(H) = …`, `hf(H) = …`, as a claim would say it.
fn frequency_limits(name: &str, forms: &Forms, names: &Names<'_>, page: &Page) -> String {
    let mut lines = Vec::new();
    for (word, limit) in [("dc", &forms.dc), ("hf", &forms.hf)] {
        let first = format!("  {word}({name}) = ");
        match limit {
            Some(Limit::Value(value)) => {
                let rest = " ".repeat(columns(&first) - 2);
                let value = form::math(value, names);
                push_hanging(&mut lines, &first, &rest, &value, page.width);
            }
            Some(Limit::Infinite) => lines.push(format!("{first}infinite")),
            None => {}
        }
    }
    lines.iter().map(|line| format!("{line}\n")).collect()
}

/// The same in gain, time constants, frequencies, behind `left`.
fn in_designers_terms(form: &StandardForm, left: &str, page: &Page) -> String {
    let sign = if form.negative { "− " } else { "" };
    let lead = Block::text(format!("{left}{sign}"));
    let mut blocks = vec![lead.clone()];
    if let Some(gain) = &form.gain {
        let within = if form.fraction.is_some() {
            Within::Product
        } else {
            Within::Alone
        };
        blocks.push(Block::within(gain, within));
    }
    if form.gain.is_some() && form.fraction.is_some() {
        blocks.push(Block::text(" · "));
    }
    let one = Math::Number(1_i64.into());
    match &form.fraction {
        Some(fraction) => blocks.push(Block::within(fraction, Within::Product)),
        None if form.gain.is_none() => blocks.push(Block::math(&one)),
        None => {}
    }
    let mut block = Block::beside(&blocks);
    if INDENT + block.width() > page.width {
        let whole = Math::product(form.gain.iter().chain(&form.fraction).cloned());
        block = Block::beside(&[lead, wide(&whole, columns(left) + columns(sign), page)]);
    }
    let mut text = block.indented(INDENT);
    if !form.definitions.is_empty() {
        text.push('\n');
        text.push_str(&definitions(&form.definitions, columns(left), page));
    }
    text
}

/// A quotient that needs several lines above or below its bar.
fn wide(whole: &Math, left: usize, page: &Page) -> Block {
    let width = page.width.saturating_sub(INDENT + left + 2).max(20);
    let block = |math: &Math| {
        let line = READING.spell(math);
        if columns(&line) <= width {
            return Block::text(line);
        }
        let mut lines = Vec::new();
        push_hanging(&mut lines, "  ", "", math, width);
        Block::lines(lines)
    };
    match whole {
        Math::Quotient(above, below) => Block::fraction(&block(above), &block(below)),
        other => block(other),
    }
}

/// On one line where it fits, else one power of s a line, long coefficients broken.
fn polynomial_lines(coefficients: &[Polynomial], names: &Names<'_>, width: usize) -> Vec<String> {
    let line = READING.spell(&math::factored_series(coefficients, names));
    if columns(&line) <= width {
        return vec![line];
    }
    let mut lines = Vec::new();
    for (index, term) in math::power_terms(coefficients, names)
        .into_iter()
        .enumerate()
    {
        let (sign, body) = match (index, &term) {
            (0, _) => ("  ", term),
            (_, Math::Sum(_)) => ("+ ", term),
            _ => match term.split_sign() {
                (false, body) => ("+ ", body),
                (true, body) => ("− ", body),
            },
        };
        push_hanging(&mut lines, sign, "", &body, width);
    }
    lines
}

/// Lines of an expression behind a first prefix and blanks.
fn push_hanging(lines: &mut Vec<String>, first: &str, rest: &str, body: &Math, width: usize) {
    let lead = columns(first) - columns(rest);
    let room = width.saturating_sub(columns(rest)).max(20);
    for (index, line) in fill::lines(body, room, lead).into_iter().enumerate() {
        let prefix = if index == 0 { first } else { rest };
        lines.push(format!("{prefix}{line}"));
    }
}

fn named(left: &str, form: &NamedForm, page: &Page) -> String {
    let mut text = quotient_of_sums(left, form, page);
    if !form.definitions.is_empty() {
        text.push('\n');
        text.push_str(&definitions(&form.definitions, 0, page));
    }
    text
}

fn quotient_of_sums(left: &str, form: &NamedForm, page: &Page) -> String {
    let whole = Math::quotient(form.numerator.clone(), form.denominator.clone());
    let right = wide(&whole, columns(left), page);
    Block::beside(&[Block::text(left), right]).indented(INDENT)
}

/// `b1 = …` one below the other, the equals signs in one column; below a formula where all fit there.
fn definitions(list: &[Definition], left: usize, page: &Page) -> String {
    let widest = list.iter().map(|it| columns(&it.name)).max().unwrap_or(0);
    let value_column = |left: usize| INDENT + left + widest + 3;
    let fits = |left: usize| {
        let widths = list.iter().map(|it| columns(&READING.spell(&it.value)));
        widths.max().unwrap_or(0) + value_column(left) <= page.width
    };
    let left = if fits(left.saturating_sub(1)) {
        left.saturating_sub(1)
    } else {
        0
    };
    let mut lines = Vec::new();
    for definition in list {
        let gap = " ".repeat(left + widest - columns(&definition.name));
        let first = format!("  {gap}{} = ", definition.name);
        let rest = " ".repeat(columns(&first) - 2);
        push_hanging(&mut lines, &first, &rest, &definition.value, page.width);
    }
    lines.iter().map(|line| format!("{line}\n")).collect()
}

fn nested(name: &str, form: &Nested, names: &Names<'_>, page: &Page) -> String {
    let shared = form.definitions.iter().map(|(symbol, _)| *symbol);
    let names = names
        .clone()
        .with_shared(shared.zip(form.names.iter().map(String::as_str)));
    let definition = |(name, value): (&String, &(Symbol, Polynomial))| Definition {
        name: name.clone(),
        value: math::by_powers_of_s(&value.1, &names),
        terms: value.1.len(),
    };
    let named_form = NamedForm {
        numerator: math::by_powers_of_s(&form.numerator, &names),
        denominator: math::by_powers_of_s(&form.denominator, &names),
        definitions: form
            .names
            .iter()
            .zip(&form.definitions)
            .map(definition)
            .collect(),
    };
    let mut text = named(&left_side(name, true), &named_form, page);
    let terms = expanded_terms(&form.terms.0.to_string(), &form.terms.1.to_string());
    let mut notes = vec![format!("shared parts are named; {terms}")];
    if form.common_degree > 0 {
        notes.push(format!(
            "a common factor of degree {} in s is not divided out here",
            form.common_degree
        ));
    }
    text.push('\n');
    for note in notes {
        text.push_str(&remark(&note, page));
    }
    text
}

/// A sentence below a formula.
fn remark(sentence: &str, page: &Page) -> String {
    let words: Vec<String> = sentence.split(' ').map(str::to_owned).collect();
    let lines = fill::words(&words, " ", page.width - INDENT);
    let lines = lines.iter().map(|line| Paint(page.colour).quiet(line));
    lines.map(|line| format!("  {line}\n")).collect()
}
