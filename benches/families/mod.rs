//! Families of networks by size, as texts of the network language.

#![allow(dead_code, reason = "each bench uses some of the families")]

use std::fmt::Write;

/// Sections of a series part and a shunt part behind a source.
fn ladder(series: char, shunt: char, sections: usize) -> String {
    let mut text = String::from("in -Vs- ground\n");
    let mut before = "in".to_owned();
    for k in 1..=sections {
        let node = if k == sections {
            "out".to_owned()
        } else {
            format!("n{k}")
        };
        let _ = writeln!(text, "{before} -{series}{k}- {node} -{shunt}{k}- ground");
        before = node;
    }
    text
}

const ASKED: &str = "derive H = voltage(out) / Vs\n";

/// R in series, C to ground.
pub(crate) fn rc_ladder(sections: usize) -> String {
    ladder('R', 'C', sections) + ASKED
}

/// L in series, C to ground, a load at the end.
pub(crate) fn lc_ladder(sections: usize) -> String {
    ladder('L', 'C', sections) + "out -RL- ground\n" + ASKED
}

/// The RC ladder with equal resistances and equal capacitances.
pub(crate) fn tied_rc_ladder(sections: usize) -> String {
    let mut text = ladder('R', 'C', sections) + "free R, C\n";
    for k in 1..=sections {
        let _ = writeln!(text, "R{k} = R; C{k} = C");
    }
    text + ASKED
}

/// A ladder between two resistances: C to ground and L in series by turns.
pub(crate) fn terminated_ladder(order: usize) -> String {
    let mut text = String::from("in -Vs- ground\nin -Rs- n0\n");
    for k in 1..=order {
        let node = k.div_ceil(2) - 1;
        let _ = if k % 2 == 1 {
            writeln!(text, "n{node} -C{k}- ground")
        } else {
            writeln!(text, "n{node} -L{k}- n{}", node + 1)
        };
    }
    let last = order / 2;
    let _ = writeln!(
        text,
        "n{last} -RL- ground\nderive H = voltage(n{last}) / Vs"
    );
    text
}

/// k×k nodes, neighbours joined by R, each node with a C to ground.
pub(crate) fn rc_grid(side: usize) -> String {
    let mut text = String::from("n1x1 -Vs- ground\n");
    let mut resistors = 0;
    for row in 1..=side {
        for column in 1..=side {
            let node = format!("n{row}x{column}");
            let right = (column < side).then(|| format!("n{row}x{}", column + 1));
            let below = (row < side).then(|| format!("n{}x{column}", row + 1));
            for next in [right, below].into_iter().flatten() {
                resistors += 1;
                let _ = writeln!(text, "{node} -R{resistors}- {next}");
            }
            if (row, column) != (1, 1) {
                let _ = writeln!(text, "{node} -C{row}x{column}- ground");
            }
        }
    }
    let _ = writeln!(text, "derive H = voltage(n{side}x{side}) / Vs");
    text
}

/// Inverting stages around amplifiers with two poles.
pub(crate) fn amplifier_cascade(stages: usize) -> String {
    let mut text = String::from("n0 -Vs- ground\nfree A, T1, T2\n");
    for k in 1..=stages {
        let _ = writeln!(
            text,
            "n{} -Ra{k}- m{k} -Rb{k}- n{k}\n\
             U{k} is opamp(+ ground, - m{k}, out n{k}) with gain = A/((1 + s*T1)*(1 + s*T2))",
            k - 1
        );
    }
    let _ = writeln!(text, "derive H = voltage(n{stages}) / Vs");
    text
}

/// Every pair of nodes joined, by R and C in turn; a source at the first node.
pub(crate) fn complete_graph(nodes: usize) -> String {
    let mut text = String::from("v1 -Vs- ground\n");
    let name = |node: usize| match node {
        0 => "ground".to_owned(),
        node => format!("v{node}"),
    };
    let mut parts = 0;
    for a in 0..nodes {
        for b in a + 1..nodes {
            if (a, b) == (0, 1) {
                continue;
            }
            parts += 1;
            let letter = if parts % 2 == 0 { 'R' } else { 'C' };
            let _ = writeln!(text, "{} -{letter}{parts}- {}", name(a), name(b));
        }
    }
    let _ = writeln!(text, "derive H = voltage(v{}) / Vs", nodes - 1);
    text
}

/// A twin-T whose two branches are matched.
pub(crate) fn twin_t() -> String {
    "in -Vs- ground; in -R1- a -R2- out; a -C3- ground; in -C1- b -C2- out; b -R3- ground\n\
     free R, C; R1 = R2 = R; R3 = R/2; C1 = C2 = C; C3 = 2*C\n"
        .to_owned()
        + ASKED
}

/// A bridged T with equal capacitors.
pub(crate) fn bridged_t() -> String {
    "in -Vs- ground; in -C1- m -C2- out; m -R2- ground; in -R1- out\n\
     free C; C1 = C2 = C\n"
        .to_owned()
        + ASKED
}

/// The example of twenty transistors.
pub(crate) fn operational_amplifier() -> String {
    include_str!("../../examples/field_effect_opamp.cutloop").to_owned()
}
