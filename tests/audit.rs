//! One network a line for each class of cancellation: what cancels is known from the wiring by hand.

use std::process::Command;

use serde_json::Value;

/// Network, and its cancellations: class, factor, side, cause.
type Known = (&'static str, &'static [[&'static str; 4]]);

const NONE: &[Known] = &[
    (
        "in -Vs- ground; in -R1- out -C1- ground; derive H = voltage(out)/Vs",
        &[],
    ),
    (
        "in -Vs- ground; in -R1- a -R2- out; a -C1- ground; out -C2- ground; derive H = voltage(out)/Vs",
        &[],
    ),
    (
        "in -Vs- ground; in -(R1 || C1)- out -(R2 || C2)- ground; derive H = voltage(out)/Vs",
        &[],
    ),
    (
        "in -Vs- ground; in -R1- a -R2- ground; in -R3- b -R4- ground; a -C5- b; derive H = voltage(a)/Vs",
        &[],
    ),
    (
        "in -Vs- ground; in -R1- a -L1- out -C1- ground; derive H = voltage(out)/Vs",
        &[],
    ),
    (
        "in -Vs- ground; in -R1- a -C1- ground; U1 is buffer(in a, out d); d -R2- out -C2- ground; derive H = voltage(out)/Vs",
        &[],
    ),
    (
        "in -Vs- ground; in -(R1 || C1)- x -(R2 || C2)- out; U1 is opamp(+ ground, - x, out); derive H = voltage(out)/Vs",
        &[],
    ),
    (
        "in -Vs- ground; in -(R1 || C1)- a -R2- ground; U1 is buffer(in a, out d); d -R3- out -C3- ground; derive H = voltage(out)/Vs",
        &[],
    ),
];

const STRUCTURAL: &[Known] = &[
    // Behind a buffer, after the output.
    (
        "in -Vs- ground; in -R1- a -C1- ground; U1 is buffer(in a, out d); d -R2- e -C2- ground; derive H = voltage(a)/Vs",
        &[["structural", "1 + R2*C2*s", "not seen", "C2 R2"]],
    ),
    // Across an ideal source.
    (
        "in -Vs- ground; in -R1- out -C1- ground; in -R3- g -C3- ground; derive H = voltage(out)/Vs",
        &[["structural", "1 + R3*C3*s", "not seen", "C3 R3"]],
    ),
    (
        "in -Vs- ground; in -R1- out -C1- ground; in -R3- g -L3- ground; derive H = voltage(out)/Vs",
        &[["structural", "R3 + L3*s", "not seen", "L3 R3"]],
    ),
    // In series with a current source.
    (
        "ground -Is- x; x -(R3 || C3)- out -(R1 || C1)- ground; derive H = voltage(out)/Is",
        &[["structural", "1 + R3*C3*s", "not seen", "C3 R3"]],
    ),
    // The charge between two capacitors.
    (
        "in -Vs- ground; in -C1- out -C2- ground; derive H = voltage(out)/Vs",
        &[["structural", "s", "not driven", ""]],
    ),
    // At a source that is zeroed.
    (
        "in -Vs- ground; in -R1- out -C1- ground; x -Vx- ground; x -R2- b -C2- ground; derive H = voltage(out)/Vs",
        &[["structural", "1 + R2*C2*s", "both", "C2 R2"]],
    ),
    // An unused secondary.
    (
        "in -Vs- ground; in -R1- out -C1- ground; T1 is transformer(p1 in, p2 ground, s1 x, s2 ground); x -R3- y -C3- ground; derive H = voltage(out)/Vs",
        &[["structural", "1 + R3*C3*s", "not seen", "C3 R3"]],
    ),
    // From a virtual ground: without a voltage to charge it, but its current reaches the output.
    (
        "in -Vs- ground; in -R1- x -(R2 || C2)- out; U1 is opamp(+ ground, - x, out); x -R3- g -C3- ground; derive H = voltage(out)/Vs",
        &[["structural", "1 + R3*C3*s", "not driven", "C3 R3"]],
    ),
];

const MATCHED: &[Known] = &[
    // A compensated divider.
    (
        "in -Vs- ground; in -(R1 || C1)- out -(R2 || C2)- ground; C2 = R1*C1/R2; derive H = voltage(out)/Vs",
        &[["matched", "1 + R1*C1*s", "not driven", "C2 = R1*C1/R2"]],
    ),
    // Twin branches, equal parts and equal time constants.
    (
        "in -Vs- ground; in -R1- a -C1- ground; in -R2- b -C2- ground; R2 = R1; C2 = C1; derive H = (voltage(a) + voltage(b))/Vs",
        &[["matched", "1 + R1*C1*s", "both", "R2 = R1, C2 = C1"]],
    ),
    (
        "in -Vs- ground; in -R1- a -C1- ground; in -R2- b -C2- ground; C2 = R1*C1/R2; derive H = (voltage(a) + voltage(b))/Vs",
        &[["matched", "1 + R1*C1*s", "both", "C2 = R1*C1/R2"]],
    ),
    // A balanced bridge.
    (
        "in -Vs- ground; in -R1- a -R2- ground; in -R3- b -R4- ground; a -C5- b; R2 = R1; R4 = R3; derive H = voltage(a)/Vs",
        &[[
            "matched",
            "2 + R1*C5*s + R3*C5*s",
            "not driven",
            "R2 = R1, R4 = R3",
        ]],
    ),
    // A zero before the pole, and after it.
    (
        "in -Vs- ground; in -(R1 || C1)- a -R2- ground; U1 is buffer(in a, out d); d -R3- out -C3- ground; R3 = R1; C3 = C1; derive H = voltage(out)/Vs",
        &[["matched", "1 + R1*C1*s", "not driven", "R3 = R1, C3 = C1"]],
    ),
    (
        "in -Vs- ground; in -R3- a -C3- ground; U1 is buffer(in a, out d); d -(R1 || C1)- out -R2- ground; R3 = R1; C3 = C1; derive H = voltage(out)/Vs",
        &[["matched", "1 + R1*C1*s", "not seen", "R3 = R1, C3 = C1"]],
    ),
    // Equal impedances around an amplifier; a third relation has no part in it.
    (
        "in -Vs- ground; in -(R1 || C1)- x -(R2 || C2)- out -R4- ground; U1 is opamp(+ ground, - x, out); R4 = R1; R2 = R1; C2 = C1; derive H = voltage(out)/Vs",
        &[["matched", "1 + R1*C1*s", "not driven", "R2 = R1, C2 = C1"]],
    ),
    (
        "in -Vs- ground; in -(R1 || C1)- x -(R2 || C2)- out; U1 is opamp(+ ground, - x, out); C2 = R1*C1/R2; derive H = voltage(out)/Vs",
        &[["matched", "1 + R1*C1*s", "not driven", "C2 = R1*C1/R2"]],
    ),
];

/// Network, condition, nominals that keep the condition, a nominal that breaks it.
type Lucky = (&'static str, &'static str, [&'static str; 2], &'static str);

const COINCIDENTAL: &[Lucky] = &[
    (
        "in -Vs- ground; in -(R1 || C1)- out -(R2 || C2)- ground; R1 : 2; C1 : 3; R2 : 6; C2 : 1; derive H = voltage(out)/Vs",
        "R1*C1 - R2*C2",
        ["C1=6", "C2=2"],
        "C1=6",
    ),
    (
        "in -Vs- ground; in -R1- a -C1- ground; in -R2- b -C2- ground; R1 : 2; C1 : 3; R2 : 6; C2 : 1; derive H = (voltage(a) + voltage(b))/Vs",
        "R1*C1 - R2*C2",
        ["C1=6", "C2=2"],
        "C2=2",
    ),
    (
        "in -Vs- ground; in -R1- a -R2- ground; in -R3- b -R4- ground; a -C5- b; R1, R2 : 1; R3, R4 : 5; C5 : 1; derive H = voltage(a)/Vs",
        "R1*R4 - R2*R3",
        ["R1=3", "R3=15"],
        "R1=3",
    ),
    (
        "in -Vs- ground; in -(R1 || C1)- a -R2- ground; U1 is buffer(in a, out d); d -R3- out -C3- ground; R1 : 2; C1 : 3; R2 : 5; R3 : 6; C3 : 1; derive H = voltage(out)/Vs",
        "R1*C1 - R3*C3",
        ["C1=6", "C3=2"],
        "C3=2",
    ),
    (
        "in -Vs- ground; in -R3- a -C3- ground; U1 is buffer(in a, out d); d -(R1 || C1)- out -R2- ground; R1 : 2; C1 : 3; R2 : 5; R3 : 6; C3 : 1; derive H = voltage(out)/Vs",
        "R1*C1 - R3*C3",
        ["C1=6", "C3=2"],
        "C1=6",
    ),
    (
        "in -Vs- ground; in -(R1 || C1)- x -(R2 || C2)- out; U1 is opamp(+ ground, - x, out); R1 : 2; C1 : 3; R2 : 6; C2 : 1; derive H = voltage(out)/Vs",
        "R1*C1 - R2*C2",
        ["C1=6", "C2=2"],
        "C1=6",
    ),
    (
        "in -Vs- ground; in -(R1 || C1)- out -(R2 || L2)- ground; R1 : 2; C1 : 3; R2 : 6; L2 : 36; derive H = voltage(out)/Vs",
        "L2 - R1*R2*C1",
        ["C1=6", "L2=72"],
        "L2=72",
    ),
    (
        "in -Vs- ground; in -R1- a -L1- ground; in -R2- b -L2- ground; R1 : 2; L1 : 3; R2 : 6; L2 : 9; derive H = (voltage(a) + voltage(b))/Vs",
        "R2*L1 - R1*L2",
        ["L1=6", "L2=18"],
        "L2=18",
    ),
];

fn audit(text: &str, set: &[&str]) -> Value {
    let mut command = Command::new(env!("CARGO_BIN_EXE_cutloop"));
    command.args(["audit", "--format", "json", "-e", text]);
    for value in set {
        command.args(["--set", value]);
    }
    let output = command.output().expect("the command starts");
    let errors = String::from_utf8_lossy(&output.stderr);
    assert_eq!(output.status.code(), Some(0), "{text}: {errors}");
    let answer: Value = serde_json::from_slice(&output.stdout).expect("JSON");
    answer["results"][0]["cancellations"].clone()
}

fn words(list: &Value, between: &str) -> String {
    let list = list.as_array().into_iter().flatten();
    let list: Vec<&str> = list.filter_map(Value::as_str).collect();
    list.join(between)
}

fn assert_known(known: &[Known]) {
    assert!(known.len() >= 8);
    for (text, expected) in known {
        let found = audit(text, &[]);
        let found: Vec<[String; 4]> = found
            .as_array()
            .expect("a list")
            .iter()
            .map(|it| {
                let word = |key: &str| it[key].as_str().unwrap_or_default().to_owned();
                let cause = words(&it["parts"], " ") + &words(&it["because"], ", ");
                [word("class"), word("factor"), word("hides"), cause]
            })
            .collect();
        assert_eq!(found, *expected, "{text}");
    }
}

#[test]
fn nothing_cancels_in_general_positions() {
    assert_known(NONE);
}

#[test]
fn structure_hides_whole_parts() {
    assert_known(STRUCTURAL);
}

#[test]
fn matched_parts_hide_modes_and_are_named() {
    assert_known(MATCHED);
}

/// Every matched cancellation is gone without any one of the relations it is said to rest on.
#[test]
fn no_relation_of_a_matched_cancellation_can_be_missing() {
    for (text, expected) in MATCHED {
        for relation in expected[0][3].split(", ") {
            let released = text.replace(&format!("{relation}; "), "");
            assert_ne!(&released, text);
            assert_eq!(audit(&released, &[]), serde_json::json!([]), "{released}");
        }
    }
}

#[test]
fn a_coincidence_stands_and_falls_with_its_condition() {
    assert!(COINCIDENTAL.len() >= 8);
    for (text, condition, kept, broken) in COINCIDENTAL {
        for set in [&[][..], kept] {
            let found = audit(text, set);
            let found = found.as_array().expect("a list");
            assert_eq!(found.len(), 1, "{text}");
            assert_eq!(found[0]["class"], "coincidental", "{text}");
            assert_eq!(found[0]["condition"], *condition, "{text}");
        }
        assert_eq!(audit(text, &[broken]), serde_json::json!([]), "{text}");
    }
}

/// Chains of sections behind buffers, each planted with a cancellation of a known class or none. All
/// nominals are made of primes used once, so that nothing else can coincide.
struct Planted {
    state: u64,
    parts: usize,
    text: String,
    expected: Vec<String>,
}

const PRIMES: [u32; 40] = [
    2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37, 41, 43, 47, 53, 59, 61, 67, 71, 73, 79, 83, 89, 97,
    101, 103, 107, 109, 113, 127, 131, 137, 139, 149, 151, 157, 163, 167, 173,
];

impl Planted {
    fn new(seed: u64) -> Self {
        let mut made = Self {
            state: seed.wrapping_mul(0x9e37_79b9_7f4a_7c15) | 1,
            parts: 0,
            text: "n0 -Vs- ground".to_owned(),
            expected: Vec::new(),
        };
        let sections = 1 + made.below(4);
        for section in 0..sections {
            made.section(section);
        }
        made.text += &format!("; derive H = voltage(n{sections})/Vs");
        made.expected.sort();
        made
    }

    fn below(&mut self, bound: usize) -> usize {
        self.state ^= self.state << 13;
        self.state ^= self.state >> 7;
        self.state ^= self.state << 17;
        (self.state % bound as u64) as usize
    }

    /// A number for a new part, and a prime of its own.
    fn next(&mut self) -> (usize, u32) {
        self.parts += 1;
        (self.parts, PRIMES[self.parts - 1])
    }

    /// From node n{k} to n{k+1}, which a buffer drives.
    fn section(&mut self, k: usize) {
        let to = k + 1;
        let (a, p) = self.next();
        let (b, q) = self.next();
        let lag = |r: usize, c: usize, from: &str| {
            format!("; {from} -R{r}- y{k} -C{c}- ground; U{k} is buffer(in y{k}, out n{to})")
        };
        let kind = self.below(4);
        if kind < 2 {
            self.text += &lag(a, b, &format!("n{k}"));
            self.text += &format!("; R{a} : {p}; C{b} : {q}");
            if kind == 1 {
                let (c, r) = self.next();
                let (d, t) = self.next();
                self.text += &format!("; n{to} -R{c}- z{k} -C{d}- ground; R{c} : {r}; C{d} : {t}");
                self.expected.push(format!("structural C{d} R{c}"));
            }
            return;
        }
        let (c, r) = self.next();
        let (d, t) = self.next();
        let (e, _) = self.next();
        let lead = format!("(R{a} || C{b})- x{k} -R{c}- ground");
        self.text += &format!("; n{k} -{lead}; W{k} is buffer(in x{k}, out w{k})");
        self.text += &lag(d, e, &format!("w{k}"));
        self.text += &format!("; C{b} : {q}; R{c} : {r}");
        if kind == 2 {
            self.text += &format!("; R{a} : {p}; R{d} = R{a}; C{e} = C{b}");
            self.expected
                .push(format!("matched R{d} = R{a}, C{e} = C{b}"));
        } else {
            self.text += &format!("; R{a} : {}; R{d} : {p}; C{e} : {}", p * t, q * t);
            let mut terms = [
                (format!("C{b}"), format!("R{a}*C{b}")),
                (format!("C{e}"), format!("R{d}*C{e}")),
            ];
            terms.sort();
            let [(_, first), (_, second)] = terms;
            self.expected
                .push(format!("coincidental {first} - {second}"));
        }
    }
}

#[test]
fn planted_cancellations_are_found_with_their_class() {
    let trials = std::env::var("CUTLOOP_TRIALS");
    let trials: u64 = trials.ok().and_then(|it| it.parse().ok()).unwrap_or(200);
    let mut seen = std::collections::BTreeSet::new();
    for seed in 1..=trials {
        let planted = Planted::new(seed);
        let found = audit(&planted.text, &[]);
        let mut found: Vec<String> = found
            .as_array()
            .expect("a list")
            .iter()
            .map(|it| {
                let cause = words(&it["parts"], " ") + &words(&it["because"], ", ");
                let condition = it["condition"].as_str().unwrap_or_default();
                let class = it["class"].as_str().unwrap_or_default();
                format!("{class} {cause}{condition}")
            })
            .collect();
        found.sort();
        assert_eq!(found, planted.expected, "seed {seed}: {}", planted.text);
        seen.extend(
            found
                .iter()
                .filter_map(|it| it.split(' ').next().map(str::to_owned)),
        );
    }
    assert!(trials < 20 || seen.len() == 3, "{seen:?}");
}
