use super::*;
use crate::source::Sources;

fn read_all(text: &str) -> (Vec<Statement>, Vec<Diagnostic>) {
    let mut sources = Sources::new();
    let id = sources.add("x", text);
    parse(id, text)
}

fn message(text: &str) -> (String, String) {
    let (_, errors) = read_all(text);
    let error = errors
        .first()
        .unwrap_or_else(|| panic!("no error in {text}"));
    (
        error.message.clone(),
        error.help.clone().unwrap_or_default(),
    )
}

#[test]
fn every_form_of_the_language_is_read() {
    let text = r#"
title "Load-cell filter # one"
use "sections.cutloop"
in  -Vs- ground
in  -R1- a  -R2(10 kΩ ± 1 %)- b -- c
a -(R3 || C3 + L1)- . -(R4(1k) + (C4 || R5))- 0
n{k-1} -R{k}- n{k + 1} -C1- 1
U1 is opamp(+ b, - out, out)
U2 is diffamp(+ a, - b, out+ c, out- d) with gain = 2*K, rin = exactly 10
load, aux is resistor
T1 is coupling of L1, L2 with k = k12
A1 is section(in a, out b, com ground) with R = Ra, C = 2*Ca
R1, R2 : 10 kΩ ± 1 %
R1 .. R8 : 10k
C : 100 nF +20 % -10 %
C2 : 3p3 ± 0.5 pF
R : 10 kΩ, 1 kΩ .. 100 kΩ
R : 1 kΩ .. 100 kΩ
R : R47
R1 = R2 = R
R2 = R1 ± 0.1 %
C1 = exactly 4n7
K = 1 + Rb/Ra
Z1 = R + 1/(s*C)
V3 = -K*voltage(x) + 2*voltage(a, b)
free gm, A0
free A0 : 1e5
free k real
free x in 0 .. 1
drive Vd, Vc
assume 0 < K < 3
let N = 2*(M+1) - 1
for k = 1 .. N
  n{k} -R{k}- ground
end
module section(in, out, com) with R, C = 1n, D = exactly 2
  in -R1- out
end
derive H = voltage(out) / Vs
derive H = (voltage(a) - 2*voltage(b)) / Vs without RL, R2
derive Zi = impedance(in, b) without Vs
derive Y = admittance(a,b)
derive q = ratio(voltage(a), voltage(b)) with Vs
derive T = return_ratio(U1)
derive F = 1/(1 + T)
derive Hi = H with A0 -> infinite, d -> 0
derive e = first_order(H, 1/A0)
claim H = 1/(1 + s*R1*C1)
claim order(H) = 2; claim order(network) = 3; claim static(network) = 1
claim dc(H) = infinite; claim hf(H) = 0
claim coefficient(H, den, 1) = R1*C1
claim pole(H) = -1/(R*C); claim zero(H) = 0; claim same(H1, H2)
claim cancels(H) = none; claim cancels(H) = structural, matched
claim stable(H) within tolerance; claim stable(network)
starts voltage(C1) = V0; starts current(L1) = I0
x = R1 || R2 + R3^2 - (a || b)^-1
"#;
    let (statements, errors) = read_all(text);
    assert!(errors.is_empty(), "{errors:?}");
    assert_eq!(statements.len(), 59);
}

#[test]
fn mistakes_have_a_way_out() {
    assert!(message("R1 : 2*R2").1.contains("R1 = 2*R2"));
    assert!(
        message("x = 2*R1 || R2")
            .1
            .contains("2*(R1 || R2) or (2*R1) || R2")
    );
    assert!(message("x = 2 R1").1.contains("2*R1"));
    assert!(message("R1 : 4,7 k").1.contains("4.7"));
    assert!(
        message("V+ -R1- a").1.contains("v_p"),
        "{:?}",
        message("V+ -R1- a")
    );
    assert!(
        message("3V3 -R1- a").1.contains("v3v3"),
        "{:?}",
        message("3V3 -R1- a")
    );
    assert!(message("derve H = voltage(out)/Vs").1.contains("derive"));
    assert!(message("x = y^1000000000").0.contains("1000"));
    assert!(message("end").0.contains("closes nothing"));
    assert!(
        message("for k = 1 .. 2\n a -R1- b")
            .0
            .contains("never closed")
    );
    assert!(message("x = (1 + 2").0.contains("never closed"));
}

#[test]
fn plain_paths_are_read_to_the_same_tree_by_scanner_and_grammar() {
    let mut sources = Sources::new();
    let pieces = [
        "a",
        "in",
        "n1",
        "12",
        "0",
        "_x",
        "R1",
        "C22",
        "end",
        "is",
        "3V3",
        "x.y",
        ".",
        "n{k}",
        "µ",
        "-",
        "--",
        "- ",
        " -",
        "-R1-",
        "-L-",
        "-(R1 + L1)-",
        "-R2(10 k)-",
        " ",
        "  ",
        "\t",
        "=",
        "1e3",
    ];
    let mut seed = 5_u64;
    let mut random = |below: usize| {
        seed = seed
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        usize::try_from(seed >> 33).unwrap_or(0) % below
    };
    let (mut plain, mut other) = (0, 0);
    for _ in 0..20_000 {
        // Nodes and links by turns, at times anything.
        let text: String = (0..1 + random(9))
            .map(|turn| match (random(8), turn % 2) {
                (0, _) => pieces[random(pieces.len())],
                (_, 0) => pieces[random(15)],
                _ => pieces[15 + random(6)],
            })
            .collect();
        let text = text.trim();
        if text.is_empty() {
            continue;
        }
        let source = sources.add("x", text);
        let Some(kind) = scan(source, 0, text) else {
            other += 1;
            continue;
        };
        plain += 1;
        let reader = Reader {
            source,
            base: 0,
            text,
        };
        let piece = Piece {
            start: 0,
            end: text.len(),
        };
        match reader.by_grammar(piece) {
            Ok(Item::Statement(read)) => assert_eq!(read.kind, kind, "{text}"),
            Ok(_) => panic!("{text}: no statement"),
            Err(error) => panic!("{text}: {}", error.message),
        }
    }
    assert!(plain > 300 && other > 300, "{plain} {other}");
}
