//! A reduction, ready to be written: words and expressions are decided here, writers only spell.

use std::collections::BTreeMap;

use crate::analysis::equivalent::{Definition, PartId, Reduction, Rule, Step};
use crate::analysis::report::{Report, Verdict};
use crate::network::{ElementId, Network, Value};
use crate::render::math::Math;
use crate::render::netlist::{definition, number_math};

/// Deepest nesting and most leaves of a value in the original names; longer ones stay in steps.
const DEEPEST: usize = 12;
const LONGEST: usize = 60;

/// A reduction with its proof.
#[derive(Clone, Debug)]
pub struct Reduced<'a> {
    /// The original.
    pub network: &'a Network,
    /// What was done to it.
    pub reduction: &'a Reduction,
    /// The reduced network in the language; `None` where it cannot be written.
    pub text: Option<&'a str>,
    /// Whether all its functions are those of the original.
    pub proven: Verdict,
    /// Why that is not proven.
    pub doubts: Vec<String>,
    /// What is worth knowing about the states of the reduced network.
    pub remarks: Vec<String>,
}

/// One step in words.
#[derive(Clone, Debug)]
pub struct StepLine {
    /// `series`, `held by Vs`.
    pub words: String,
    /// The same as one short key.
    pub key: &'static str,
    /// Names of the parts that go in.
    pub parts: Vec<String>,
    /// The part that comes out, with its value over the parts of this step and over the parts of the
    /// file where that says more and is not long.
    pub makes: Option<(String, Math, Option<Math>)>,
}

impl Reduced<'_> {
    /// The steps in order.
    #[must_use]
    pub fn steps(&self) -> Vec<StepLine> {
        let mut whole = BTreeMap::new();
        let steps = self.reduction.steps.iter();
        steps.map(|step| self.line(step, &mut whole)).collect()
    }

    fn line(&self, step: &Step, whole: &mut BTreeMap<PartId, (Math, usize)>) -> StepLine {
        let parts = &self.reduction.circuit.parts;
        let by = step.by.as_deref().unwrap_or("a source");
        let (key, words) = match step.rule {
            Rule::Series => ("series", "series".to_owned()),
            Rule::Exchange => ("exchange", "series, others moved aside".to_owned()),
            Rule::Parallel => ("parallel", "parallel".to_owned()),
            Rule::NoCurrent => ("no current", "no current".to_owned()),
            Rule::NoVoltage => match &step.by {
                None => ("no voltage", "no voltage".to_owned()),
                Some(by) => ("no voltage", format!("no voltage, by {by}")),
            },
            Rule::Held => ("held", format!("voltage held by {by}")),
            Rule::Driven => ("driven", format!("current set by {by}")),
            Rule::StarDelta => ("star-delta", "star to triangle".to_owned()),
        };
        let makes = step.makes.map(|id| {
            let part = &parts[id];
            let short = definition(&part.definition, part.class, &mut |it| self.short(it));
            let mut depth = 0;
            let long = definition(&part.definition, part.class, &mut |it| {
                let (math, deep) = match whole.get(&it) {
                    Some(known) => known.clone(),
                    None => (self.short(it), 0),
                };
                depth = depth.max(deep + 1);
                math
            });
            let long = flattened(long);
            let fits = depth <= DEEPEST && long.leaves() <= LONGEST;
            if fits {
                whole.insert(id, (long.clone(), depth));
            }
            let says_more = fits && long != short;
            (part.name.clone(), short, says_more.then_some(long))
        });
        StepLine {
            words,
            key,
            parts: step
                .parts
                .iter()
                .map(|&it| parts[it].name.clone())
                .collect(),
            makes,
        }
    }

    fn short(&self, id: PartId) -> Math {
        let part = &self.reduction.circuit.parts[id];
        match &part.definition {
            Definition::Given(_, Value::Symbol(symbol)) => {
                Math::name(self.network.symbols().name(*symbol))
            }
            Definition::Given(_, Value::Number(number)) => number_math(number),
            _ => Math::name(&part.name),
        }
    }
}

/// Parallel combinations within parallel combinations are one.
fn flattened(math: Math) -> Math {
    match math {
        Math::Parallel(members) => Math::Parallel(
            members
                .into_iter()
                .flat_map(|it| match it {
                    Math::Parallel(inner) => inner,
                    other => vec![other],
                })
                .collect(),
        ),
        other => other,
    }
}

/// What the order ledger of the reduced network says of parts that share a state.
#[must_use]
pub fn remarks(network: &Network, report: &Report) -> Vec<String> {
    let loops = report.order.capacitor_loops.iter();
    let loops = loops.filter_map(|set| shared(network, set, Shared::Loop));
    let cuts = report.order.inductor_cutsets.iter();
    let cuts = cuts.filter_map(|set| shared(network, set, Shared::CutSet));
    loops.chain(cuts).collect()
}

#[derive(Clone, Copy, PartialEq, Eq)]
enum Shared {
    Loop,
    CutSet,
}

fn shared(network: &Network, set: &[ElementId], kind: Shared) -> Option<String> {
    let (reactive, others): (Vec<ElementId>, Vec<ElementId>) = set
        .iter()
        .partition(|id| network.element(**id).is_reactive());
    let names = |ids: &[ElementId], between: &str| -> String {
        let names: Vec<&str> = ids
            .iter()
            .map(|id| network.element(*id).name.as_str())
            .collect();
        names.join(between)
    };
    let with = match others.as_slice() {
        [] => String::new(),
        some => format!(" with {}", names(some, ", ")),
    };
    let (figure, fixed) = match kind {
        Shared::Loop => ("close a loop", "voltage"),
        Shared::CutSet => ("are a cut-set", "current"),
    };
    match reactive.as_slice() {
        [_, _] if others.is_empty() => None,
        [_, _] => Some(format!(
            "{} {figure}{with}: one state, of {}; either {fixed} is that of the other beside {}",
            names(&reactive, " and "),
            names(&reactive, " + "),
            names(&others, ", "),
        )),
        [_, _, _, ..] => Some(format!(
            "{} {figure}{with}: one of their {fixed}s follows from the others",
            names(&reactive, ", "),
        )),
        _ => None,
    }
}
