//! What the commands print for some of the examples.

use std::process::Command;

/// What a command prints on standard output for an example.
fn printed(command: &str, example: &str, format: &str) -> String {
    let output = Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .current_dir(env!("CARGO_MANIFEST_DIR"))
        .args([command, &format!("examples/{example}.cutloop")])
        .args(["--format", format])
        .env_remove("COLUMNS")
        .output()
        .expect("the command starts");
    String::from_utf8(output.stdout).expect("UTF-8")
}

macro_rules! printed {
    ($($name:ident: $command:literal, $example:literal, $format:literal;)*) => {
        $(
            #[test]
            fn $name() {
                insta::assert_snapshot!(printed($command, $example, $format));
            }
        )*
    };
}

printed! {
    order_of_a_monitored_sensor: "order", "monitored_sensor", "text";
    order_of_a_line_filter: "order", "line_filter", "text";
    order_of_a_line_filter_in_latex: "order", "line_filter", "latex";
    order_of_a_light_receiver: "order", "light_receiver", "json";
    formula_of_a_hum_trap: "formula", "hum_trap", "text";
    formula_of_a_delay_ladder: "formula", "delay_ladder", "text";
    formula_of_a_light_receiver: "formula", "light_receiver", "text";
    formula_of_a_light_receiver_in_latex: "formula", "light_receiver", "latex";
    formula_of_a_divider: "formula", "probe_divider", "json";
    audit_of_a_divider: "audit", "probe_divider", "text";
    audit_of_a_lucky_pair: "audit", "lucky_equaliser", "text";
    audit_of_a_lucky_pair_in_json: "audit", "lucky_equaliser", "json";
    reduction_of_a_line_filter: "reduce", "line_filter", "text";
    reduction_of_a_delay_ladder: "reduce", "delay_ladder", "text";
    reduction_of_a_light_receiver: "reduce", "light_receiver", "json";
    reduction_of_a_feedback_pair_in_latex: "reduce", "output_stage_loop", "latex";
    states_of_a_capacitor_loop: "states", "half_supply", "text";
    states_of_a_light_receiver: "states", "light_receiver", "text";
    states_of_a_delay_ladder: "states", "delay_ladder", "text";
    states_of_coupled_coils: "states", "implant_link", "text";
    states_of_coupled_coils_in_latex: "states", "implant_link", "latex";
    states_of_a_capacitor_loop_in_json: "states", "half_supply", "json";
    claims_of_a_lucky_pair: "check", "lucky_equaliser", "text";
}
