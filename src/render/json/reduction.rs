//! A reduction as JSON.

use serde_json::{Map, Value, json};

use crate::analysis::report::Verdict;
use crate::render::linear::MACHINE;
use crate::render::reduction::{Reduced, StepLine};

/// `steps` with `rule`, `parts`, `makes`, `value` and the value in `original` names; `network`;
/// `proven`.
#[must_use]
pub fn reduction(reduced: &Reduced<'_>, file: &str) -> Value {
    let mut object = Map::new();
    object.insert("cutloop".into(), json!(1));
    object.insert("file".into(), json!(file));
    if let Some(title) = reduced.network.title() {
        object.insert("title".into(), json!(title));
    }
    let steps: Vec<Value> = reduced.steps().iter().map(step).collect();
    object.insert("steps".into(), json!(steps));
    object.insert("remarks".into(), json!(reduced.remarks));
    object.insert("network".into(), json!(reduced.text));
    object.insert("proven".into(), json!(reduced.proven == Verdict::Yes));
    if !reduced.doubts.is_empty() {
        object.insert("doubts".into(), json!(reduced.doubts));
    }
    Value::Object(object)
}

fn step(step: &StepLine) -> Value {
    let mut object = Map::new();
    object.insert("rule".into(), json!(step.key));
    object.insert("parts".into(), json!(step.parts));
    if let Some((name, short, long)) = &step.makes {
        object.insert("makes".into(), json!(name));
        object.insert("value".into(), json!(MACHINE.spell(short)));
        if let Some(long) = long {
            object.insert("original".into(), json!(MACHINE.spell(long)));
        }
    } else {
        object.insert("makes".into(), Value::Null);
    }
    Value::Object(object)
}
