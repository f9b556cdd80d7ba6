//! State equations as JSON.

use serde_json::{Value, json};

use crate::algebra::{Fraction, Symbol};
use crate::analysis::report::states::{Affine, Start, StateMethod, StateSystem, StatesReport};
use crate::render::answer::Answer;
use crate::render::json::{Object, expression};
use crate::render::linear::MACHINE;
use crate::render::names::{FrequencyPlace, Names};
use crate::render::states::{self, Manner};

/// Inserts `states`: the network itself, with other frames of questions as a list of their own.
pub(super) fn insert(object: &mut Object, answer: &Answer<'_>, found: &StatesReport) {
    let mut systems = found.systems.iter().map(|it| system(answer, it));
    let mut main = systems.next().unwrap_or_default();
    let others: Vec<Value> = systems.map(Value::Object).collect();
    if !others.is_empty() {
        main.insert("other_networks".into(), json!(others));
    }
    let no_output = found.no_output.iter();
    let no_output: Vec<&str> = no_output
        .map(|it| answer.network.questions()[*it].name.as_str())
        .collect();
    if !no_output.is_empty() {
        main.insert("no_output".into(), json!(no_output));
    }
    object.insert("states".into(), Value::Object(main));
}

fn spelled(value: &Fraction, names: &Names<'_>) -> String {
    MACHINE.spell(&states::entry(value, names, Manner::Machine))
}

fn matrix(rows: &[Vec<Fraction>], names: &Names<'_>) -> Value {
    rows.iter()
        .map(|row| row.iter().map(|it| spelled(it, names)).collect::<Vec<_>>())
        .map(|row| json!(row))
        .collect()
}

fn system(answer: &Answer<'_>, system: &StateSystem) -> Object {
    let names = answer.names(FrequencyPlace::Last);
    let sum =
        |it: &Affine| MACHINE.spell(&states::affine(answer, system, it, &names, Manner::Machine));
    let mut object = Object::new();
    if !system.without.is_empty() {
        object.insert("without".into(), json!(answer.parts(&system.without)));
    }
    let vector = system.vector.iter().map(|it| {
        json!({ "name": states::state_name(answer, it), "means": states::state_means(answer, it) })
    });
    object.insert("vector".into(), vector.collect());
    let inputs = system.inputs.iter().map(|it| {
        json!({ "name": states::input_name(answer, it), "means": states::input_means(answer, it) })
    });
    object.insert("inputs".into(), inputs.collect());
    let outputs = system.outputs.iter().map(|it| {
        let question = &answer.network.questions()[*it];
        json!({ "function": question.name, "means": states::output_name(answer, *it) })
    });
    object.insert("outputs".into(), outputs.collect());
    let dependent = system.dependent.iter().map(|it| {
        json!({
            "name": states::state_name(answer, &it.quantity),
            "means": states::state_means(answer, &it.quantity),
            "equals": sum(&it.equals),
        })
    });
    object.insert("dependent".into(), dependent.collect());
    object.insert("A".into(), matrix(&system.a, &names));
    let several = |list: &[Vec<Vec<Fraction>>]| -> Value {
        list.iter().map(|it| matrix(it, &names)).collect()
    };
    object.insert("B".into(), several(&system.b));
    object.insert("C".into(), matrix(&system.c, &names));
    object.insert("D".into(), several(&system.d));
    if let Some(start) = &system.start {
        object.insert(
            "starts".into(),
            started(answer, system, start, &sum, &names),
        );
    }
    let method = match &system.method {
        StateMethod::NormalTree(tree) => {
            object.insert("tree".into(), json!(answer.parts(tree)));
            "normal tree"
        }
        StateMethod::Pencil => "pencil",
    };
    object.insert("method".into(), json!(method));
    object.insert("proven".into(), json!(true));
    if system.checked_points > 0 {
        let checked = json!({
            "method": "exact substitution", "points": system.checked_points, "agree": true,
        });
        object.insert("checked".into(), checked);
    }
    object
}

fn started(
    answer: &Answer<'_>,
    system: &StateSystem,
    start: &Start,
    sum: &dyn Fn(&Affine) -> String,
    names: &Names<'_>,
) -> Value {
    let after = start.after.iter().map(
        |(state, value)| json!({ "name": states::state_name(answer, state), "equals": sum(value) }),
    );
    let after: Vec<Value> = after.collect();
    let responses = system
        .outputs
        .iter()
        .zip(&start.responses)
        .map(|(question, value)| {
            let side = |polynomial: &crate::algebra::Polynomial| -> Vec<String> {
                let coefficients = polynomial.coefficients(Symbol::S);
                coefficients
                    .iter()
                    .map(|it| expression(it, names))
                    .collect()
            };
            json!({
                "function": answer.network.questions()[*question].name,
                "numerator": side(value.numerator()),
                "denominator": side(value.denominator()),
            })
        });
    let responses: Vec<Value> = responses.collect();
    json!({ "after": after, "responses": responses })
}
