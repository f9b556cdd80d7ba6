//! State equations of small networks, against what is written down by hand.

use std::process::Command;

use serde_json::{Value, json};

fn output(text: &str, format: &str) -> (String, Option<i32>) {
    let output = Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .args(["states", "-e", text, "--format", format])
        .env_remove("COLUMNS")
        .output()
        .expect("the command starts");
    let text = String::from_utf8(output.stdout).expect("UTF-8");
    (text, output.status.code())
}

fn states(text: &str) -> Value {
    let (answer, code) = output(text, "json");
    assert_eq!(code, Some(0), "{answer}");
    let answer: Value = serde_json::from_str(&answer).expect("JSON");
    let states = answer["states"].clone();
    let size = states["vector"].as_array().expect("a list").len();
    assert_eq!(json!(size), answer["order"]["network"], "{answer}");
    assert_eq!(states["proven"], json!(true));
    states
}

fn names(list: &Value) -> Vec<&str> {
    let list = list.as_array().expect("a list").iter();
    list.filter_map(|it| it["name"].as_str()).collect()
}

#[test]
fn series_resonance_has_its_two_states() {
    // L di/dt = Vs − R i − v, C dv/dt = i (Kirchhoff).
    let found =
        states("in -Vs- ground; in -R1- a -L1- out -C1- ground; derive H = voltage(out)/Vs");
    assert_eq!(names(&found["vector"]), ["vC1", "iL1"]);
    assert_eq!(found["vector"][1]["means"], json!("current of L1"));
    assert_eq!(found["A"], json!([["0", "1/C1"], ["-1/L1", "-R1/L1"]]));
    assert_eq!(found["B"], json!([[["0"], ["1/L1"]]]));
    assert_eq!(found["C"], json!([["1", "0"]]));
    assert_eq!(found["D"], json!([[["0"]]]));
    assert_eq!(found["method"], json!("normal tree"));
    assert_eq!(found["tree"], json!(["Vs", "C1", "R1"]));
}

#[test]
fn a_capacitor_loop_shares_its_charge() {
    // Charge of the middle node: C2·v2 − C1·v1 stays when the loop closes.
    let found = states(
        "in -Vs- ground; in -C1- out -C2- ground; out -R1- ground; free U1, U2; \
         starts voltage(C1) = U1; starts voltage(C2) = U2; derive H = voltage(out)/Vs",
    );
    assert_eq!(names(&found["vector"]), ["vC1"]);
    assert_eq!(names(&found["dependent"]), ["vC2"]);
    assert_eq!(found["dependent"][0]["equals"], json!("Vs - vC1"));
    assert_eq!(found["A"], json!([["-1/(R1*C1 + R1*C2)"]]));
    assert_eq!(found["B"][1], json!([["C2/(C1 + C2)"]]));
    let after = &found["starts"]["after"];
    assert_eq!(
        after[1],
        json!({
            "name": "vC2",
            "equals": "C1*Vs/(C1 + C2) - (U1*C1 - U2*C2)/(C1 + C2)",
        })
    );
    let response = &found["starts"]["responses"][0];
    assert_eq!(response["numerator"], json!(["-U1*R1*C1 + U2*R1*C2"]));
    assert_eq!(response["denominator"], json!(["1", "R1*C1 + R1*C2"]));
}

#[test]
fn currents_of_two_coils_at_one_source_are_one_state() {
    let found =
        states("ground -Is- in; in -L1- m -R1- ground; in -L2- ground; derive Z = voltage(in)/Is");
    assert_eq!(names(&found["vector"]), ["iL1"]);
    assert_eq!(found["dependent"][0]["equals"], json!("Is - iL1"));
    assert_eq!(found["A"], json!([["-R1/(L1 + L2)"]]));
    // Z grows with s: L1·L2/(L1 + L2).
    assert_eq!(found["D"][1], json!([["L1*L2/(L1 + L2)"]]));
}

#[test]
fn differentiators_need_no_state() {
    let found = states(
        "in -Vs- ground; in -C1- m -R1- out; U1 is opamp(+ ground, - m, out); \
         out -C2- n -R2- q; U2 is opamp(+ ground, - n, out q); derive H = voltage(q)/Vs",
    );
    assert_eq!(found["vector"], json!([]));
    let d = found["D"].as_array().expect("a list");
    assert_eq!(d.len(), 3);
    assert_eq!(d[2], json!([["R1*R2*C1*C2"]]));
}

#[test]
fn gains_with_s_keep_values_of_their_own() {
    let found = states(
        "in -Vs- ground; U1 is opamp(+ in, - out, out) with gain = A0/(1 + s*T); free A0, T; \
         derive H = voltage(out)/Vs",
    );
    assert_eq!(names(&found["vector"]), ["vU1"]);
    assert_eq!(found["A"], json!([["-(1 + A0)/T"]]));
    assert_eq!(found["method"], json!("pencil"));
    assert_eq!(found["C"], json!([["1"]]));
}

#[test]
fn questions_in_other_networks_have_their_own_equations() {
    let found = states(
        "in -Vs- ground; in -R1- out -C1- ground; derive H = voltage(out)/Vs; \
         derive Zo = impedance(out); derive Zi = impedance(in) without Vs; \
         derive Yi = admittance(in) without Vs; derive Q = H*Zo",
    );
    assert_eq!(names(&found["inputs"]), ["Vs", "i_out"]);
    assert_eq!(found["no_output"], json!(["Q"]));
    let others = found["other_networks"].as_array().expect("a list");
    assert_eq!(others.len(), 2);
    assert_eq!(others[0]["without"], json!(["Vs"]));
    assert_eq!(others[0]["D"], json!([[["R1"]]]));
    assert_eq!(others[1]["A"], json!([["-1/(R1*C1)"]]));
    assert_eq!(others[1]["C"], json!([["-1/R1"]]));
}

#[test]
fn perfectly_coupled_coils_have_one_state() {
    let found = states(
        "in -Vs- ground; in -R1- a -L1- ground; b -L2- ground; b -R2- ground; \
         T1 is coupling of L1, L2 with k = 1; L2 = n^2*L1; free n; derive H = voltage(b)/Vs",
    );
    assert_eq!(names(&found["vector"]), ["iL1"]);
    assert_eq!(names(&found["dependent"]), ["iL2"]);
}

#[test]
fn a_budget_that_is_reached_answers_nothing() {
    let text = "in -Vs- ground; in -R1- out -C1- ground; in -C2- out; out -R2- ground; \
                derive H = voltage(out)/Vs";
    let output = Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .args(["states", "-e", text, "--budget", "terms=1"])
        .output()
        .expect("the command starts");
    assert_eq!(output.status.code(), Some(3));
    assert!(output.stdout.is_empty());
}

#[test]
fn starting_values_are_no_warning() {
    let text = "in -Vs- ground; in -R1- out -C1- ground; free U0; starts voltage(C1) = U0; \
                derive H = voltage(out)/Vs";
    for command in ["states", "formula", "order"] {
        let output = Command::new(env!("CARGO_BIN_EXE_cutloop"))
            .args([command, "-e", text])
            .output()
            .expect("the command starts");
        assert_eq!(output.status.code(), Some(0));
        assert!(output.stderr.is_empty(), "{command}");
    }
    let (latex, _) = output(text, "latex");
    assert!(
        latex.contains("pmatrix") && latex.contains("(0^{+})"),
        "{latex}"
    );
}
