//! Sentences of the language, each by a text and what must be said of it: errors with their way out,
//! warnings, and answers.

use std::process::Command;

/// A network that is right, for a sentence added to it.
const BASE: &str = "in -Vs- ground; in -R1- out; out -C1- ground; derive H = voltage(out)/Vs; ";

/// What a command says of a text: both streams.
fn said(command: &str, text: &str) -> String {
    let output = Command::new(env!("CARGO_BIN_EXE_cutloop"))
        .args([command, "-e", text])
        .output()
        .expect("the command runs");
    assert!(
        output.status.code().is_some_and(|code| code <= 3),
        "{text}: {:?}",
        output.status
    );
    let mut all = String::from_utf8_lossy(&output.stdout).into_owned();
    all.push_str(&String::from_utf8_lossy(&output.stderr));
    all
}

#[track_caller]
fn says(command: &str, text: &str, expected: &[&str]) {
    let all = said(command, text);
    for part in expected {
        assert!(
            all.contains(part),
            "{text}\nshould say: {part}\nsays:\n{all}"
        );
    }
}

#[test]
fn every_warning_is_given() {
    says(
        "formula",
        "in -V1- ground; in -R1- OUT; out -C1- ground; OUT -C2- out;derive H=voltage(out)/V1",
        &["case matters"],
    );
    says(
        "formula",
        "ground -Vs- in; in -R1- out -C1- ground; derive H=voltage(out)/Vs",
        &["the voltage of in is −Vs", "in -Vs- ground"],
    );
    says(
        "formula",
        &format!("{BASE}free k; R1 = 2 k*k"),
        &["read as 2 kilo"],
    );
    says("formula", &format!("{BASE}free s1; Z1 = 2 s"), &["2*s"]);
    says(
        "formula",
        &format!("{BASE}R7 : 10 k"),
        &["R7 stands nowhere else"],
    );
    says(
        "formula",
        &format!("{BASE}free q"),
        &["q stands nowhere else"],
    );
    says(
        "formula",
        "a -Vs- ground; a -R1- a; a -R2- ground; derive H=voltage(a)/Vs",
        &["R1"],
    );
    says(
        "formula",
        "in -Vs- ground; in -R1- out; out -C1- ground; R1 .. R3 : 10k; derive H = voltage(out)/Vs",
        &["R2 stands nowhere"],
    );
    says("order", "x -R1- ground", &["asks for no function"]);
}

#[test]
fn every_mistake_has_its_way_out() {
    says(
        "formula",
        &format!("{BASE}R1 = 2*x || y; free x,y"),
        &["2*(x || y)", "(2*x) || y"],
    );
    says(
        "formula",
        &format!("{BASE}R1 = -x || y; free x,y"),
        &["-(x || y)"],
    );
    says(
        "formula",
        &format!("{BASE}R1 = x^2 || y; free x,y"),
        &["two ways"],
    );
    says("formula", &format!("{BASE}R1 : 2*R2"), &["R1 = 2*R2"]);
    says("formula", &format!("{BASE}Vs = 5"), &["Vs : 5"]);
    says(
        "formula",
        &format!("{BASE}C1 = 4n7"),
        &["C1 : 4n7", "C1 = exactly 4n7"],
    );
    says("formula", &format!("{BASE}R1 = R"), &["free R"]);
    says("formula", &format!("{BASE}R1 : 0"), &["zero"]);
    says("formula", &format!("{BASE}R1 : -3"), &["negative"]);
    says(
        "formula",
        &format!("{BASE}R1 : 10k; R1 = 2*x; free x"),
        &["nominal and a relation"],
    );
    says(
        "formula",
        &format!("{BASE}R1 : 10 nF"),
        &["unit does not fit"],
    );
    says(
        "formula",
        &format!("{BASE}R1 = x + y; x : 1 Ω; y : 1 F"),
        &["unlike dimensions"],
    );
    says(
        "formula",
        "in -Vs- ground; in -R1- out; out -C1- ground; in -R1- x; x -C2- ground; derive H = voltage(out)/Vs",
        &["placed twice", "first placed here"],
    );
    says(
        "formula",
        "in -Vs- ground; in -load- out; out -C1- ground; derive H = voltage(out)/Vs",
        &["load is resistor"],
    );
    says("order", "V+ -R1- ground", &["v_p"]);
    says("order", "+5V -R1- ground", &["v5"]);
    says("order", "3V3 -R1- ground", &["v3v3"]);
    says(
        "formula",
        "in -Vs- ground; in -R1- Rx; Rx -Rx- ground; derive H = voltage(Rx)/Vs",
        &["node and a part"],
    );
    says(
        "formula",
        &format!("{BASE}derive T = return_ratio(U1); U1 is opamp(+ ground, - out, z); z -Rz- out"),
        &["no terminal z"],
    );
    says(
        "formula",
        &format!("{BASE}derive Z = impedance(in)"),
        &["without Vs"],
    );
    says(
        "formula",
        &format!("{BASE}derive F = voltage(out)/voltage(in)"),
        &["ratio("],
    );
    says(
        "formula",
        &format!("{BASE}derive F = voltage(out)"),
        &["/ Vs"],
    );
    says(
        "formula",
        &format!("{BASE}derive F = s*voltage(out)/Vs"),
        &["coefficient of a response"],
    );
    says(
        "check",
        &format!("{BASE}claim H2 = 1"),
        &["no derived function H2", "H"],
    );
    says(
        "formula",
        &format!("{BASE}f0 : 1 kHz; R1 = 1/(s*f0)"),
        &["2*pi*f0"],
    );
    says(
        "check",
        &format!("{BASE}assume 0 < R1 < 3 kΩ; claim R = 1"),
        &["no derived function R"],
    );
    says("formula", "x -R1- ground", &["nothing asked"]);
    says(
        "formula",
        &format!("{BASE}U1 is opam(+ a, - b, out)"),
        &["did you mean opamp"],
    );
    says(
        "formula",
        &format!("{BASE}U1 is opamp(a, b, out)"),
        &["no terminal a", "+, -, out"],
    );
    says(
        "formula",
        &format!("{BASE}U1 is opamp(+ in, out z)"),
        &["is not connected"],
    );
    says(
        "formula",
        &format!("{BASE}Q1 is bjt(b in, c out, e ground) with gn = 3"),
        &["did you mean gm"],
    );
    says(
        "formula",
        &format!("{BASE}derve G = H"),
        &["did you mean derive"],
    );
    says(
        "formula",
        &format!("{BASE}derive G = Hx"),
        &["Hx is not known"],
    );
    says("formula", &format!("{BASE}R1 = 3 + "), &["ends too early"]);
    says(
        "formula",
        "title \"x\"\nin -Vs- ground\nin -R1- out -C1- ground\nderive H = voltage(out) /\n Vs",
        &["ends too early"],
    );
    says(
        "formula",
        "in -Vs- ground; in -R1- out; I2 = 3 + gm*voltage(in, out); out -I2- ground; free gm; derive H=voltage(out)/Vs",
        &["I2 is set to a value"],
    );
    says(
        "formula",
        "in -Vs- ground; Vx = 2; in -R1- Vy; Vy -Vx- ground; derive H=current(R1)/Vs",
        &["Vx : 2"],
    );
    says(
        "order",
        "in -Vs- ground; in -L1- a -R1- ground; b -L2- c -R2- b; T1 is coupling of L1, L2 with k = 2",
        &["k lies between"],
    );
    says(
        "order",
        "in -Vs- ground; in -L1- a -R1- ground; b -L2- c -R2- b; T1 is coupling of L1, L2; derive H=voltage(c,b)/Vs",
        &["tie"],
    );
    says(
        "order",
        "module m(a, b)\n a -R1- b\n R2 = x\nend\nA1 is m(a in, b ground)\nin -Vs- ground",
        &["x is not known", "in the instance A1"],
    );
    says(
        "order",
        "module m(a, b)\n a -R1- b\nend\nA1 is m(a in, c ground)\nin -Vs- ground",
        &["no port c", "a, b"],
    );
}

#[test]
fn what_is_right_is_answered() {
    says(
        "formula",
        "in -Vs- ground; in -load- out; load is resistor; out -C1- ground; derive H = voltage(out)/Vs",
        &["load·C1"],
    );
    says(
        "check",
        &format!(
            "{BASE}claim order(H) = 1; claim order(network) = 1; claim dc(H) = 1; claim hf(H) = 0; claim pole(H) = -1/(R1*C1); claim coefficient(H, den, 1) = R1*C1; claim static(network) = 0; claim cancels(H)=none; claim stable(H)"
        ),
        &["9 claims hold"],
    );
    says("check", &format!("{BASE}claim order(H) = 2"), &["refuted"]);
    says(
        "formula",
        "in -Vs- ground; in -R1- .  -R2- out; out -C1- ground; derive H = voltage(out)/Vs",
        &["R1 + R2"],
    );
    says(
        "formula",
        "in -Vs- ground; in -(R1 + R2 || R3)- out; out -C1- gnd; derive H = voltage(out)/Vs",
        &["R2·R3"],
    );
    says(
        "formula",
        "in -Vs- ground; in -R1(10 kΩ ± 1 %)- out; out -C1(4n7 +20 % -10 %)- gnd; derive H = voltage(out)/Vs",
        &["R1·C1"],
    );
    says(
        "formula",
        "in -Vs- ground; in -R1- out; out -τ1- ground; τ1 is capacitor; derive H = voltage(out)/Vs",
        &["R1·τ1"],
    );
    says(
        "formula",
        "in -Vs- ground; in -Rµ- out; out -C1- ground; Rμ : 5; derive H = voltage(out)/Vs",
        &["1 + s"],
    );
    says(
        "formula",
        "in -Vs- ground\nin -R1-\n out -C1- ground\nderive H = voltage(out) / Vs",
        &["1 + s·R1·C1"],
    );
    says(
        "formula",
        "\u{FEFF}in -Vs- ground\r\nin -R1- out -C1- ground\r\nderive H = voltage(out) / Vs\r\n",
        &["1 + s·R1·C1"],
    );
    says(
        "formula",
        "in −R1− out; in -Vs- ground; out -C1- ground; derive H = voltage(out)/Vs",
        &["1 + s·R1·C1"],
    );
    says(
        "formula",
        &format!("{BASE}R1 = a ∥ b; free a, b"),
        &["a + b"],
    );
    says(
        "formula",
        "in -Vs- ground; in -R1- out; x -C1- out; x -- ground; derive H=voltage(x, out)/Vs",
        &["−1"],
    );
    says(
        "formula",
        "for k = 3 .. 1\n x -R{k}- y\nend\nin -Vs- ground; in -R1- ground; derive H = current(R1)/Vs",
        &["R1"],
    );
    says(
        "formula",
        "module m(a, b)\n a -R1- b\nend\nA1 is m(a in, b ground)\nin -Vs- ground\nderive H = current(A1.R1)/Vs",
        &["A1.R1"],
    );
    says(
        "formula",
        "module m(a, b) with R, C = 1n\n a -R1- b\n a -C1- b\n R1 = R\n C1 = C\nend\nA1 is m(a in, b ground)\nin -Vs- ground\nderive H = current(Vs)/Vs\nderive G = voltage(A1.a)/Vs",
        &["A1.R", "A1.C"],
    );
    says(
        "formula",
        "module m(a, b) with R\n a -R1- b\n R1 = R\nend\nA1 is m(a in, b ground) with R = exactly 5\nin -Vs- ground\nderive H = current(Vs)/Vs",
        &["5"],
    );
}

#[test]
fn hostile_texts_are_refused_at_once() {
    let sums = format!("x = {}1{}", "(".repeat(10_000), ")".repeat(10_000));
    says("order", &sums, &["200 parentheses"]);
    says(
        "order",
        "for k = 1 .. 100000000000\n n{k} -R{k}- ground\nend",
        &["10 000 000"],
    );
    let nested = "for k = 1 .. 9000000\nfor j = 1 .. 9000000\n a -R{k}x{j}- b\nend\nend";
    says("order", nested, &["10 000 000"]);
    says(
        "order",
        "a -R1- ground; R1 = (w + x + y + z)^1000; free w, x, y, z",
        &["too large"],
    );
    says(
        "order",
        "a -R1- ground; R1 = x^1000000000; free x",
        &["exponents go up to 1000"],
    );
    says("order", "a -R1- ground; R1 : 1e999999999", &["beyond 1000"]);
    says(
        "order",
        "module m(a)\n X is m(a a)\nend\nY is m(a b)\nb -R1- ground",
        &["contains itself"],
    );
    says(
        "order",
        "a -R1- ground; R1 = x; x = y; y = x",
        &["need each other"],
    );
    says(
        "order",
        "a -R1- ground; R1 = x/(y - y); free x, y",
        &["divides by zero"],
    );
    says(
        "order",
        "use \"nowhere.cutloop\"; a -R1- ground",
        &["nowhere.cutloop"],
    );
    says("order", "", &["no statement"]);
}

#[test]
fn chains_of_a_hundred_thousand_links_do_not_overflow() {
    let sum = format!("a -R1- ground; free x; R1 = {}x", "x+".repeat(30_000));
    says("order", &sum, &["reactive parts"]);
    let signs = format!("a -R1- ground; free x; R1 = {}x", "-".repeat(30_000));
    says("order", &signs, &["reactive parts"]);
}

#[test]
fn mistakes_are_placed_by_line_and_column_behind_wide_letters() {
    let text =
        "in -Vs- ground\nin -Rµ(10 kΩ ± 1 %)- b; b -C1- grund2 -R9- (\nderive H = voltage(oot)/Vs";
    let all = said("order", text);
    assert!(all.contains("command line:2:"), "{all}");
}
