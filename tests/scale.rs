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

/// What is said of order and degrees.
fn degrees(answer: &Value) -> Vec<Value> {
    let fields = [
        "name",
        "order",
        "numerator_order",
        "network",
        "hidden",
        "zero",
    ];
    let results = answer["results"].as_array().into_iter().flatten();
    let of_network = results.filter(|result| result.get("network").is_some());
    of_network
        .flat_map(|result| fields.map(|field| result[field].clone()))
        .chain([answer["order"].clone()])
        .collect()
}

#[test]
fn orders_by_elimination_are_those_of_the_diagram() {
    let mut compared = 0;
    for path in networks() {
        let text = fs::read_to_string(&path).expect("a text");
        if text.contains("use \"") || path.ends_with("field_effect_opamp.cutloop") {
            continue;
        }
        // One state is enough for no diagram at all.
        let expected = degrees(&json(&["order"], &text));
        let found = degrees(&json(&["order", "--budget", "states=1"], &text));
        assert_eq!(found, expected, "{}", path.display());
        compared += expected.len();
    }
    assert!(compared > 600, "{compared}");
}

/// Every pair of nodes joined, by R and C in turn.
fn complete_graph(nodes: usize) -> String {
    let name = |node: usize| match node {
        0 => "ground".to_owned(),
        node => format!("v{node}"),
    };
    let mut text = String::from("v1 -Vs- ground\n");
    let mut parts = 0;
    for a in 0..nodes {
        for b in a + 1..nodes {
            if (a, b) != (0, 1) {
                parts += 1;
                let letter = if parts % 2 == 0 { 'R' } else { 'C' };
                text += &format!("{} -{letter}{parts}- {}\n", name(a), name(b));
            }
        }
    }
    text + &format!("derive H = voltage(v{}) / Vs\n", nodes - 1)
}

/// Nodes in a square, neighbours joined by R, a C at each.
fn grid(side: usize) -> String {
    let mut text = String::from("n1x1 -Vs- ground\n");
    for row in 1..=side {
        for column in 1..=side {
            if column < side {
                let next = column + 1;
                text += &format!("n{row}x{column} -Rh{row}x{column}- n{row}x{next}\n");
            }
            if row < side {
                let next = row + 1;
                text += &format!("n{row}x{column} -Rv{row}x{column}- n{next}x{column}\n");
            }
            if (row, column) != (1, 1) {
                text += &format!("n{row}x{column} -C{row}x{column}- ground\n");
            }
        }
    }
    text + &format!("derive H = voltage(n{side}x{side}) / Vs\n")
}

fn ladder(sections: usize) -> String {
    let mut text = String::from("n0 -Vs- ground\n");
    for k in 1..=sections {
        text += &format!("n{} -R{k}- n{k} -C{k}- ground\n", k - 1);
    }
    text + &format!("derive H = voltage(n{sections}) / Vs\n")
}

#[test]
fn a_complete_graph_of_twenty_nodes_has_its_order() {
    let text = complete_graph(20);
    let answer = json(&["order"], &text);
    // Bryant 1959 for C alone and R: capacitors less the loops they close with the source.
    assert_eq!(answer["results"][0]["order"], answer["order"]["network"]);
    assert_eq!(answer["results"][0]["hidden"], 0);
    let formula = run(&["formula"], &text);
    assert_eq!(formula.status.code(), Some(3));
    let said = String::from_utf8_lossy(&formula.stdout);
    assert!(
        said.contains("its degrees are exact all the same"),
        "{said}"
    );
}

#[test]
fn a_grid_of_ten_by_ten_has_its_order() {
    let answer = json(&["order"], &grid(10));
    assert_eq!(answer["order"]["network"], 99);
    assert_eq!(answer["results"][0]["order"], 99);
}

#[test]
#[ignore = "takes seconds"]
fn a_grid_of_thirty_by_thirty_has_its_order() {
    let answer = json(&["order"], &grid(30));
    assert_eq!(answer["results"][0]["order"], 899);
}

#[test]
fn a_ladder_of_ten_thousand_sections_has_its_order() {
    let answer = json(&["order"], &ladder(10_000));
    assert_eq!(answer["order"]["network"], 10_000);
    assert_eq!(answer["results"][0]["order"], 10_000);
    assert_eq!(answer["results"][0]["numerator_order"], 0);
}

#[test]
#[ignore = "takes a minute and gigabytes"]
fn a_ladder_of_a_million_sections_has_its_order() {
    let answer = json(
        &["order", "--budget", "states=1e7,seconds=120"],
        &ladder(1_000_000),
    );
    assert_eq!(answer["order"]["network"], 1_000_000);
}
