//! What the README shows is what the tool answers.

use std::process::Command;

fn answer(arguments: &[&str]) -> String {
    let output = Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .args(arguments)
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .output()
        .expect("the command runs");
    String::from_utf8(output.stdout).expect("UTF-8")
}

#[test]
fn shows_true_answers() {
    let readme = include_str!("../README.md");
    let refuted = "in -Vs- ground; in -R1- out -C1- ground; derive H = voltage(out)/Vs; claim H = 1/(1 - s*R1*C1)";
    let reduced = "in -Vs- ground; in -R1- a -C1- b -R2- out -C2- ground; out -R3- x -R4- ground; x -R5- ground; derive H = voltage(out)/Vs";
    let loop_of_capacitors = "in -Vs- ground; in -C1- out -C2- ground; out -R1- ground; free U0; starts voltage(C2) = U0; derive H = voltage(out)/Vs";
    assert!(readme.contains(loop_of_capacitors));
    for arguments in [
        &["formula", "--of", "H", "examples/antialias_filter.cutloop"][..],
        &["formula", "--of", "Zo", "examples/bulk_and_ceramic.cutloop"],
        &["order", "--of", "H", "examples/half_supply.cutloop"],
        &["audit", "--of", "H", "examples/monitored_sensor.cutloop"],
        &["audit", "--of", "H", "examples/probe_divider.cutloop"],
        &["audit", "--of", "H", "examples/lucky_equaliser.cutloop"],
        &["states", "-e", loop_of_capacitors],
        &["check", "-e", refuted],
        &["reduce", "-e", reduced],
    ] {
        let found = answer(arguments);
        assert!(
            readme.contains(found.trim_end()),
            "{arguments:?} answers\n{found}"
        );
    }
}

#[test]
fn shows_a_near_pair() {
    let readme = include_str!("../README.md");
    let found = answer(&["audit", "--of", "Hm", "examples/half_supply.cutloop"]);
    let last = found.trim_end().rsplit("\n\n").next().expect("a section");
    assert!(last.contains("near") && readme.contains(last), "{found}");
}

#[test]
fn shows_a_command_that_draws() {
    let readme = include_str!("../README.md");
    assert!(
        readme.contains("cutloop plot examples/state_variable_loop.cutloop --drawing -o loop.svg")
    );
    let drawn = answer(&["plot", "examples/state_variable_loop.cutloop", "--drawing"]);
    assert!(drawn.starts_with("<svg") && drawn.contains("<title>U3: opamp</title>"));
}

#[test]
fn shows_the_example_it_runs() {
    let readme = include_str!("../README.md");
    assert!(readme.contains(include_str!("../examples/antialias_filter.cutloop").trim()));
    assert!(readme.contains("cargo run --release -- formula examples/antialias_filter.cutloop"));
}

#[test]
fn shows_time_constants_as_they_are_answered() {
    let readme = include_str!("../README.md");
    let example = "examples/averaged_stage.cutloop";
    let found = answer(&["formula", "--of", "H", "--time-constants", example]);
    let start = found.find("  b1, the sum").expect("sums");
    let end = found.find("\n\n  Elmore").expect("a delay");
    assert!(readme.contains(&found[start..end]), "{found}");
}
