//! Figures at the nominals as JSON numbers, in rad/s and seconds.

use nalgebra::Complex;
use serde_json::{Map, Value, json};

use crate::numeric::drift::{Cancelled, Drift};
use crate::numeric::near::Near;

pub(super) fn complex(value: Complex<f64>) -> Value {
    // A negative zero is no answer.
    json!({ "re": value.re + 0.0, "im": value.im + 0.0 })
}

/// A pair that almost cancels. Fractions are of the pole's size (`apart`, `over_tolerance`) and of the
/// final value (`tail.of_final`).
pub(super) fn near(it: &Near) -> Value {
    let mut object = Map::new();
    object.insert("pole".into(), complex(it.pole));
    object.insert("zero".into(), complex(it.zero));
    object.insert("distance".into(), json!(it.distance));
    object.insert("apart".into(), json!(it.apart));
    if let Some((from, to)) = it.over_tolerance {
        let range = json!({ "from": from, "to": to, "can_meet": it.can_meet() });
        object.insert("over_tolerance".into(), range);
    }
    if let Some(residue) = it.residue {
        object.insert("residue".into(), complex(residue));
    }
    if let Some(tail) = &it.tail {
        let mut of_tail = Map::new();
        of_tail.insert("size".into(), json!(tail.size));
        if let Some(fraction) = tail.of_final {
            of_tail.insert("of_final".into(), json!(fraction));
        }
        of_tail.insert("time_constant".into(), json!(tail.time_constant));
        object.insert("tail".into(), Value::Object(of_tail));
    }
    if !it.assumed.is_empty() {
        object.insert("assumed_tolerance".into(), json!(it.assumed));
    }
    Value::Object(object)
}

/// The modes of a cancelled factor and, for each with an imaginary part of at least 0, what 1 % of a
/// part does.
pub(super) fn insert_cancelled(object: &mut Map<String, Value>, it: &Cancelled) {
    if it.modes.is_empty() {
        return;
    }
    let modes = it.modes.iter().map(|mode| complex(mode.centre.to_f64()));
    object.insert("modes".into(), modes.collect());
    if it.drifts.iter().any(|list| !list.is_empty()) {
        let lists = it.drifts.iter();
        let lists = lists.map(|list| list.iter().map(drift).collect::<Value>());
        object.insert("per_percent".into(), lists.collect());
    }
}

fn drift(it: &Drift) -> Value {
    let mut object = Map::new();
    object.insert("part".into(), json!(it.part));
    object.insert("pole".into(), complex(it.pole));
    object.insert("zero".into(), complex(it.zero));
    if it.splits {
        object.insert("splits".into(), json!(true));
    }
    if let Some(tail) = it.tail {
        object.insert("tail_of_final".into(), json!(tail));
    }
    Value::Object(object)
}
