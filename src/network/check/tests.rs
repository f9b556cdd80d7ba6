use super::*;
use crate::network::oracle::degrees;
use crate::network::scatter::{Dice, active, passive};
use crate::network::sketch::Sketch;

fn errors(sketch: Sketch) -> Vec<String> {
    check(&sketch.finish())
        .into_iter()
        .filter(Diagnostic::is_error)
        .map(|found| found.message)
        .collect()
}

fn errors_of(network: &Network) -> Vec<Diagnostic> {
    let found = check(network).into_iter();
    found.filter(Diagnostic::is_error).collect()
}

fn only(sketch: Sketch) -> Diagnostic {
    let mut found = check(&sketch.finish());
    assert_eq!(found.len(), 1, "{found:?}");
    found.remove(0)
}

fn is_sound(sketch: Sketch) -> bool {
    check(&sketch.finish()).is_empty()
}

const DIVIDER: &str = "Vs in ground; R1 in out; R2 out ground;";

#[test]
fn an_ordinary_network_passes() {
    assert!(is_sound(Sketch::of(DIVIDER)));
    assert!(is_sound(Sketch::of("")));
}

#[test]
fn a_dangling_branch_is_no_fault() {
    assert!(is_sound(Sketch::of(&format!(
        "{DIVIDER} R3 out a; M1 a b; Vx b c"
    ))));
}

#[test]
fn fails_when_nothing_is_grounded() {
    let found = only(Sketch::of("Vs in 0; R1 in 0"));
    assert!(found.message.contains("no part is connected to ground"));
    assert_eq!(
        found.help.as_deref(),
        Some("node 0 is an ordinary node: write ground")
    );
}

#[test]
fn fails_when_an_island_floats_and_names_it() {
    let found = only(Sketch::of(&format!("{DIVIDER} R3 a b; C1 b a")));
    assert_eq!(
        found.message,
        "nodes a and b (R3 and C1) have no conducting path to ground"
    );
}

#[test]
fn a_secondary_is_to_be_tied_at_s2() {
    let sketch = Sketch::of(&format!("{DIVIDER} RL s t"));
    let found = only(sketch.transformer("T1", ["out", "ground"], ["s", "t"]));
    assert_eq!(
        found.help.as_deref(),
        Some("tie s2 of T1 to ground: t -- ground")
    );
    let sketch = Sketch::of(&format!("{DIVIDER} L1 out ground; RL s t; L2 s t"));
    let found = only(sketch.coupling("T1", ["L1", "L2"], false));
    assert_eq!(
        found.help.as_deref(),
        Some("tie the right end of L2 to ground: t -- ground")
    );
}

#[test]
fn sensing_does_not_ground() {
    let sketch = Sketch::of(DIVIDER).by_voltage("I2", ["out", "ground"], ["x", "ground"]);
    let found = only(sketch);
    assert_eq!(
        found.message,
        "nothing conducts to node x: I2 only senses there"
    );
}

#[test]
fn fails_when_only_current_sources_lead_to_a_node() {
    let found = only(Sketch::of(&format!("{DIVIDER} Is ground a; Iq a out")));
    assert_eq!(
        found.message,
        "only the current sources Is and Iq lead to node a: \
         their currents would have to add up to zero"
    );
    let found = only(Sketch::of(&format!("{DIVIDER} Is ground a; R3 a b")));
    assert!(
        found
            .message
            .starts_with("only the current source Is leads to nodes a and b")
    );
}

#[test]
fn fails_when_nothing_fixes_the_voltage_of_a_driven_node() {
    let sketch = Sketch::of(DIVIDER).by_voltage("I2", ["a", "ground"], ["out", "ground"]);
    let found = only(sketch);
    assert_eq!(
        found.message,
        "nothing determines the voltage of node a: I2 only drives it"
    );
}

#[test]
fn fails_in_a_loop_of_sources_and_meters() {
    let found = only(Sketch::of("Va a ground; Vb b ground; M1 a b; R1 a b"));
    assert!(
        found
            .message
            .starts_with("Va, Vb and M1 form a loop of voltage sources")
    );
    let found = only(Sketch::of("Va a ground; Vb a ground; R1 a ground"));
    assert!(
        found
            .message
            .starts_with("Va and Vb are in parallel (nodes")
    );
    let found = only(Sketch::of(&format!("{DIVIDER} M1 out out")));
    assert!(
        found
            .message
            .starts_with("both ends of M1 are connected to node out")
    );
    let sketch =
        Sketch::of("Va a ground; R1 a ground").by_voltage("Vb", ["a", "ground"], ["a", "ground"]);
    assert_eq!(errors(sketch).len(), 1);
}

#[test]
fn two_outputs_on_one_node_fail() {
    let sketch = Sketch::of("Vs in ground; R1 in a; R2 a out; R3 in b; R4 b out")
        .opamp("U1", "ground", "a", "out")
        .opamp("U2", "ground", "b", "out");
    let found = only(sketch);
    assert!(
        found
            .message
            .starts_with("the output of U1 and the output of U2 are in parallel"),
        "{}",
        found.message
    );
}

#[test]
fn inputs_that_cannot_move_fail() {
    let sketch = Sketch::of("Vs in ground; R1 in out").opamp("U1", "in", "ground", "out");
    let found = only(sketch);
    assert!(
        found.message.starts_with(
            "U1 is to hold its + and - at one voltage, but Vs fixes that voltage already"
        ),
        "{}",
        found.message
    );
    let sketch = Sketch::of("Vs in ground; R1 in out").opamp("U1", "in", "in", "out");
    assert!(
        only(sketch)
            .message
            .starts_with("+ and - of U1 are both connected to node in")
    );
}

#[test]
fn a_follower_across_its_own_output_fails() {
    let sketch = Sketch::of("Vs in ground; R1 in a; R2 b ground; M1 a b").follower("V2", "a", "b");
    let found = only(sketch);
    assert!(
        found
            .message
            .starts_with("V2 is to hold its input and output at one voltage, but M1 fixes"),
        "{}",
        found.message
    );
    let sketch = Sketch::of("Vs in ground; R1 in a; R2 b ground; R3 a b").follower("V2", "a", "b");
    assert!(is_sound(sketch));
}

#[test]
fn an_amplifier_without_feedback_fails() {
    let inputs = "Vs in ground; R1 in p; R2 p ground; RL out ground;";
    let found = only(Sketch::of(inputs).opamp("U1", "p", "ground", "out"));
    assert_eq!(
        found.message,
        "the output of U1 (node out) has no path back to its inputs"
    );
    assert!(is_sound(
        Sketch::of(&format!("{inputs} Rf out p")).opamp("U1", "p", "ground", "out")
    ));
    assert!(is_sound(Sketch::of(inputs).opamp("U1", "p", "out", "out")));
}

#[test]
fn a_rail_is_no_feedback_path() {
    let sketch = Sketch::of("Vcc vcc ground; R1 vcc p; R2 p ground; RL out vcc");
    assert_eq!(errors(sketch.opamp("U1", "p", "ground", "out")).len(), 1);
}

#[test]
fn feedback_through_a_second_amplifier_or_a_controlled_source_counts() {
    let sketch = Sketch::of("Vs in ground; R1 in a; R2 x ground; RL out ground; R3 y a")
        .opamp("U1", "ground", "a", "out")
        .by_voltage("V2", ["y", "ground"], ["out", "ground"]);
    assert!(is_sound(sketch));
    let sketch = Sketch::of("Vs in ground; R1 in a; Ra a ground; RL out ground")
        .opamp("U1", "ground", "a", "out")
        .by_current("I2", ["a", "ground"], "RL");
    assert!(is_sound(sketch));
}

#[test]
fn feedback_through_a_sensed_supply_counts() {
    let sketch = Sketch::of("Vcc vcc ground; RL out vcc; R1 a ground")
        .by_current("I2", ["a", "ground"], "Vcc")
        .opamp("U1", "ground", "a", "out");
    assert!(is_sound(sketch));
}

#[test]
fn an_output_that_lifts_both_inputs_alike_is_no_feedback() {
    let parts = "Vs in ground; R0 in ground; RL out ground; R1 out a; R2 a b; C1 b c; R3 c a";
    let sketch = Sketch::of(parts).opamp("U1", "b", "c", "out");
    assert_eq!(errors(sketch).len(), 1);
    let sketch = Sketch::of(&format!("{parts}; R4 c ground")).opamp("U1", "b", "c", "out");
    assert!(is_sound(sketch));
}

#[test]
fn parts_on_one_node_are_warned_of() {
    let found = only(Sketch::of(&format!("{DIVIDER} R3 out out")));
    assert!(!found.is_error());
    assert_eq!(
        found.message,
        "both ends of R3 are connected to node out: it does nothing"
    );
}

#[test]
fn an_island_by_parts_taken_out_is_a_fault_only_where_it_is_asked_about() {
    let sketch = Sketch::of("Vs in ground; R1 in a; R2 a b");
    let r1 = sketch.id("R1");
    let network = sketch.finish();
    assert!(check(&network).is_empty());
    assert!(faults(&network, &[r1], &[]).is_empty());
    let (a, ground) = (NodeId::at(2), NodeId::GROUND);
    let found = faults(
        &network,
        &[r1],
        &[Port {
            from: a,
            to: ground,
        }],
    );
    assert_eq!(
        found[0].message,
        "nodes a and b (R2) have no conducting path to ground"
    );
}

#[test]
fn a_driving_point_across_a_source_is_an_error_that_offers_without() {
    let mut sketch = Sketch::of("Vs in ground; M1 in a; R1 a ground");
    sketch.ask_impedance("Zi", ["a", "ground"], &[]);
    let found = only(sketch);
    assert_eq!(
        found.message,
        "Vs and M1 join the two nodes of Zi: its sources at zero, the port is shorted"
    );
    assert_eq!(found.help.as_deref(), Some("add without Vs"));
    let mut sketch = Sketch::of("Vs in ground; M1 in a; R1 a ground");
    sketch.ask_impedance("Zi", ["a", "ground"], &["Vs"]);
    assert!(is_sound(sketch));
}

#[test]
fn many_faults_are_counted() {
    let parts: String = (0..40).map(|k| format!("R{k} a{k} b{k};")).collect();
    let found = errors(Sketch::of(&format!("{DIVIDER} {parts}")));
    assert_eq!(found.len(), MESSAGES);
    assert!(found[MESSAGES - 1].ends_with("(and 30 more such places)"));
}

#[test]
fn a_passive_network_is_faulty_exactly_where_its_determinant_is_zero() {
    let mut singular = 0;
    for seed in 0..1500 {
        let network = passive(&mut Dice(seed << 20)).finish();
        let found = errors_of(&network);
        let solvable = degrees(&network, &[], seed).is_some();
        assert_eq!(found.is_empty(), solvable, "seed {seed}: {found:?}");
        singular += usize::from(!solvable);
    }
    assert!(singular > 300 && singular < 1200, "{singular}");
}

#[test]
fn an_active_network_with_a_fault_has_no_solution() {
    let (mut caught, mut missed, mut sound) = (0, 0, 0);
    for seed in 0..4000 {
        let network = active(&mut Dice(seed << 20)).finish();
        let found = errors_of(&network);
        match (found.is_empty(), degrees(&network, &[], seed)) {
            (false, Some(_)) => panic!(
                "seed {seed}: {found:?} {:?}",
                network.elements().collect::<Vec<_>>()
            ),
            (false, None) => caught += 1,
            (true, None) => missed += 1,
            (true, Some(_)) => sound += 1,
        }
    }
    assert!(
        caught > 15 * missed && sound > 500,
        "{caught} caught, {missed} missed, {sound} sound"
    );
}
