//! The program against a general algebra system: numerators, denominators, degrees and the order of
//! the network, exactly. The expected results in `tests/reference/` come from `make.py` there.

use std::collections::BTreeMap;
use std::fs;
use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};
use std::str::FromStr;

use num_bigint::BigInt;
use num_traits::Zero;
use serde_json::Value;

/// A polynomial as it is spelled: the powers of each term, and its coefficient.
type Terms = BTreeMap<BTreeMap<String, u32>, BigInt>;

/// Reads `3*R1*C1^2 - R2 + 1`: sums of products of numbers and powers of names.
fn terms(text: &str) -> Terms {
    let compact: String = text.chars().filter(|c| !c.is_whitespace()).collect();
    let mut result = Terms::new();
    let mut start = 0;
    let bytes = compact.as_bytes();
    for end in 1..=bytes.len() {
        let ends = end == bytes.len() || matches!(bytes[end], b'+' | b'-');
        if ends {
            let (powers, coefficient) = term(&compact[start..end]);
            *result.entry(powers).or_default() += coefficient;
            start = end;
        }
    }
    result.retain(|_, coefficient| !coefficient.is_zero());
    result
}

fn term(text: &str) -> (BTreeMap<String, u32>, BigInt) {
    let (negative, product) = match text.as_bytes()[0] {
        b'-' => (true, &text[1..]),
        b'+' => (false, &text[1..]),
        _ => (false, text),
    };
    let mut coefficient = BigInt::from(if negative { -1 } else { 1 });
    let mut powers = BTreeMap::new();
    for factor in product.split('*') {
        let (base, exponent) = match factor.split_once('^') {
            Some((base, exponent)) => (base, exponent.parse().expect("a whole exponent")),
            None => (factor, 1),
        };
        if base.starts_with(|c: char| c.is_ascii_digit()) {
            coefficient *= BigInt::from_str(base)
                .expect("a whole number")
                .pow(exponent);
        } else {
            *powers.entry(base.to_owned()).or_default() += exponent;
        }
    }
    (powers, coefficient)
}

fn references() -> Vec<PathBuf> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("tests/reference");
    let mut files: Vec<PathBuf> = fs::read_dir(folder)
        .expect("the folder of the references")
        .map(|entry| entry.expect("a readable folder").path())
        .filter(|path| path.extension().is_some_and(|ending| ending == "json"))
        .collect();
    files.sort();
    files
}

fn formula(netlist: &str) -> Result<Value, String> {
    let mut child = Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .args(["formula", "--format", "json", "-"])
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .map_err(|error| error.to_string())?;
    child
        .stdin
        .take()
        .expect("a piped input")
        .write_all(netlist.as_bytes())
        .map_err(|error| error.to_string())?;
    let output = child
        .wait_with_output()
        .map_err(|error| error.to_string())?;
    let answer: Value = serde_json::from_slice(&output.stdout)
        .map_err(|error| format!("{error}: {}", String::from_utf8_lossy(&output.stderr)))?;
    match answer.get("errors") {
        Some(errors) => Err(errors.to_string()),
        None => Ok(answer),
    }
}

fn polynomials(list: &Value) -> Vec<Terms> {
    let items = list.as_array().map_or(&[][..], Vec::as_slice);
    items
        .iter()
        .map(|item| terms(item.as_str().expect("a string")))
        .collect()
}

/// What differs between an answer and its reference.
fn differences(name: &str, reference: &Value, answer: &Value) -> Vec<String> {
    let mut found = Vec::new();
    for (key, inside) in [("order", "network"), ("static", "static")] {
        let (expected, got) = (&reference[key], &answer["order"][inside]);
        if expected != got {
            found.push(format!(
                "{name}: {inside}: expected {expected}, found {got}"
            ));
        }
    }
    let functions = reference["functions"].as_object().expect("the functions");
    for (function, expected) in functions {
        let results = answer["results"].as_array().map_or(&[][..], Vec::as_slice);
        let Some(got) = results.iter().find(|result| result["name"] == **function) else {
            found.push(format!("{name}: {function}: not answered"));
            continue;
        };
        for side in ["numerator", "denominator"] {
            if polynomials(&expected[side]) != polynomials(&got[side]) {
                let (expected, got) = (&expected[side], &got[side]);
                found.push(format!(
                    "{name}: {function}: {side}: expected {expected}, found {got}"
                ));
            }
        }
        for (side, degree) in [("denominator", "order"), ("numerator", "numerator_order")] {
            let many = expected[side].as_array().map_or(0, Vec::len);
            if got[degree].as_u64() != Some(many as u64 - 1) {
                let got = &got[degree];
                found.push(format!(
                    "{name}: {function}: {degree}: expected {}, found {got}",
                    many - 1
                ));
            }
        }
        if got["checked"]["agree"] == Value::Bool(false) {
            found.push(format!(
                "{name}: {function}: the program's own check disagrees"
            ));
        }
    }
    found
}

#[test]
fn every_function_is_the_one_of_the_algebra_system() {
    let files = references();
    assert!(files.len() >= 60, "only {} references", files.len());
    let mut failures = Vec::new();
    for path in files {
        let text = fs::read_to_string(&path).expect("a readable reference");
        let reference: Value = serde_json::from_str(&text).expect("JSON");
        let name = reference["name"].as_str().expect("a name");
        let netlist = reference["netlist"].as_str().expect("a network");
        match formula(netlist) {
            Ok(answer) => failures.extend(differences(name, &reference, &answer)),
            Err(message) => failures.push(format!("{name}: {message}")),
        }
    }
    let many = failures.len();
    assert!(
        failures.is_empty(),
        "{many} differences:\n{}",
        failures.join("\n")
    );
}

#[test]
fn spelled_polynomials_are_read_as_they_are_meant() {
    assert_eq!(terms("2*R1*C1^2 - R1"), terms("-R1+R1*C1*2*C1"));
    assert_ne!(terms("2*R1"), terms("3*R1"));
    assert_ne!(terms("R1^2"), terms("R1"));
    assert!(terms("R1 - R1").is_empty());
    assert_eq!(terms("0"), Terms::new());
}
