//! Networks that are too large for a formula: what is still decided, and that it is the same as with
//! the formula at hand.

use std::fs;
use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::{Command, Output, Stdio};

use serde_json::Value;

/// Runs a command on a text.
fn run(arguments: &[&str], text: &str) -> Output {
    let mut child = Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .args(arguments)
        .arg("-")
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the command starts");
    let mut stdin = child.stdin.take().expect("a pipe");
    stdin.write_all(text.as_bytes()).expect("the input is read");
    drop(stdin);
    child.wait_with_output().expect("the command ends")
}

fn json(arguments: &[&str], text: &str) -> Value {
    let output = run(&[arguments, &["--format", "json"]].concat(), text);
    serde_json::from_slice(&output.stdout)
        .unwrap_or_else(|error| panic!("{error}: {}", String::from_utf8_lossy(&output.stderr)))
}

fn networks() -> Vec<PathBuf> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR"));
    let mut files: Vec<PathBuf> = ["tests/worked", "examples"]
        .iter()
        .flat_map(|folder| fs::read_dir(root.join(folder)).expect("a folder"))
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|ending| ending == "cutloop"))
        .collect();
    files.sort();
    files
}

/// Class, degree and multiplicity, with the factor where it does not depend on the nominals.
fn summary(cancellation: &Value) -> Vec<Value> {
    let mut fields = vec!["class", "degree", "multiplicity"];
    if cancellation["class"] != "coincidental" {
        fields.extend(["factor", "parts", "because", "hides"]);
    }
    fields
        .into_iter()
        .map(|field| cancellation[field].clone())
        .collect()
}

#[test]
fn what_cancels_is_the_same_with_and_without_the_formula() {
    let mut unwritten = 0;
    for path in networks() {
        let text = fs::read_to_string(&path).expect("a text");
        if text.contains("use \"") || path.ends_with("field_effect_opamp.cutloop") {
            continue;
        }
        let whole = json(&["audit"], &text);
        let short = json(&["audit", "--budget", "terms=30"], &text);
        let pairs = whole["results"].as_array().into_iter().flatten();
        for (with, without) in pairs.zip(short["results"].as_array().into_iter().flatten()) {
            let (Some(with), Some(found)) = (
                with["cancellations"].as_array(),
                without["cancellations"].as_array(),
            ) else {
                continue;
            };
            if without.get("numerator").is_none() {
                unwritten += 1;
            }
            let expected: Vec<_> = with.iter().map(summary).collect();
            let found: Vec<_> = found.iter().map(summary).collect();
            assert_eq!(found, expected, "{}", path.display());
        }
    }
    assert!(unwritten >= 5, "{unwritten}");
}

#[test]
fn an_amplifier_of_twenty_transistors_is_audited_without_its_formula() {
    let text = include_str!("../examples/field_effect_opamp.cutloop");
    let output = run(&["audit"], text);
    assert_eq!(output.status.code(), Some(3), "the formula is too long");
    let answer = json(&["audit"], text);
    let result = &answer["results"][0];
    assert_eq!(result["order"], 27);
    assert_eq!(result["cancellations"].as_array().map(Vec::len), Some(0));
    assert!(result.get("drops_when").is_none(), "not looked at");
    // The counts of terms decide, never the clock: two runs give the same bytes.
    assert_eq!(output.stdout, run(&["audit"], text).stdout);
    assert_eq!(run(&["order"], text).status.code(), Some(0));
}
