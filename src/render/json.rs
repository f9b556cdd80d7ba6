//! The JSON of the answers. Expressions are strings in the syntax of the language, integers exact.

mod numbers;
mod reduction;
mod states;

use serde_json::{Map, Value, json};

use crate::algebra::Polynomial;
use crate::analysis::form::{Form, Forms, Inequality, Kind, Limit, Section, Shape, TimeConstants};
use crate::analysis::report::{
    Cancellation, ClaimReport, Drop, Expanded, Finding, Formula, FunctionReport, Nested,
    NetworkOrder, Verdict,
};
use crate::diagnostic::Diagnostic;
use crate::network::CancellationClass;
use crate::numeric::drift::Cancelled;
use crate::render::answer::{Answer, Detail};
use crate::render::character;
use crate::render::form;
use crate::render::linear::MACHINE;
use crate::render::math::{self, Math};
use crate::render::names::{FrequencyPlace, Names};
use crate::render::product;
use crate::render::sentence;
use crate::source::{SourceId, Sources};

pub use reduction::reduction;

type Object = Map<String, Value>;

/// The answer about one file.
#[must_use]
pub fn answer(answer: &Answer<'_>) -> Value {
    let mut object = Object::new();
    object.insert("cutloop".into(), json!(1));
    object.insert("file".into(), json!(answer.file()));
    if let Some(title) = answer.network.title() {
        object.insert("title".into(), json!(title));
    }
    object.insert("order".into(), order(answer, &answer.report.order));
    if let Some(found) = &answer.report.states {
        states::insert(&mut object, answer, found);
    } else if answer.detail == Detail::Claims {
        let claims = answer.report.claims.iter();
        object.insert(
            "claims".into(),
            claims.map(|it| claim(answer, it)).collect(),
        );
    } else {
        let results = answer.report.results.iter();
        object.insert(
            "results".into(),
            results.map(|it| result(answer, it)).collect(),
        );
    }
    let main = Some(answer.source);
    let warnings = answer.all_warnings();
    object.insert(
        "warnings".into(),
        warnings
            .map(|it| message(it, answer.sources, main))
            .collect(),
    );
    Value::Object(object)
}

/// The answer about a file that cannot be used or was not answered. `file` is named where there are
/// several.
#[must_use]
pub fn errors(
    diagnostics: &[Diagnostic],
    sources: &Sources,
    main: Option<SourceId>,
    file: Option<&str>,
) -> Value {
    let mut object = Object::new();
    object.insert("cutloop".into(), json!(1));
    if let Some(file) = file {
        object.insert("file".into(), json!(file));
    }
    let errors = diagnostics.iter().filter(|it| it.is_error());
    object.insert(
        "errors".into(),
        errors.map(|it| message(it, sources, main)).collect(),
    );
    Value::Object(object)
}

/// Message with line, column and help where they are known; the file where it is not the main one.
fn message(diagnostic: &Diagnostic, sources: &Sources, main: Option<SourceId>) -> Value {
    let mut object = Object::new();
    object.insert("message".into(), json!(diagnostic.message));
    if let Some(place) = diagnostic.place {
        let (line, column) = sources.position(place);
        object.insert("line".into(), json!(line));
        object.insert("column".into(), json!(column));
        if main.is_some_and(|main| main != place.source) {
            object.insert("file".into(), json!(sources.get(place.source).name));
        }
    }
    if let Some(help) = &diagnostic.help {
        object.insert("help".into(), json!(help));
    }
    Value::Object(object)
}

fn order(answer: &Answer<'_>, order: &NetworkOrder) -> Value {
    let lists =
        |sets: &[Vec<_>]| -> Vec<Vec<&str>> { sets.iter().map(|set| answer.parts(set)).collect() };
    let static_sets = order.static_sets.iter();
    let static_sets: Vec<_> = static_sets.map(|set| answer.parts(&set.members)).collect();
    json!({
        "reactive": order.reactive.len(),
        "device_states": order.device_states,
        "capacitor_loops": lists(&order.capacitor_loops),
        "inductor_cutsets": lists(&order.inductor_cutsets),
        "constraints": order.constraints,
        "network": order.network,
        "static": order.static_modes,
        "moving": order.moving(),
        "static_sets": static_sets,
        "integrators": order.integrators,
    })
}

fn result(answer: &Answer<'_>, result: &FunctionReport) -> Value {
    let names = answer.names(FrequencyPlace::Last);
    let mut object = Object::new();
    object.insert("name".into(), json!(result.name));
    object.insert("asks".into(), json!(answer.question(result).text));
    if answer.detail != Detail::Order {
        insert_formula(&mut object, &result.formula, &names);
        insert_forms(&mut object, &result.forms, &names);
    }
    insert_degrees(&mut object, answer, result, &names);
    if answer.detail == Detail::Audit {
        insert_cancellations(&mut object, answer, result, &names);
    }
    if let Some(figures) = answer.figures_of(result)
        && figures.quotient.is_some()
    {
        object.insert(
            "near".into(),
            figures.near.iter().map(numbers::near).collect(),
        );
    }
    if !result.relied_on.is_empty() {
        object.insert("relied_on".into(), json!(result.relied_on));
    }
    if answer.detail != Detail::Order && result.checked_points > 0 {
        let checked = json!({
            "method": "exact substitution", "points": result.checked_points, "agree": true,
        });
        object.insert("checked".into(), checked);
    }
    Value::Object(object)
}

fn insert_formula(object: &mut Object, formula: &Formula, names: &Names<'_>) {
    match formula {
        Formula::Expanded(Expanded {
            numerator,
            denominator,
        }) => {
            let list = |side: &[Polynomial]| -> Vec<String> {
                side.iter().map(|it| expression(it, names)).collect()
            };
            object.insert("numerator".into(), json!(list(numerator)));
            object.insert("denominator".into(), json!(list(denominator)));
        }
        Formula::Nested(form) => {
            object.insert("nested".into(), nested(form, names));
        }
        Formula::OverBudget(exceeded) => {
            object.insert("over_budget".into(), json!(sentence::over_budget(exceeded)));
        }
    }
}

/// Proven forms: as a designer writes them, and with a first coefficient of one below.
fn insert_forms(object: &mut Object, forms: &Forms, names: &Names<'_>) {
    let spelled = |it: &Form| MACHINE.spell(&form::math(it, names));
    let list = |side: &[Form]| -> Vec<String> { side.iter().map(spelled).collect() };
    if let Some(designer) = &forms.designer {
        let side = |sections: &[Section]| -> Vec<Value> {
            sections.iter().map(|it| section(it, names)).collect()
        };
        let value = json!({
            "gain": spelled(&designer.gain),
            "power_of_s": designer.power,
            "numerator": side(&designer.above),
            "denominator": side(&designer.below),
        });
        object.insert("designer".into(), value);
    }
    if let Some(normalised) = &forms.normalised {
        let value = json!({
            "numerator": list(&normalised.numerator),
            "denominator": list(&normalised.denominator),
        });
        object.insert("normalised".into(), value);
    }
    for (key, limit) in [("dc", &forms.dc), ("hf", &forms.hf)] {
        let text = match limit {
            Some(Limit::Value(value)) => spelled(value),
            Some(Limit::Infinite) => "infinite".to_owned(),
            None => continue,
        };
        object.insert(key.into(), json!(text));
    }
    if let Some(found) = &forms.time_constants {
        object.insert("time_constants".into(), time_constants(found, names));
    }
    let Some(character) = &forms.character else {
        return;
    };
    if let Some(kind) = &character.kind {
        object.insert("kind".into(), json!(character::word(kind)));
        if let Kind::UnevenNotch(above) = kind {
            object.insert("low_pass_notch_where".into(), inequality(above, names));
        }
    }
    if !character.all_pass_where.is_empty() {
        let equations = character.all_pass_where.iter();
        let equations: Vec<Value> = equations
            .map(|(left, right)| json!([spelled(left), spelled(right)]))
            .collect();
        object.insert("all_pass_where_equal".into(), json!(equations));
    }
    if let Some(conjugate) = &character.conjugate {
        object.insert("conjugate_poles_where".into(), inequality(conjugate, names));
    }
    if let Some(step) = &character.step {
        let value = json!({ "initial": spelled(&step.first), "final": spelled(&step.last) });
        object.insert("step".into(), value);
    }
}

/// What each part sees with all others at zero value, and with one other at infinite value.
fn time_constants(found: &TimeConstants, names: &Names<'_>) -> Value {
    let sums = match found {
        TimeConstants::Sums(sums) => sums,
        TimeConstants::None(why) => return json!({ "none": why }),
    };
    let spelled = |it: &Form| MACHINE.spell(&form::math(it, names));
    let first = sums.first.iter().map(|it| {
        json!({ "part": names.name(it.part), "sees": spelled(&it.sees), "tau": spelled(&it.tau) })
    });
    let second = sums.second.iter().map(|it| {
        let mut value = json!({
            "at_infinite_value": names.name(it.at_infinity), "product": spelled(&it.product),
        });
        match &it.other {
            Ok(other) => {
                value["part"] = json!(names.name(other.part));
                value["sees"] = json!(spelled(&other.sees));
            }
            Err(other) => value["part"] = json!(names.name(*other)),
        }
        value
    });
    let mut value = json!({
        "first": first.collect::<Value>(),
        "second": second.collect::<Value>(),
    });
    if let Some(delay) = &sums.elmore {
        value["elmore_delay"] = json!(spelled(delay));
    }
    value
}

fn inequality(it: &Inequality, names: &Names<'_>) -> Value {
    let spelled = |it: &Form| MACHINE.spell(&form::math(it, names));
    json!({ "larger": spelled(&it.left), "smaller": spelled(&it.right), "always": it.always })
}

/// A section; roots are spelled `sqrt(…)`.
fn section(section: &Section, names: &Names<'_>) -> Value {
    let spelled = |it: &Form| MACHINE.spell(&form::math(it, names));
    let mut value = match &section.shape {
        Shape::First { tau } => json!({ "form": "1 + s*tau", "tau": spelled(tau) }),
        Shape::Second { omega, quality } => match quality {
            Some(quality) => json!({
                "form": "1 + s/(Q*w0) + s^2/w0^2", "w0": spelled(omega), "Q": spelled(quality),
            }),
            None => json!({ "form": "1 + s^2/w0^2", "w0": spelled(omega) }),
        },
        Shape::Series(list) => {
            let list: Vec<String> = list.iter().map(spelled).collect();
            json!({ "form": "1 + c1*s + c2*s^2 + …", "c": list })
        }
        Shape::Rise => json!({ "form": "s*tau" }),
        Shape::Damping => json!({ "form": "s/(Q*w0)" }),
        Shape::Square => json!({ "form": "s^2/w0^2" }),
    };
    value["power"] = json!(section.power);
    value
}

fn nested(form: &Nested, names: &Names<'_>) -> Value {
    let shared = form.definitions.iter().map(|(symbol, _)| *symbol);
    let names = names
        .clone()
        .with_shared(shared.zip(form.names.iter().map(String::as_str)));
    let definitions = form.definitions.iter().zip(&form.names);
    let definitions: Vec<Value> = definitions
        .map(|((_, value), name)| json!({ "name": name, "value": expression(value, &names) }))
        .collect();
    json!({
        "definitions": definitions,
        "numerator": expression(&form.numerator, &names),
        "denominator": expression(&form.denominator, &names),
        "numerator_terms": form.terms.0.to_string(),
        "denominator_terms": form.terms.1.to_string(),
        "common_degree": form.common_degree,
    })
}

fn insert_degrees(
    object: &mut Object,
    answer: &Answer<'_>,
    result: &FunctionReport,
    names: &Names<'_>,
) {
    if !result.degrees_known() {
        object.insert("order".into(), Value::Null);
        object.insert("numerator_order".into(), Value::Null);
        return;
    }
    object.insert("order".into(), json!(result.order));
    object.insert("numerator_order".into(), json!(result.numerator_order));
    if let Some(network) = result.network {
        object.insert("network".into(), json!(network));
    }
    if let Some(hidden) = result.hidden {
        object.insert("hidden".into(), json!(hidden));
    }
    object.insert("zero".into(), json!(result.zero));
    let no_effect = result.no_effect.iter();
    object.insert(
        "no_effect".into(),
        no_effect.map(|it| answer.part(it.element)).collect(),
    );
    if matches!(result.formula, Formula::Expanded(_)) {
        let drops = result.drops_when.iter();
        object.insert(
            "drops_when".into(),
            drops.map(|it| drop(it, names)).collect(),
        );
        let origin = result.origin_when.iter();
        object.insert(
            "origin_when".into(),
            origin.map(|it| drop(it, names)).collect(),
        );
    }
}

fn drop(drop: &Drop, names: &Names<'_>) -> Value {
    let mut object = Object::new();
    let condition = expression(&drop.condition, names);
    object.insert("condition".into(), json!(condition));
    let possible = sentence::verdict(drop.possible);
    object.insert("possible".into(), json!(possible));
    if !drop.example.is_empty() {
        let values = drop.example.iter();
        let values: Object = values
            .map(|(symbol, value)| (names.name(*symbol).to_owned(), json!(value.to_string())))
            .collect();
        object.insert("at".into(), Value::Object(values));
    }
    Value::Object(object)
}

/// What cancels. An empty list says that nothing does, so a search cut short shows none.
fn insert_cancellations(
    object: &mut Object,
    answer: &Answer<'_>,
    result: &FunctionReport,
    names: &Names<'_>,
) {
    if let Some(list) = &result.cancellations
        && (!list.is_empty() || result.unaudited.is_none())
    {
        let figures = answer.figures_of(result);
        let numbers = |index: usize| figures.and_then(|it| it.cancelled.get(index));
        let list = list.iter().enumerate();
        let list = list.map(|(index, it)| cancellation(answer, it, numbers(index), names));
        object.insert("cancellations".into(), list.collect());
    }
    if let Some(words) = sentence::cut_short(result) {
        object.entry("over_budget").or_insert_with(|| json!(words));
    }
}

fn cancellation(
    answer: &Answer<'_>,
    it: &Cancellation,
    figures: Option<&Cancelled>,
    names: &Names<'_>,
) -> Value {
    let mut object = Object::new();
    object.insert("class".into(), json!(sentence::class(it.class)));
    object.insert("factor".into(), json!(expression(&it.factor, names)));
    object.insert("degree".into(), json!(it.degree));
    object.insert("multiplicity".into(), json!(it.multiplicity));
    if let Some(hides) = it.hides {
        object.insert("hides".into(), json!(sentence::hides(hides)));
    }
    match it.class {
        CancellationClass::Structural => {
            object.insert("parts".into(), json!(it.parts));
            if !it.static_set.is_empty() {
                object.insert("static_set".into(), json!(it.static_set));
            }
        }
        CancellationClass::Matched => insert_causes(&mut object, answer, it),
        CancellationClass::Coincidental => {
            object.insert("condition".into(), conditions(&it.conditions, names));
        }
    }
    if !it.factored {
        object.insert("factored".into(), json!(false));
    }
    if let Some(figures) = figures {
        numbers::insert_cancelled(&mut object, figures);
    }
    Value::Object(object)
}

fn insert_causes(object: &mut Object, answer: &Answer<'_>, it: &Cancellation) {
    object.insert("because".into(), json!(answer.relations(&it.because)));
    if !it.also_because.is_empty() {
        let sets = it.also_because.iter();
        let sets: Vec<_> = sets.map(|set| answer.relations(set)).collect();
        object.insert("also_because".into(), json!(sets));
    }
}

/// One condition is a string, several are a list.
fn conditions(list: &[Polynomial], names: &Names<'_>) -> Value {
    match list {
        [condition] => json!(expression(condition, names)),
        several => several.iter().map(|it| expression(it, names)).collect(),
    }
}

fn claim(answer: &Answer<'_>, report: &ClaimReport) -> Value {
    let claim = &answer.network.claims()[report.claim];
    let (line, column) = answer.sources.position(claim.place);
    let holds = match report.holds {
        Verdict::Yes => json!(true),
        Verdict::No => json!(false),
        Verdict::Undecided => Value::Null,
    };
    let mut object = Object::new();
    object.insert("text".into(), json!(claim.text));
    object.insert("holds".into(), holds);
    object.insert("line".into(), json!(line));
    object.insert("column".into(), json!(column));
    if !report.findings.is_empty() {
        let names = answer.names(FrequencyPlace::Last);
        let findings = report.findings.iter().map(|it| finding(it, &names));
        object.insert("findings".into(), findings.collect());
    }
    if !report.relied_on.is_empty() {
        object.insert("relied_on".into(), json!(report.relied_on));
    }
    Value::Object(object)
}

fn finding(finding: &Finding, names: &Names<'_>) -> Value {
    let mut object = Object::new();
    object.insert("label".into(), json!(finding.label));
    if let Some(text) = &finding.text {
        object.insert("text".into(), json!(text));
    }
    let quotient = match &finding.formula {
        Some((above, below)) if !finding.as_product => {
            let above = math::polynomial(above, names);
            Some(Math::quotient(above, math::polynomial(below, names)))
        }
        _ => product::finding(finding, names),
    };
    if let Some(quotient) = quotient {
        object.insert("formula".into(), json!(MACHINE.spell(&quotient)));
    }
    Value::Object(object)
}

/// A polynomial in the syntax of the language.
#[must_use]
pub fn expression(polynomial: &Polynomial, names: &Names<'_>) -> String {
    MACHINE.spell(&math::polynomial(polynomial, names))
}
