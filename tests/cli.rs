//! The command as a user meets it: arguments, streams, exit statuses.

use std::io::Write;
use std::path::PathBuf;
use std::process::{Command, Output, Stdio};

const LOW_PASS: &str = "in -Vs- ground; in -R1- out -C1- ground; derive H = voltage(out) / Vs";

fn cutloop(arguments: &[&str]) -> Output {
    Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .args(arguments)
        .stdin(Stdio::null())
        .output()
        .expect("the command starts")
}

fn with_input(arguments: &[&str], input: &[u8]) -> Output {
    let mut child = Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .args(arguments)
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the command starts");
    let mut stdin = child.stdin.take().expect("a pipe");
    stdin.write_all(input).expect("the input is read");
    drop(stdin);
    child.wait_with_output().expect("the command ends")
}

fn status(output: &Output) -> i32 {
    output.status.code().expect("no signal")
}

fn answers(output: &Output) -> String {
    String::from_utf8(output.stdout.clone()).expect("UTF-8")
}

fn errors(output: &Output) -> String {
    String::from_utf8(output.stderr.clone()).expect("UTF-8")
}

fn json(output: &Output) -> serde_json::Value {
    serde_json::from_slice(&output.stdout).expect("JSON")
}

/// A file of its own for one test.
fn file(name: &str, text: &[u8]) -> String {
    let path: PathBuf = [env!("CARGO_TARGET_TMPDIR"), name].iter().collect();
    std::fs::write(&path, text).expect("the file is written");
    path.to_str().expect("a plain path").to_owned()
}

#[test]
fn help_names_the_commands_and_the_statuses() {
    let help = cutloop(&["--help"]);
    assert_eq!(status(&help), 0);
    for word in [
        "check",
        "order",
        "formula",
        "audit",
        "Exit status",
        "refuted",
    ] {
        assert!(answers(&help).contains(word), "{word}");
    }
    for command in ["check", "order", "formula", "audit"] {
        let help = cutloop(&[command, "--help"]);
        assert_eq!(status(&help), 0);
        assert!(answers(&help).contains("Example:"), "{command}");
    }
}

#[test]
fn mistakes_in_the_arguments_end_with_2() {
    let cases: [&[&str]; 8] = [
        &[],
        &["solve", "x"],
        &["formula"],
        &["formula", "-e", LOW_PASS, "file"],
        &["formula", "-e", LOW_PASS, "--format", "paper"],
        &["formula", "-e", LOW_PASS, "--set", "R1"],
        &["formula", "-e", LOW_PASS, "--budget", "patience=3"],
        &["check", "--loud"],
    ];
    for arguments in cases {
        let output = cutloop(arguments);
        assert_eq!(status(&output), 2, "{arguments:?}");
        assert_eq!(answers(&output), "", "{arguments:?}");
        assert_ne!(errors(&output), "", "{arguments:?}");
    }
}

#[test]
fn files_that_cannot_be_read_end_with_2_and_a_plain_sentence() {
    let latin = file("latin.cutloop", b"in -R1- out\n# caf\xe9\n");
    let cases = [
        ("no-such-file.cutloop", "there is no file"),
        (env!("CARGO_TARGET_TMPDIR"), "is a directory"),
        (latin.as_str(), "is not UTF-8 text"),
    ];
    for (path, sentence) in cases {
        for command in ["check", "order", "formula", "audit"] {
            let output = cutloop(&[command, path]);
            assert_eq!(status(&output), 2, "{command} {path}");
            assert!(errors(&output).contains(sentence), "{}", errors(&output));
        }
        let output = cutloop(&["order", path, "--format", "json"]);
        assert_eq!(status(&output), 2);
        let message = json(&output)["errors"][0]["message"].clone();
        assert!(message.as_str().is_some_and(|it| it.contains(sentence)));
    }
}

#[test]
fn a_text_from_the_command_line_is_answered() {
    let output = cutloop(&["formula", "-e", LOW_PASS]);
    assert_eq!(status(&output), 0, "{}", errors(&output));
    assert!(
        answers(&output).contains("1 + s·R1·C1"),
        "{}",
        answers(&output)
    );
    assert!(!answers(&output).contains('\u{1b}'), "no colour in a pipe");

    let output = cutloop(&["formula", "-e", LOW_PASS, "--format", "json"]);
    let answer = json(&output);
    let result = &answer["results"][0];
    assert_eq!(answer["cutloop"], 1);
    assert_eq!(result["numerator"], serde_json::json!(["1"]));
    assert_eq!(result["denominator"], serde_json::json!(["1", "R1*C1"]));
    assert_eq!(result["order"], 1);
    assert_eq!(result["checked"]["agree"], true);

    let output = cutloop(&["formula", "-e", LOW_PASS, "--format", "latex"]);
    assert!(answers(&output).contains("\\frac{1}{1 + s R_{1} C_{1}}"));
}

#[test]
fn standard_input_and_files_give_the_same_answer() {
    let path = file("low-pass.cutloop", LOW_PASS.as_bytes());
    let from_file = cutloop(&["order", &path]);
    let from_input = with_input(&["order", "-"], LOW_PASS.as_bytes());
    assert_eq!(status(&from_input), 0, "{}", errors(&from_input));
    assert_eq!(answers(&from_file), answers(&from_input));
}

#[test]
fn claims_decide_the_status_of_check() {
    let claim = |claim: &str| format!("{LOW_PASS}; claim {claim}");
    let cases = [
        ("order(H) = 1", 0, "1 claim holds"),
        ("order(H) = 2", 1, "1 claim refuted"),
    ];
    for (text, expected, summary) in cases {
        let output = cutloop(&["check", "-e", &claim(text)]);
        assert_eq!(status(&output), expected, "{}", errors(&output));
        let last = errors(&output).lines().last().map(str::to_owned);
        assert!(
            last.is_some_and(|it| it.contains(summary)),
            "{}",
            errors(&output)
        );
        let output = cutloop(&["check", "--quiet", "-e", &claim(text)]);
        assert_eq!(errors(&output), "");
        let output = cutloop(&["check", "-e", &claim(text), "--format", "json"]);
        assert_eq!(json(&output)["claims"][0]["holds"], expected == 0);
        assert_eq!(json(&output)["claims"][0]["text"], text);
    }
}

#[test]
fn the_heaviest_of_several_files_decides() {
    let good = file(
        "good.cutloop",
        format!("{LOW_PASS}; claim order(H) = 1").as_bytes(),
    );
    let bad = file(
        "bad.cutloop",
        format!("{LOW_PASS}; claim order(H) = 2").as_bytes(),
    );
    let broken = file("broken.cutloop", b"in -R1");
    assert_eq!(status(&cutloop(&["check", &good, &good])), 0);
    assert_eq!(status(&cutloop(&["check", &good, &bad])), 1);
    let output = cutloop(&["check", &good, &bad, &broken, "--format", "json"]);
    assert_eq!(status(&output), 2);
    let answers = json(&output);
    assert_eq!(answers.as_array().map(Vec::len), Some(3));
    assert_eq!(answers[0]["claims"][0]["holds"], true);
    assert_eq!(answers[1]["claims"][0]["holds"], false);
    assert!(
        answers[2]["errors"][0]["line"].is_number(),
        "{}",
        answers[2]
    );
    let summary = errors(&output).lines().last().map(str::to_owned);
    assert_eq!(
        summary.as_deref(),
        Some("3 files, 2 claims: 1 holds, 1 refuted; 1 file cannot be used")
    );
}

#[test]
fn without_a_question_order_and_check_warn_and_the_others_refuse() {
    let silent = "in -Vs- ground; in -R1- out -C1- ground";
    for command in ["order", "check"] {
        let output = cutloop(&[command, "-e", silent]);
        assert_eq!(status(&output), 0, "{command}");
        assert!(
            errors(&output).contains("asks for no function"),
            "{}",
            errors(&output)
        );
    }
    for command in ["formula", "audit"] {
        let output = cutloop(&[command, "-e", silent]);
        assert_eq!(status(&output), 2, "{command}");
        assert!(
            errors(&output).contains("nothing asked"),
            "{}",
            errors(&output)
        );
    }
}

#[test]
fn only_the_functions_asked_for_are_answered() {
    let text = format!("{LOW_PASS}; derive Z = impedance(in) without Vs");
    let output = cutloop(&["formula", "-e", &text, "--of", "Z", "--format", "json"]);
    assert_eq!(json(&output)["results"].as_array().map(Vec::len), Some(1));
    assert_eq!(json(&output)["results"][0]["name"], "Z");
    let output = cutloop(&["formula", "-e", &text, "--of", "Y"]);
    assert_eq!(status(&output), 2);
    assert!(
        errors(&output).contains("derives H, Z"),
        "{}",
        errors(&output)
    );
}

#[test]
fn a_budget_that_is_reached_ends_with_3_and_shows_no_part() {
    let text = "let N = 8; in -Vs- ground; in -R0- n0\nfor k = 1 .. N\n\
                n{k-1} -R{k}- n{k} -C{k}- ground\nend\nderive H = voltage(n8) / Vs";
    let limited = |budget: &str| {
        let limits = ["--budget", budget, "--format", "json"];
        let output = cutloop(&[&["formula", "-e", text], limits.as_slice()].concat());
        assert_eq!(status(&output), 3, "{}", errors(&output));
        json(&output)
    };
    let nothing = limited("seconds=0");
    assert!(nothing["errors"][0]["message"].is_string());
    assert!(nothing.get("results").is_none());
    // Without a diagram the order is still decided, the formula is not begun.
    let degrees = limited("states=3");
    assert_eq!(degrees["results"][0]["order"], 8);
    assert!(degrees["results"][0].get("numerator").is_none());
}

/// Two sections that meet by their relations behind a buffer: a product of two factors cancels.
const TWO_CANCEL: &str = "in -Vs- ground; in -R1- a -C1- ground; in -R2- b -C2- ground; \
                          in -R3- c -C3- ground; U1 is buffer(in a, out d); \
                          d -R4- e -R5- ground; d -C4- e -C5- ground; \
                          R4 = R5; C4 = C5; derive H = voltage(e) / Vs; \
                          claim cancels(H) = structural, matched; claim cancels(H) = none";

#[test]
fn an_audit_that_is_cut_short_ends_with_3_and_says_so() {
    let mut cut = 0;
    for terms in [1, 2, 3, 4, 5, 6, 8, 10, 12, 16, 20, 30] {
        let budget = format!("terms={terms}");
        let run =
            |rest: &[&str]| cutloop(&[rest, &["--budget", &budget, "-e", TWO_CANCEL]].concat());
        let machine = run(&["audit", "--format", "json"]);
        let answer = json(&machine);
        let result = &answer["results"][0];
        let short = result["over_budget"]
            .as_str()
            .is_some_and(|words| words.starts_with("audit cut short"));
        if !short {
            continue;
        }
        cut += 1;
        assert_eq!(status(&machine), 3, "{terms}: {result}");
        for found in result["cancellations"].as_array().into_iter().flatten() {
            assert_eq!(found["factored"], false, "{result}");
        }
        // A list that could be read as "nothing cancels" is not there.
        assert_ne!(result["cancellations"], serde_json::json!([]));
        for format in ["text", "latex"] {
            let output = run(&["audit", "--format", format]);
            assert_eq!(status(&output), 3);
            let shown = String::from_utf8_lossy(&output.stdout).into_owned();
            assert!(shown.contains("audit cut short"), "{shown}");
            assert!(!shown.contains("Nothing cancels"), "{shown}");
        }
        // What was not found out is not claimed either.
        let claims = run(&["check", "--format", "json"]);
        if let Some(claims) = json(&claims)["claims"].as_array() {
            assert_eq!(claims[0]["holds"], serde_json::Value::Null);
            assert_ne!(claims[1]["holds"], true);
        }
    }
    assert!(cut > 0);
    let whole = cutloop(&["audit", "--format", "json", "-e", TWO_CANCEL]);
    assert_eq!(status(&whole), 0, "{}", errors(&whole));
    assert!(json(&whole)["results"][0].get("over_budget").is_none());
}

#[test]
fn a_result_that_is_long_when_expanded_is_nested_whole() {
    let text = "let N = 8; in -Vs- ground; in -R0- n0\nfor k = 1 .. N\n\
                n{k-1} -R{k}- n{k} -C{k}- ground\nend\nderive H = voltage(n8) / Vs";
    let limits = ["--budget", "terms=20", "--format", "json"];
    let output = cutloop(&[&["formula", "-e", text], limits.as_slice()].concat());
    assert_eq!(status(&output), 0, "{}", errors(&output));
    let result = &json(&output)["results"][0];
    assert!(result.get("numerator").is_none(), "{result}");
    assert!(result["nested"]["denominator"].is_string(), "{result}");
    assert_eq!(result["order"], 8);
}

#[test]
fn the_same_input_gives_the_same_bytes() {
    for format in ["text", "json", "latex"] {
        let run = || cutloop(&["audit", "-e", LOW_PASS, "--format", format]).stdout;
        assert_eq!(run(), run());
    }
}

#[test]
fn a_reader_that_goes_away_is_no_failure() {
    let mut child = Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .args(["formula", "-e", LOW_PASS])
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the command starts");
    drop(child.stdout.take());
    let output = child.wait_with_output().expect("the command ends");
    assert_eq!(status(&output), 0);
    assert_eq!(errors(&output), "");
}

#[cfg(target_os = "linux")]
#[test]
fn an_output_that_is_full_ends_with_4() {
    let full = std::fs::OpenOptions::new()
        .write(true)
        .open("/dev/full")
        .expect("the device");
    let output = Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .args(["formula", "-e", LOW_PASS])
        .stdout(full)
        .output()
        .expect("the command starts");
    assert_eq!(status(&output), 4);
}

/// A loop around two sections, closed on paper: a function of a function.
const CLOSED: &str = "in -Vs- ground; in -R1- a -C1- ground; a -R2- b -C2- ground; \
                      derive H = voltage(b) / Vs; derive X = H/(1 + H)^9";

#[test]
fn an_order_that_was_not_found_is_not_claimed() {
    let text = format!("{CLOSED}; claim order(H) = 2; claim order(X) = 0; claim order(X) = 18");
    let cut_short = cutloop(&[
        "check", "--format", "json", "--budget", "terms=50", "-e", &text,
    ]);
    assert_eq!(status(&cut_short), 3);
    let answer = json(&cut_short);
    let claims = answer["claims"].as_array().expect("claims");
    let holds: Vec<_> = claims.iter().map(|claim| claim["holds"].clone()).collect();
    assert_eq!(
        holds[1..],
        [serde_json::Value::Null, serde_json::Value::Null]
    );

    let ledger = cutloop(&[
        "order", "--format", "json", "--budget", "terms=50", "-e", CLOSED,
    ]);
    assert_eq!(status(&ledger), 3);
    assert!(json(&ledger)["results"][1]["order"].is_null());

    let whole = cutloop(&["order", "--format", "json", "-e", CLOSED]);
    assert_eq!(status(&whole), 0);
    assert_eq!(json(&whole)["results"][1]["order"], 18);
}

#[test]
fn the_form_of_a_formula_can_be_chosen() {
    let network = "in -Vs- ground; in -R1- out -(R2 || C1)- ground; derive H = voltage(out)/Vs";
    let shown = |form: &str| answers(&cutloop(&["formula", "-e", network, "--form", form]));
    assert!(!shown("coefficients").contains('τ'));
    assert!(shown("designer").contains("τ = (R1 ∥ R2)·C1"));
    assert!(shown("normalised").contains("b1 = (R1 ∥ R2)·C1"));
    assert!(shown("normalised").contains("a0 = R2/(R1 + R2)"));
    assert!(shown("nested").contains("b1 = R1·R2·C1"));
}

#[test]
fn a_drawing_goes_to_the_output_or_to_a_file() {
    let text = "in -Vs- ground; in -R1- out -C1- ground; derive H = voltage(out)/Vs";
    let run = |more: &[&str]| {
        std::process::Command::new(env!("CARGO_BIN_EXE_cutloop"))
            .args(["plot", "-e", text])
            .args(more)
            .output()
            .expect("the command starts")
    };
    let shown = run(&["--drawing"]);
    assert_eq!(shown.status.code(), Some(0));
    assert!(shown.stdout.starts_with(b"<svg") && shown.stdout.ends_with(b"</svg>\n"));
    let folder = std::env::temp_dir().join(format!("cutloop-drawing-{}", std::process::id()));
    std::fs::create_dir_all(&folder).unwrap();
    let file = folder.join("out.svg");
    assert_eq!(
        run(&["--drawing", "-o", file.to_str().unwrap()])
            .status
            .code(),
        Some(0)
    );
    assert_eq!(std::fs::read(&file).unwrap(), shown.stdout);
    assert_eq!(std::fs::read_dir(&folder).unwrap().count(), 1);
    std::fs::remove_dir_all(&folder).unwrap();
    assert_eq!(
        run(&["--drawing", "-o", file.to_str().unwrap()])
            .status
            .code(),
        Some(4)
    );
    assert_eq!(run(&[]).status.code(), Some(2));
}
