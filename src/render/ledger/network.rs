//! The account of the network.

use crate::analysis::report::{NetworkOrder, StaticSet, Stored};
use crate::network::{ElementId, Kind};
use crate::render::answer::Answer;
use crate::render::ledger::{Between, Evidence, Line, entry, noun};
use crate::render::names::natural;
use crate::render::sentence::{self, listed};

/// The account of the network.
#[must_use]
pub fn network(answer: &Answer<'_>) -> Vec<Line> {
    let order = &answer.report.order;
    let mut reactive = answer.parts(&order.reactive);
    reactive.sort_by(|left, right| natural(left, right));
    let mut lines = vec![entry(
        false,
        order.reactive.len(),
        noun(order.reactive.len(), "reactive part", "reactive parts"),
        vec![Evidence::parts(&reactive)],
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
    lines
}

fn device_states(answer: &Answer<'_>, order: &NetworkOrder) -> Line {
    let count = order.device_states as usize;
    let relations = answer.relations(&order.device_state_relations);
    let shown = shown(relations.len());
    let rest = (shown < relations.len()).then(|| more(relations.len() - shown));
    let relations = relations[..shown].iter().map(|it| (*it).to_owned());
    let relations = relations.chain(rest).collect();
    entry(
        false,
        count,
        noun(count, "state inside a device", "states inside devices"),
        vec![Evidence::Items(relations, Between::Comma)],
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
        lines.push(set_entry(answer, loops, label, Between::Dash));
    }
    let cutsets = &order.inductor_cutsets;
    if !cutsets.is_empty() {
        let label = match (has_source(answer, cutsets), cutsets.len()) {
            (true, 1) => "cut-set of inductors and sources",
            (true, _) => "cut-sets of inductors and sources",
            (false, 1) => "cut-set of inductors",
            (false, _) => "cut-sets of inductors",
        };
        lines.push(set_entry(answer, cutsets, label, Between::Bar));
    }
    lines
}

fn has_source(answer: &Answer<'_>, sets: &[Vec<ElementId>]) -> bool {
    let mut members = sets.iter().flatten();
    members.any(|id| matches!(answer.network.element(*id).kind, Kind::Source(_)))
}

/// Lines of evidence that are listed; the others are counted.
const LISTED: usize = 10;

/// How many of a list are shown: a line for one more would say no more than the one itself.
fn shown(count: usize) -> usize {
    if count > LISTED + 1 { LISTED } else { count }
}

fn more(count: usize) -> String {
    format!("… {count} more")
}

fn set_entry(answer: &Answer<'_>, sets: &[Vec<ElementId>], label: &str, between: Between) -> Line {
    let shown = shown(sets.len());
    let listed = sets[..shown].iter().map(|set| {
        let members = answer.parts(set).into_iter().map(str::to_owned);
        Evidence::Items(members.collect(), between)
    });
    let mut evidence: Vec<Evidence> = listed.collect();
    if shown < sets.len() {
        evidence.push(Evidence::clause(more(sets.len() - shown)));
    }
    entry(true, sets.len(), label, evidence)
}

fn constraints(order: &NetworkOrder) -> Line {
    let count = order.constraints as usize;
    let all = &order.constraint_evidence;
    let shown = shown(all.len());
    let clauses = all[..shown].iter().map(|it| {
        if it.clause.is_empty() {
            Evidence::clause(sentence::listed(&it.names))
        } else {
            Evidence::clause(&it.clause)
        }
    });
    let mut evidence: Vec<Evidence> = clauses.collect();
    if shown < all.len() {
        evidence.push(Evidence::clause(more(all.len() - shown)));
    }
    entry(
        true,
        count,
        noun(count, "constraint", "constraints"),
        evidence,
    )
}

fn natural_frequencies(answer: &Answer<'_>, order: &NetworkOrder) -> Line {
    let count = order.network as usize;
    let mut evidence = Vec::new();
    match (order.moving(), order.static_modes) {
        (0, 0) => {}
        (1, 0) => evidence.push(Evidence::clause("moving")),
        (_, 0) => evidence.push(Evidence::clause("all moving")),
        (0, 1) => evidence.push(Evidence::clause("static (at s = 0)")),
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
