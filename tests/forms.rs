//! Functions as a designer writes them, against closed forms from the literature.

use std::process::Command;

fn formula(network: &str, options: &[&str]) -> String {
    let output = Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .args(["formula", "-e", network])
        .args(options)
        .env_remove("COLUMNS")
        .output()
        .expect("the command starts");
    assert!(output.status.success(), "{network}");
    String::from_utf8(output.stdout).expect("UTF-8")
}

fn says(network: &str, lines: &[&str]) {
    shows(network, &[], lines);
}

fn shows(network: &str, options: &[&str], lines: &[&str]) {
    let found = formula(network, options);
    let shown: Vec<&str> = found.lines().map(str::trim).collect();
    for line in lines {
        assert!(shown.contains(line), "{network}: no line {line}\n{found}");
    }
}

/// Sallen & Key, "A practical method of designing RC active filters", IRE Trans. CT-2 (1955), with a
/// follower: ω0² = 1/(R1·R2·C1·C2), the damping is that of (R1 + R2)·C2.
#[test]
fn sallen_and_key_low_pass() {
    says(
        "in -Vs- ground; in -R1- a -R2- b; b -C2- ground; a -C1- out; U1 is buffer(in b, out); \
         derive H = voltage(out)/Vs",
        &[
            "ω0 = 1/√(R1·R2·C1·C2)",
            "Q = √(R1·R2·C1/C2)/(R1 + R2)",
            "low-pass of second order · conjugate poles (Q > 1/2) where 4·R1·R2·C1 > (R1 + R2)²·C2",
        ],
    );
}

/// The band-pass with multiple feedback; common knowledge of handbooks (from memory):
/// ω0² = 1/((R1 ∥ R2)·R3·C1·C2).
#[test]
fn band_pass_with_multiple_feedback() {
    says(
        "in -Vs- ground; in -R1- a -C1- m; a -R2- ground; a -C2- out; m -R3- out; \
         U1 is opamp(+ ground, - m, out); derive H = voltage(out)/Vs",
        &["ω0 = 1/√((R1 ∥ R2)·R3·C1·C2)", "hf(H) = 0"],
    );
}

/// Twin-T of equal branches, a notch at 1/(R·C) with Q = 1/4 (from memory, Augustadt 1938).
#[test]
fn matched_twin_t() {
    says(
        "in -Vs- ground; in -R1- a -R2- out; a -C3- ground; in -C1- b -C2- out; b -R3- ground; \
         free R, C; R1 = R2 = R; R3 = R/2; C1 = C2 = C; C3 = 2*C; derive H = voltage(out)/Vs",
        &[
            "ω0 = 1/(R·C)",
            "Q = 1/4",
            "notch of second order · real poles for all values",
        ],
    );
}

/// Series and parallel resonance are duals of each other: L and C, R and 1/R change places.
#[test]
fn dual_networks_have_dual_forms() {
    says(
        "a -Vs- ground; a -(R1 + L1 + C1)- ground; derive Y = -current(Vs)/Vs",
        &["ω0 = 1/√(L1·C1)", "Q = √(L1/C1)/R1"],
    );
    says(
        "ground -Is- a; a -(R1 || L1 || C1)- ground; derive Z = voltage(a)/Is",
        &["ω0 = 1/√(L1·C1)", "Q = R1·√(C1/L1)"],
    );
    says(
        "in -Vs- ground; in -L1- out -(R1 || R2)- ground; derive H = voltage(out)/Vs",
        &["τ = L1/(R1 ∥ R2)", "unit step: dc(H)·(1 − e^(−t/τ))"],
    );
    says(
        "ground -Is- in; in -C1- ground; in -(R1 + R2)- out; out -- ground; derive I = current(R1)/Is",
        &["τ = (R1 + R2)·C1", "unit step: dc(I)·(1 − e^(−t/τ))"],
    );
}

#[test]
fn kinds_of_responses() {
    let all_pass = "in -Vs- ground; in -Ra- m -Rb- out; in -R1- p -C1- ground; \
                    U1 is opamp(+ p, - m, out); derive H = voltage(out)/Vs";
    says(all_pass, &["all-pass where Rb = Ra"]);
    says(
        &format!("{all_pass}; Rb = Ra"),
        &["τ = R1·C1", "all-pass of first order"],
    );
    says(
        "in -Vs- ground; in -(L1 || C1)- out -(R1 || C2)- ground; derive H = voltage(out)/Vs",
        &[
            "ωz = 1/√(L1·C1)",
            "low-pass notch of second order · conjugate poles (Q > 1/2) where 4·R1²·(C1 + C2) > L1",
        ],
    );
    says(
        "in -Vs- ground; in -R1- out -(L1 + C1)- ground; derive H = voltage(out)/Vs",
        &["notch of second order · conjugate poles (Q > 1/2) where 4·L1 > R1²·C1"],
    );
}

/// RC ladder: C1 sees R1, C2 sees R1 + R2, and R2 with C1 shorted (Cochrun & Grabel, "A method for the
/// determination of the transfer function of electronic circuits", IEEE Trans. CT-20 (1973)); the delay
/// of Elmore, "The transient response of damped linear networks", J. Appl. Phys. 19 (1948), is b1 − a1.
#[test]
fn time_constants_of_ladders() {
    let capacitors = "in -Vs- ground; in -R1- a -R2- out; a -C1- ground; out -C2- ground; \
                      derive H = voltage(out)/Vs";
    shows(
        capacitors,
        &["--time-constants"],
        &[
            "C1  sees R1       τ = R1·C1",
            "C2  sees R1 + R2  τ = (R1 + R2)·C2",
            "C2  sees R2 with C1 shorted  × τ(C1)",
            "Elmore delay b1 − a1 = R2·C2 + R1·(C1 + C2)",
        ],
    );
    let zero = "in -Vs- ground; in -R1- out; out -C1- ground; in -C2- out; out -R2- ground; \
                derive H = voltage(out)/Vs";
    shows(
        zero,
        &["--time-constants"],
        &[
            "C1  sees R1 ∥ R2  τ = (R1 ∥ R2)·C1",
            "C2  sees R1 ∥ R2  τ = (R1 ∥ R2)·C2",
        ],
    );
    let stage = "g -Vs- ground; Q1 is fet(g, d, s) with cgd = Cx; s -- ground; free Cx; d -RD- ground; \
                 derive H = voltage(d)/Vs";
    shows(stage, &["--time-constants"], &["Cx  sees RD  τ = RD·Cx"]);
    let coils = "in -Vs- ground; in -L1- a -L2- out; a -R1- ground; out -R2- ground; \
                 derive H = voltage(out)/Vs";
    shows(
        coils,
        &["--time-constants"],
        &[
            "L1  sees R1 ∥ R2  τ = L1/(R1 ∥ R2)",
            "L2  sees R2       τ = L2/R2",
            "L2  sees R1 + R2 with L1 open  × τ(L1)",
        ],
    );
}

#[test]
fn where_there_is_no_sum_of_time_constants_the_reason_is_said() {
    for (network, why) in [
        (
            "in -Vs- ground; in -R1- out -C1- a -C2- ground; C2 = C1/2; derive H = voltage(out)/Vs",
            "no sum of time constants: values of C and L are tied by relations, or s stands inside a device",
        ),
        (
            "in -Vs- ground; in -C1- ground; derive Z = impedance(in) without Vs",
            "no sum of time constants: it has a pole at s = 0, where every sum refers to the value at s = 0",
        ),
        (
            "in -Vs- ground; in -R1- out -R2- ground; derive H = voltage(out)/Vs",
            "no sum of time constants: it has no poles",
        ),
    ] {
        shows(network, &["--time-constants"], &[why]);
    }
}
