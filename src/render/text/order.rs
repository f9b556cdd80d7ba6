//! The order ledger: from the parts to the degree, each line with its evidence.

use crate::analysis::report::{
    Cancellation, Drop, FunctionReport, NetworkOrder, StaticSet, Stored, Verdict,
};
use crate::network::{Ask, CancellationClass, ElementId, Kind};
use crate::render::answer::Answer;
use crate::render::linear::READING;
use crate::render::math;
use crate::render::names::FrequencyPlace;
use crate::render::sentence::{self, listed};
use crate::render::text::Page;
use crate::render::text::fill;
use crate::render::text::ledger::{self, Evidence, Line};
use crate::render::text::paint::Paint;

/// The account of the network.
pub(super) fn network(answer: &Answer<'_>, page: &Page) -> String {
    let order = &answer.report.order;
    let mut lines = vec![entry(
        false,
        order.reactive.len(),
        noun(order.reactive.len(), "reactive part", "reactive parts"),
        vec![names(&sentence::runs(&answer.parts(&order.reactive)))],
    )];
    if order.device_states > 0 {
        lines.push(device_states(answer, order));
    }
    lines.extend(taken_by_sets(answer, order));
    if order.constraints > 0 {
        lines.push(constraints(order));
    }
    if lines.len() > 1 {
        lines.push(Line::Rule);
    }
    lines.push(natural_frequencies(answer, order));
    let heading = Paint(page.colour).strong("Order of the network");
    format!("{heading}\n{}", ledger::draw(&lines, page))
}

fn device_states(answer: &Answer<'_>, order: &NetworkOrder) -> Line {
    let count = order.device_states as usize;
    let relations = answer.relations(&order.device_state_relations);
    let relations = relations.into_iter().map(str::to_owned).collect();
    entry(
        false,
        count,
        noun(count, "state inside a device", "states inside devices"),
        vec![Evidence::Items(relations, ", ")],
    )
}

fn taken_by_sets(answer: &Answer<'_>, order: &NetworkOrder) -> Vec<Line> {
    let mut lines = Vec::new();
    let loops = &order.capacitor_loops;
    if !loops.is_empty() {
        let label = match (has_source(answer, loops), loops.len()) {
            (true, 1) => "loop of capacitors and sources",
            (true, _) => "loops of capacitors and sources",
            (false, 1) => "loop of capacitors",
            (false, _) => "loops of capacitors",
        };
        lines.push(set_entry(answer, loops, label, " – "));
    }
    let cutsets = &order.inductor_cutsets;
    if !cutsets.is_empty() {
        let label = match (has_source(answer, cutsets), cutsets.len()) {
            (true, 1) => "cut-set of inductors and sources",
            (true, _) => "cut-sets of inductors and sources",
            (false, 1) => "cut-set of inductors",
            (false, _) => "cut-sets of inductors",
        };
        lines.push(set_entry(answer, cutsets, label, " | "));
    }
    lines
}

fn has_source(answer: &Answer<'_>, sets: &[Vec<ElementId>]) -> bool {
    let mut members = sets.iter().flatten();
    members.any(|id| matches!(answer.network.element(*id).kind, Kind::Source(_)))
}

fn set_entry(
    answer: &Answer<'_>,
    sets: &[Vec<ElementId>],
    label: &str,
    between: &'static str,
) -> Line {
    let evidence = sets.iter().map(|set| {
        let members = answer.parts(set).into_iter().map(str::to_owned);
        Evidence::Items(members.collect(), between)
    });
    entry(true, sets.len(), label, evidence.collect())
}

fn constraints(order: &NetworkOrder) -> Line {
    let count = order.constraints as usize;
    let evidence = order.constraint_evidence.iter().map(|it| {
        if it.clause.is_empty() {
            Evidence::clause(listed(&it.names))
        } else {
            Evidence::clause(&it.clause)
        }
    });
    entry(
        true,
        count,
        noun(count, "held by a constraint", "held by constraints"),
        evidence.collect(),
    )
}

fn natural_frequencies(answer: &Answer<'_>, order: &NetworkOrder) -> Line {
    let count = order.network as usize;
    let mut evidence = Vec::new();
    match (order.moving(), order.static_modes) {
        (0, 0) => {}
        (_, 0) => evidence.push(Evidence::clause("all moving")),
        (0, _) => evidence.push(Evidence::clause("all static (at s = 0)")),
        (moving, fixed) => {
            evidence.push(Evidence::clause(format!(
                "{moving} moving, {fixed} static (at s = 0)"
            )));
        }
    }
    evidence.extend(order.static_sets.iter().map(|set| static_set(answer, set)));
    if order.integrators > 0 {
        let times = sentence::counted(order.integrators as usize, "integrator", "integrators");
        evidence.push(Evidence::clause(format!(
            "{times} made by controlled sources or relations"
        )));
    }
    entry(
        false,
        count,
        noun(count, "natural frequency", "natural frequencies"),
        evidence,
    )
}

fn static_set(answer: &Answer<'_>, set: &StaticSet) -> Evidence {
    let members = listed(&answer.parts(&set.members));
    Evidence::clause(match set.stored {
        Stored::Charge if set.members.len() == 1 => format!("{members} keeps its charge"),
        Stored::Charge => format!("charge stays on the cut-set {members}"),
        Stored::Flux if set.members.len() == 1 => format!("{members} keeps its flux"),
        Stored::Flux => format!("flux stays in the loop {members}"),
    })
}

/// `H = voltage(out) / Vs`.
pub(super) fn heading(answer: &Answer<'_>, result: &FunctionReport, page: &Page) -> String {
    let heading = format!("{} = {}", result.name, answer.question(result).text);
    format!("{}\n", Paint(page.colour).strong(&heading))
}

/// The account of one function.
pub(super) fn function(answer: &Answer<'_>, result: &FunctionReport, page: &Page) -> String {
    let mut lines = Vec::new();
    if let (Some(network), Some(hidden)) = (result.network, result.hidden)
        && hidden > 0
    {
        lines.push(entry(
            false,
            network as usize,
            noun(network as usize, "natural frequency", "natural frequencies"),
            vec![Evidence::clause(asked_in(answer, result))],
        ));
        lines.extend(hidden_lines(answer, result, hidden));
        lines.push(Line::Rule);
    }
    lines.push(entry(
        false,
        result.order as usize,
        format!("order of {}", result.name),
        order_evidence(answer, result),
    ));
    lines.extend(drop_lines(answer, result));
    lines.extend(no_effect_line(answer, result));
    let mut text = heading(answer, result, page);
    text.push_str(&ledger::draw(&lines, page));
    text.push_str(&relied_on(&result.relied_on, page));
    text
}

/// The network a question is asked in, where it is not the network as it stands.
fn asked_in(answer: &Answer<'_>, result: &FunctionReport) -> String {
    let question = answer.question(result);
    let mut words = Vec::new();
    match question.ask {
        Ask::Admittance(_) => words.push("with the port shorted".to_owned()),
        Ask::Ratio { .. } => words.push("with the lower response held at zero".to_owned()),
        Ask::ReturnRatio(_) => words.push("with the gain at zero".to_owned()),
        Ask::Transfer { .. }
        | Ask::Impedance(_)
        | Ask::Function(_)
        | Ask::Limit { .. }
        | Ask::FirstOrder { .. } => {}
    }
    if !question.without.is_empty() {
        words.push(format!(
            "without {}",
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
        Some(crate::analysis::report::Hides::Both) => "hidden: neither driven nor seen".to_owned(),
        Some(hides) => format!("hidden: {}", sentence::hides(hides)),
        None => "hidden".to_owned(),
    };
    let names = answer.names(FrequencyPlace::First);
    let factor = math::by_powers_of_s(&it.factor, &names).power(it.multiplicity);
    let count = (it.degree * it.multiplicity) as usize;
    let evidence = vec![
        Evidence::clause(READING.spell(&factor)),
        Evidence::clause(cause(answer, it)),
    ];
    entry(true, count, label, evidence)
}

/// Why a factor cancels, as a clause.
pub(super) fn cause(answer: &Answer<'_>, it: &Cancellation) -> String {
    match it.class {
        CancellationClass::Structural if !it.static_set.is_empty() => {
            format!("static mode of {}", listed(&it.static_set))
        }
        CancellationClass::Structural if it.parts.is_empty() => "whatever the values".to_owned(),
        CancellationClass::Structural => {
            let verb = if it.parts.len() == 1 {
                "leaves"
            } else {
                "leave"
            };
            format!("{} {verb} the answer", listed(&it.parts))
        }
        CancellationClass::Matched => {
            let because = listed(&answer.relations(&it.because));
            let also = it.also_because.iter().map(|set| {
                let set = listed(&answer.relations(set));
                format!("; also because {set}")
            });
            format!("because {because}{}", also.collect::<String>())
        }
        CancellationClass::Coincidental => {
            let names = answer.names(FrequencyPlace::First);
            let conditions = it
                .conditions
                .iter()
                .map(|it| sentence::equation(it, &names));
            let conditions: Vec<String> = conditions.collect();
            if conditions.is_empty() {
                return "at the nominal values only".to_owned();
            }
            format!("at the nominal values only, where {}", listed(&conditions))
        }
    }
}

fn order_evidence(answer: &Answer<'_>, result: &FunctionReport) -> Vec<Evidence> {
    let mut evidence = Vec::new();
    if result.zero {
        evidence.push(Evidence::clause(format!("{} is zero", result.name)));
        return evidence;
    }
    if result.hidden == Some(0) && result.order > 0 {
        evidence.push(Evidence::clause(match asked_in(answer, result).as_str() {
            "" => "all natural frequencies show".to_owned(),
            network => format!("all natural frequencies show, {network}"),
        }));
    }
    if result.numerator_order > result.order {
        evidence.push(Evidence::clause(format!(
            "improper: numerator degree {}",
            result.numerator_order
        )));
    }
    if result.order > 0
        && result
            .drops_when
            .iter()
            .all(|it| it.possible == Verdict::No)
    {
        evidence.push(Evidence::clause("never lower for positive values"));
    }
    evidence
}

fn drop_lines(answer: &Answer<'_>, result: &FunctionReport) -> Vec<Line> {
    let possible = |it: &&Drop| it.possible != Verdict::No;
    let drops = result.drops_when.iter().filter(possible);
    drops
        .map(|it| {
            let names = answer.names(FrequencyPlace::First);
            let label = match it.possible {
                Verdict::Yes => "lower where",
                Verdict::No | Verdict::Undecided => "lower where (if at all)",
            };
            let mut evidence = vec![Evidence::clause(sentence::equation(&it.condition, &names))];
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
            Line::Note {
                label: label.to_owned(),
                evidence,
            }
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
        evidence.push(names(&sentence::runs(&plain)));
    }
    Some(Line::Note {
        label: "without any effect".to_owned(),
        evidence,
    })
}

/// `order 1 of 2 natural frequencies · numerator degree 0`.
pub(super) fn degrees(result: &FunctionReport) -> String {
    let mut text = format!("order {}", result.order);
    if let (Some(network), Some(hidden)) = (result.network, result.hidden) {
        let frequencies =
            sentence::counted(network as usize, "natural frequency", "natural frequencies");
        match hidden {
            0 if network == 0 => {}
            0 => text.push_str(&format!(", all {frequencies} show")),
            _ => text.push_str(&format!(", {hidden} of {frequencies} hidden")),
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

/// Signs and assumptions an answer rests on; empty if there are none.
pub(super) fn relied_on(list: &[String], page: &Page) -> String {
    if list.is_empty() {
        return String::new();
    }
    let mut items = list.to_vec();
    items[0] = format!("relies on {}", items[0]);
    let lines = fill::words(&items, ", ", page.width - 2);
    let lines = lines.iter().map(|line| Paint(page.colour).quiet(line));
    lines.map(|line| format!("  {line}\n")).collect()
}

fn entry(taken: bool, number: usize, label: impl Into<String>, evidence: Vec<Evidence>) -> Line {
    Line::Entry {
        taken,
        number,
        label: label.into(),
        evidence,
    }
}

fn noun<'a>(count: usize, singular: &'a str, plural: &'a str) -> &'a str {
    if count == 1 { singular } else { plural }
}

fn names(list: &[String]) -> Evidence {
    Evidence::Items(list.to_vec(), "  ")
}
