//! What is said about a wiring that cannot work, from the text to the message.

use cutloop::diagnostic::Diagnostic;
use cutloop::language::{ReadOptions, read};
use cutloop::source::Sources;

fn judge(text: &str) -> Vec<Diagnostic> {
    let mut sources = Sources::new();
    let main = sources.add("wiring.cutloop", text);
    let load = |_: &str, path: &str| Err(format!("no file {path}"));
    let options = ReadOptions {
        set: &[],
        load: &load,
    };
    read(&mut sources, main, &options).diagnostics
}

fn errors(text: &str) -> Vec<Diagnostic> {
    let found = judge(text).into_iter();
    found.filter(Diagnostic::is_error).collect()
}

/// The one error: its message, the text it points at, its way out.
fn error(text: &str) -> (String, String, String) {
    let found = errors(text);
    assert_eq!(found.len(), 1, "{found:?}");
    let found = &found[0];
    let place = found.place.expect("a wiring error has a place");
    let pointed = text[place.start as usize..place.end as usize].to_owned();
    let help = found.help.clone().unwrap_or_default();
    (found.message.clone(), pointed, help)
}

#[test]
fn fails_when_a_secondary_floats() {
    let (message, _, help) = error(
        "in -Vs- ground; in -R1- p; T1 is transformer(p1 p, p2 ground, s1 a, s2 b); a -RL- b",
    );
    assert_eq!(
        message,
        "nodes a and b (RL and T1) have no conducting path to ground"
    );
    assert_eq!(help, "tie s2 of T1 to ground: b -- ground");
}

#[test]
fn fails_when_a_coupled_coil_floats() {
    let (_, pointed, help) = error(
        "in -Vs- ground; in -R1- p -L1- ground; a -L2- b -RL- a; T1 is coupling of L1, L2 with k = k12; free k12",
    );
    assert!(pointed.contains("L2"), "{pointed}");
    assert_eq!(help, "tie the right end of L2 to ground: b -- ground");
}

#[test]
fn fails_when_a_node_is_only_sensed() {
    let (message, _, _) = error(
        "in -Vs- ground; in -R1- out -RL- ground; out -I2- ground; I2 = gm*voltage(x, ground); free gm; x -- x2",
    );
    assert!(message.starts_with("nothing conducts to node"), "{message}");
}

#[test]
fn fails_in_a_loop_of_sources() {
    let (message, pointed, help) =
        error("a -V1- ground; a -m1- b; b -V2- ground; b -R1- ground; m1 is meter");
    assert_eq!(
        message,
        "V1, m1 and V2 form a loop of voltage sources through nodes a, b and ground, \
         so the current around it is undetermined"
    );
    assert!(pointed.contains("V1"), "{pointed}");
    assert_eq!(
        help,
        "take one of them out, or put a resistance in series with one"
    );
}

#[test]
fn fails_when_a_current_has_no_way_on() {
    let (message, _, _) = error("in -Vs- ground; in -R1- ground; ground -Is- a -R2- .");
    assert!(
        message.starts_with("only the current source Is leads to nodes a"),
        "{message}"
    );
}

#[test]
fn fails_when_an_opamp_has_no_feedback() {
    let (message, _, help) = error(
        "in -Vs- ground; in -R1- p -R2- ground; out -RL- ground; U1 is opamp(+ p, - ground, out)",
    );
    assert_eq!(
        message,
        "the output of U1 (node out) has no path back to its inputs"
    );
    assert!(help.contains("gain = A0"), "{help}");
}

#[test]
fn fails_when_two_outputs_share_a_node() {
    let (message, _, _) = error(
        "in -Vs- ground; in -R1- a -R2- out; in -R3- b -R4- out; U1 is opamp(+ ground, - a, out); U2 is opamp(+ ground, - b, out)",
    );
    assert!(
        message.contains("U1") && message.contains("U2"),
        "{message}"
    );
}

#[test]
fn a_driving_point_across_a_source_is_told_without() {
    let (message, pointed, help) =
        error("in -Vs- ground; in -R1- ground; derive Zi = impedance(in)");
    assert!(
        message.starts_with("Vs joins the two nodes of Zi"),
        "{message}"
    );
    assert!(pointed.contains("impedance"), "{pointed}");
    assert_eq!(help, "add without Vs");
    assert!(
        errors("in -Vs- ground; in -R1- ground; derive Zi = impedance(in) without Vs").is_empty()
    );
}

#[test]
fn a_number_as_node_is_told_to_write_ground() {
    let (message, _, help) = error("in -Vs- 0; in -R1- 0");
    assert!(message.contains("reference"), "{message}");
    assert!(help.contains("ground"), "{help}");
}

#[test]
fn ordinary_networks_and_dangling_parts_pass() {
    for text in [
        "in -Vs- ground; in -R1- out -C1- ground; out -R2- a",
        "in -Vs- ground; in -R1- m -C1- out; U1 is opamp(+ ground, - m, out)",
        "in -Vs- ground; in -R1- a -C1- ground; U1 is buffer(in a, out b); b -R2- c -C2- ground",
        "vcc -V1- ground; vcc -R1- c; Q1 is bjt(b in, c, e ground); in -Vs- ground",
    ] {
        assert!(errors(text).is_empty(), "{text}: {:?}", errors(text));
    }
}

#[test]
fn a_part_with_both_ends_on_one_node_is_a_warning() {
    let found = judge("in -Vs- ground; in -R1- ground; in -R2- a; a -- in");
    assert!(
        found
            .iter()
            .any(|found| !found.is_error() && found.message.contains("R2")),
        "{found:?}"
    );
}
