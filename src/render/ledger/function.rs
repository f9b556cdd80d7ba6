//! The account of one function.

use crate::algebra::Symbol;
use crate::analysis::report::{Cancellation, Drop, Formula, FunctionReport, Hides, Verdict};
use crate::network::{Ask, CancellationClass};
use crate::render::answer::Answer;
use crate::render::ledger::{Evidence, Line, entry, note, noun};
use crate::render::math;
use crate::render::names::FrequencyPlace;
use crate::render::sentence::{self, listed};

/// The account of one function.
#[must_use]
pub fn function(answer: &Answer<'_>, result: &FunctionReport) -> Vec<Line> {
    let mut lines = Vec::new();
    if let (Some(network), Some(hidden)) = (result.network, result.hidden)
        && hidden > 0
    {
        lines.push(entry(
            false,
            network as usize,
            noun(network as usize, "natural frequency", "natural frequencies"),
            match asked_in(answer, result).as_str() {
                "" => Vec::new(),
                network => vec![Evidence::clause(network)],
            },
        ));
        lines.extend(hidden_lines(answer, result, hidden));
        lines.push(Line::Rule);
    }
    if !result.degrees_known() {
        let evidence = vec![Evidence::clause("not known: the budget was reached")];
        lines.push(note(format!("order of {}", result.name), evidence));
        return lines;
    }
    lines.push(entry(
        false,
        result.order as usize,
        format!("order of {}", result.name),
        order_evidence(answer, result),
    ));
    if result.order > 0 {
        lines.extend(drop_lines(answer, result));
    }
    lines.extend(no_effect_line(answer, result));
    lines
}

/// The network a question is asked in, where it is not the network as it stands.
fn asked_in(answer: &Answer<'_>, result: &FunctionReport) -> String {
    let question = answer.question(result);
    let mut words = Vec::new();
    match question.ask {
        Ask::Admittance(_) => words.push("port shorted".to_owned()),
        Ask::Ratio { .. } => words.push("lower response held at zero".to_owned()),
        Ask::ReturnRatio(_) => words.push("gain at zero".to_owned()),
        Ask::Transfer { .. }
        | Ask::Impedance(_)
        | Ask::Function(_)
        | Ask::Limit { .. }
        | Ask::FirstOrder { .. } => {}
    }
    if !question.without.is_empty() {
        words.push(format!(
            "{} taken out",
            listed(&answer.parts(&question.without))
        ));
    }
    words.join(", ")
}

fn hidden_lines(answer: &Answer<'_>, result: &FunctionReport, hidden: u32) -> Vec<Line> {
    let mut lines = Vec::new();
    let mut named = 0;
    for it in result.cancellations.iter().flatten() {
        if it.class == CancellationClass::Coincidental {
            continue;
        }
        named += it.degree * it.multiplicity;
        lines.push(hidden_line(answer, it));
    }
    if named < hidden {
        let rest = (hidden - named) as usize;
        let label = if result.zero {
            "hidden: the function is zero"
        } else {
            "hidden"
        };
        lines.push(entry(true, rest, label, Vec::new()));
    }
    lines
}

fn hidden_line(answer: &Answer<'_>, it: &Cancellation) -> Line {
    let label = match it.hides {
        Some(Hides::Both) => "hidden: neither driven nor seen".to_owned(),
        Some(hides) => format!("hidden: {}", sentence::hides(hides)),
        None => "hidden".to_owned(),
    };
    let names = answer.names(FrequencyPlace::First);
    let factor = math::by_powers_of_s(&it.factor, &names).power(it.multiplicity);
    let count = (it.degree * it.multiplicity) as usize;
    let mut evidence = vec![Evidence::Formula(factor)];
    evidence.extend(cause(answer, it));
    entry(true, count, label, evidence)
}

/// Why a factor cancels.
#[must_use]
pub fn cause(answer: &Answer<'_>, it: &Cancellation) -> Vec<Evidence> {
    match it.class {
        CancellationClass::Structural => vec![Evidence::clause(structural(it))],
        CancellationClass::Matched => vec![Evidence::clause(matched(answer, it))],
        CancellationClass::Coincidental => coincidental(answer, it),
    }
}

fn structural(it: &Cancellation) -> String {
    if !it.static_set.is_empty() {
        return format!("static mode of {}", listed(&it.static_set));
    }
    match it.parts.as_slice() {
        [] if it.factor.as_symbol() == Some(Symbol::S) => "a static mode (at s = 0)".to_owned(),
        [] => "whatever the values".to_owned(),
        [part] => format!("{part} leaves the answer"),
        parts => format!("{} leave the answer", listed(parts)),
    }
}

fn matched(answer: &Answer<'_>, it: &Cancellation) -> String {
    let mut text = format!("because {}", listed(&answer.relations(&it.because)));
    for set in &it.also_because {
        text.push_str(&format!(
            "; also because {}",
            listed(&answer.relations(set))
        ));
    }
    text
}

fn coincidental(answer: &Answer<'_>, it: &Cancellation) -> Vec<Evidence> {
    let names = answer.names(FrequencyPlace::First);
    let mut evidence = vec![Evidence::clause("at the nominal values only")];
    evidence.extend(it.conditions.iter().map(|condition| {
        let (left, right) = math::equation(condition, &names);
        Evidence::Equation("where".to_owned(), left, right)
    }));
    if it.conditions.is_empty() {
        evidence.push(Evidence::clause("its condition is too long to state"));
    }
    evidence
}

fn order_evidence(answer: &Answer<'_>, result: &FunctionReport) -> Vec<Evidence> {
    let mut evidence = Vec::new();
    if result.zero {
        evidence.push(Evidence::clause(format!("{} is zero", result.name)));
        return evidence;
    }
    if result.hidden == Some(0) && result.order > 0 {
        let shown = noun(
            result.order as usize,
            "the natural frequency shows",
            "all natural frequencies show",
        );
        evidence.push(Evidence::clause(match asked_in(answer, result).as_str() {
            "" => shown.to_owned(),
            network => format!("{shown} ({network})"),
        }));
    }
    if result.numerator_order > result.order {
        evidence.push(Evidence::clause(format!(
            "improper: numerator degree {}",
            result.numerator_order
        )));
    }
    if result.order > 0
        && matches!(result.formula, Formula::Expanded(_))
        && result
            .drops_when
            .iter()
            .all(|it| it.possible == Verdict::No)
    {
        evidence.push(Evidence::clause("never lower for positive values"));
    }
    let origin = &result.origin_when;
    if !origin.is_empty() && origin.iter().all(|it| it.possible == Verdict::No) {
        evidence.push(Evidence::clause(
            "no pole goes to s = 0 for positive values",
        ));
    }
    evidence
}

fn drop_lines(answer: &Answer<'_>, result: &FunctionReport) -> Vec<Line> {
    let possible = |(it, _): &(&Drop, &str)| it.possible != Verdict::No;
    let lower = result.drops_when.iter().map(|it| (it, "lower"));
    let origin = result
        .origin_when
        .iter()
        .map(|it| (it, "a pole goes to s = 0"));
    lower
        .chain(origin)
        .filter(possible)
        .map(|(it, what)| {
            let names = answer.names(FrequencyPlace::First);
            let label = match it.possible {
                Verdict::Yes => format!("{what} where"),
                Verdict::No | Verdict::Undecided => format!("{what} where (if at all)"),
            };
            let (left, right) = math::equation(&it.condition, &names);
            let mut evidence = vec![Evidence::Equation(String::new(), left, right)];
            let example = it.example.iter();
            let example: Vec<String> = example
                .map(|(symbol, value)| format!("{} = {value}", names.name(*symbol)))
                .collect();
            if !example.is_empty() {
                evidence.push(Evidence::clause(format!(
                    "for example {}",
                    example.join(", ")
                )));
            }
            note(label, evidence)
        })
        .collect()
}

fn no_effect_line(answer: &Answer<'_>, result: &FunctionReport) -> Option<Line> {
    if result.no_effect.is_empty() || result.zero {
        return None;
    }
    let (explained, plain): (Vec<_>, Vec<_>) =
        result.no_effect.iter().partition(|it| it.reason.is_some());
    let mut evidence = Vec::new();
    for it in explained {
        let reason = it.reason.as_deref().unwrap_or_default();
        evidence.push(Evidence::clause(format!(
            "{}: {reason}",
            answer.part(it.element)
        )));
    }
    let plain: Vec<&str> = plain.iter().map(|it| answer.part(it.element)).collect();
    if !plain.is_empty() {
        evidence.push(Evidence::parts(&plain));
    }
    Some(note("without any effect", evidence))
}

/// `order 1 of 2 natural frequencies · numerator degree 0`.
#[must_use]
pub fn degrees(result: &FunctionReport) -> String {
    if !result.degrees_known() {
        return "order not known".to_owned();
    }
    let mut text = format!("order {}", result.order);
    if let (Some(network), Some(hidden)) = (result.network, result.hidden) {
        match (hidden, network) {
            (0, 0) => {}
            (0, _) => text.push_str(", nothing hidden"),
            (1, 1) => text.push_str(", the one natural frequency is hidden"),
            (all, network) if all == network => {
                text.push_str(&format!(", all {network} natural frequencies are hidden"));
            }
            _ => text.push_str(&format!(
                ", {hidden} of {network} natural frequencies hidden"
            )),
        }
    }
    if result.numerator_order > result.order {
        text.push_str(&format!(
            ", improper: numerator degree {}",
            result.numerator_order
        ));
    }
    text
}
