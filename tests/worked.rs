//! The worked cases and the examples, through the compiled program: every claim must hold, and every
//! claim made wrong on purpose must be refuted.

use std::fs;
use std::io::Write;
use std::path::{Path, PathBuf};
use std::process::{Command, Stdio};

use serde_json::Value;

/// All networks of a folder, in name order.
fn networks(folder: &str) -> Vec<PathBuf> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join(folder);
    let mut files: Vec<PathBuf> = fs::read_dir(&folder)
        .unwrap_or_else(|error| panic!("{}: {error}", folder.display()))
        .map(|entry| entry.expect("a readable folder").path())
        .filter(|path| path.extension().is_some_and(|ending| ending == "cutloop"))
        .collect();
    files.sort();
    files
}

fn both_folders() -> Vec<PathBuf> {
    let mut files = networks("tests/worked");
    files.extend(networks("examples"));
    files
}

fn read(path: &Path) -> String {
    fs::read_to_string(path).unwrap_or_else(|error| panic!("{}: {error}", path.display()))
}

/// The answer of `check` on a file.
fn check(path: &Path) -> Result<Value, String> {
    let output = Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .args(["check", "--quiet", "--format", "json"])
        .arg(path)
        .output()
        .map_err(|error| error.to_string())?;
    answer(&output.stdout, &output.stderr)
}

/// The answer of `check` on a text, read beside the file it comes from.
fn check_text(text: &str, path: &Path) -> Result<Value, String> {
    let mut child = Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .args(["check", "--quiet", "--format", "json", "-"])
        .current_dir(path.parent().expect("a folder"))
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .map_err(|error| error.to_string())?;
    child
        .stdin
        .take()
        .expect("a piped input")
        .write_all(text.as_bytes())
        .map_err(|error| error.to_string())?;
    let output = child
        .wait_with_output()
        .map_err(|error| error.to_string())?;
    answer(&output.stdout, &output.stderr)
}

fn answer(stdout: &[u8], stderr: &[u8]) -> Result<Value, String> {
    let value: Value = serde_json::from_slice(stdout).map_err(|error| {
        format!(
            "no JSON ({error}): {}",
            String::from_utf8_lossy(stderr).trim()
        )
    })?;
    match value.get("errors") {
        Some(errors) => Err(errors.to_string()),
        None => Ok(value),
    }
}

fn claims(answer: &Value) -> &[Value] {
    answer["claims"].as_array().map_or(&[], Vec::as_slice)
}

fn is_claim(line: &str) -> bool {
    line.starts_with("claim ")
}

fn report(failures: &[String]) {
    assert!(
        failures.is_empty(),
        "{} failures:\n{}",
        failures.len(),
        failures.join("\n")
    );
}

fn name(path: &Path) -> String {
    path.file_name()
        .expect("a file name")
        .to_string_lossy()
        .into_owned()
}

#[test]
fn every_claim_holds() {
    let mut failures = Vec::new();
    let mut proven = 0;
    for path in both_folders() {
        let written = read(&path).lines().filter(|line| is_claim(line)).count();
        match check(&path) {
            Err(message) => failures.push(format!("{}: {message}", name(&path))),
            Ok(answer) => {
                let answered = claims(&answer);
                if answered.len() != written {
                    let many = answered.len();
                    failures.push(format!(
                        "{}: {written} claims written, {many} answered",
                        name(&path)
                    ));
                }
                for claim in answered {
                    if claim["holds"] == Value::Bool(true) {
                        proven += 1;
                    } else {
                        let (line, text) = (&claim["line"], &claim["text"]);
                        failures.push(format!(
                            "{}:{line}: {text}: {}",
                            name(&path),
                            claim["holds"]
                        ));
                    }
                }
            }
        }
    }
    report(&failures);
    assert!(proven > 380, "only {proven} claims");
}

#[test]
fn no_network_draws_a_warning() {
    let mut failures = Vec::new();
    for path in both_folders() {
        match check(&path) {
            Err(message) => failures.push(format!("{}: {message}", name(&path))),
            Ok(answer) => {
                for warning in answer["warnings"].as_array().into_iter().flatten() {
                    failures.push(format!(
                        "{}:{}: {}",
                        name(&path),
                        warning["line"],
                        warning["message"]
                    ));
                }
            }
        }
    }
    report(&failures);
}

/// The claim with another right-hand side, or nothing where twice the value is the value.
fn made_wrong(claim: &str) -> Option<String> {
    let claim = claim.split('#').next().unwrap_or_default().trim_end();
    let (left, right) = claim.split_once(" = ")?;
    if left.starts_with("claim cancels") {
        let wrong = if right == "none" { "matched" } else { "none" };
        return Some(format!("{left} = {wrong}"));
    }
    if right == "0" || right == "infinite" {
        return Some(format!("{left} = 7"));
    }
    Some(format!("{left} = 2*({right})"))
}

#[test]
fn every_claim_made_wrong_is_refuted() {
    let mut failures = Vec::new();
    let mut refuted = 0;
    for path in both_folders() {
        let mut wrong_lines = Vec::new();
        let mut text = String::new();
        for (index, line) in read(&path).lines().enumerate() {
            match made_wrong(line).filter(|_| is_claim(line)) {
                Some(wrong) => {
                    wrong_lines.push(index as u64 + 1);
                    text.push_str(&wrong);
                }
                None => text.push_str(line),
            }
            text.push('\n');
        }
        let answer = match check_text(&text, &path) {
            Ok(answer) => answer,
            Err(message) => {
                failures.push(format!("{}: {message}", name(&path)));
                continue;
            }
        };
        for claim in claims(&answer) {
            let line = claim["line"].as_u64().unwrap_or_default();
            if wrong_lines.contains(&line) {
                if claim["holds"] == Value::Bool(false) {
                    refuted += 1;
                } else {
                    failures.push(format!(
                        "{}:{line}: {}: {}",
                        name(&path),
                        claim["text"],
                        claim["holds"]
                    ));
                }
            }
        }
    }
    report(&failures);
    assert!(refuted > 350, "only {refuted} claims");
}

#[test]
fn stability_is_refuted_where_its_assumption_is_missing() {
    let mut failures = Vec::new();
    let mut refuted = 0;
    for path in networks("tests/worked") {
        let text = read(&path);
        if !name(&path).starts_with("stability") || !text.contains("\nassume ") {
            continue;
        }
        let lines = text.lines().map(|line| {
            let assumed = line.starts_with("assume ");
            if assumed { "" } else { line }
        });
        let text = lines.collect::<Vec<_>>().join("\n");
        let answer = check_text(&text, &path).unwrap_or_else(|error| panic!("{error}"));
        for claim in claims(&answer) {
            let stability = claim["text"]
                .as_str()
                .is_some_and(|text| text.starts_with("stable"));
            match (stability, &claim["holds"]) {
                (true, Value::Bool(false)) => refuted += 1,
                (true, other) => {
                    failures.push(format!("{}: {}: {other}", name(&path), claim["text"]))
                }
                (false, _) => {}
            }
        }
    }
    report(&failures);
    assert!(refuted >= 6, "only {refuted} claims");
}

#[test]
fn every_worked_claim_names_its_source() {
    let mut failures = Vec::new();
    for path in networks("tests/worked") {
        let text = read(&path);
        let mut sourced = false;
        let mut count = 0;
        for (index, line) in text.lines().enumerate() {
            if line.starts_with("# source: ") {
                sourced = true;
            } else if is_claim(line) {
                count += 1;
                if !sourced && !line.contains("# source: ") {
                    failures.push(format!("{}:{}: no source", name(&path), index + 1));
                }
            } else if line.trim().is_empty() {
                sourced = false;
            }
        }
        if count == 0 {
            failures.push(format!("{}: no claim", name(&path)));
        }
    }
    report(&failures);
}

#[test]
fn every_example_says_what_it_shows_and_claims_something() {
    let mut failures = Vec::new();
    for path in networks("examples") {
        let text = read(&path);
        let head: Vec<&str> = text
            .lines()
            .take_while(|line| line.starts_with('#'))
            .collect();
        for word in ["Shows:", "Invented demo data"] {
            if !head.iter().any(|line| line.contains(word)) {
                failures.push(format!(
                    "{}: the opening comment lacks `{word}`",
                    name(&path)
                ));
            }
        }
        if !text.lines().any(is_claim) {
            failures.push(format!("{}: no claim", name(&path)));
        }
    }
    report(&failures);
}
