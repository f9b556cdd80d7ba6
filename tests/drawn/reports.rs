//! The reports.

use cutloop::algebra::{Integer, Polynomial, Rational};
use cutloop::analysis::report::{
    Cancellation, ClaimReport, ConstraintEvidence, Drop, Expanded, Finding, Formula, Hides, Nested,
    NoEffect, StaticSet, Stored, Verdict,
};
use cutloop::budget::Exceeded;
use cutloop::diagnostic::Diagnostic;
use cutloop::network::CancellationClass;

use crate::bench::{Bench, Maker, function, plain_order, report};

fn cancellation(make: &mut Maker, class: CancellationClass, factor: &str) -> Cancellation {
    Cancellation {
        class,
        factor: make.polynomial(factor),
        degree: 1,
        multiplicity: 1,
        hides: None,
        parts: Vec::new(),
        static_set: Vec::new(),
        because: Vec::new(),
        also_because: Vec::new(),
        conditions: Vec::new(),
        factored: true,
    }
}

pub(crate) fn hidden_mode() -> Bench {
    let mut make = Maker::new(
        "Sensor filter (invented)",
        "\nderive H = voltage(out) / Vs\n",
    );
    make.question("H", "voltage(out) / Vs");
    let reactive = make.parts(&["C1", "C2", "C3", "C4", "C5", "C6"]);
    let resistors = make.parts(&["R1", "R2", "R3", "Rlow"]);
    let source = make.part("Vs");
    let matched = [make.relation("R6 = R5"), make.relation("C6 = C5")];
    let also = make.relation("h2 = h1");

    let mut order = plain_order(reactive.clone());
    order.capacitor_loops = vec![vec![reactive[0], reactive[1], source]];
    order.constraints = 1;
    order.constraint_evidence = vec![ConstraintEvidence {
        names: vec!["U1".to_owned()],
        clause: "U1 holds the voltage of C6".to_owned(),
    }];
    order.network = 4;

    let formula = make.expanded(&["R2"], &["R1 + R2", "R1 R2 C1 + R1 R2 C2"]);
    let mut result = function("H", formula, 1, 4);
    let mut structural = cancellation(&mut make, CancellationClass::Structural, "1 + R3 C3 s");
    structural.hides = Some(Hides::NotSeen);
    structural.parts = vec!["C3".to_owned(), "R3".to_owned()];
    let mut by_match = cancellation(&mut make, CancellationClass::Matched, "1 + R5 C5 s");
    by_match.hides = Some(Hides::NotDriven);
    by_match.because = matched.to_vec();
    by_match.also_because = vec![vec![also]];
    let mut by_chance = cancellation(&mut make, CancellationClass::Coincidental, "1 + R7 C7 s");
    by_chance.conditions = vec![make.polynomial("R1 C1 + -1 R2 C2")];
    let mut power_of_s = cancellation(&mut make, CancellationClass::Structural, "s");
    power_of_s.static_set = vec!["C1".to_owned(), "C2".to_owned()];
    power_of_s.hides = Some(Hides::Both);
    result.cancellations = Some(vec![structural, power_of_s, by_match, by_chance]);
    result.no_effect = vec![NoEffect {
        element: resistors[3],
        reason: Some("its node is held by U1".to_owned()),
    }];
    result.drops_when = vec![Drop {
        condition: make.polynomial("R1 R2 C1 + R1 R2 C2"),
        possible: Verdict::No,
        example: Vec::new(),
    }];
    result.nominals_missing = vec!["R3".to_owned(), "C3".to_owned()];
    make.bench(report(order, vec![result]))
}

pub(crate) fn static_modes() -> Bench {
    let mut make = Maker::new("Two traps (invented)", "derive Z = impedance(in)");
    make.question("Z", "impedance(in)");
    let parts = make.parts(&["C1", "C2", "L1", "L2", "L3"]);
    let mut order = plain_order(parts.clone());
    order.device_states = 1;
    order.device_state_relations = vec![make.relation("A = A0/(1 + s*T)")];
    order.inductor_cutsets = vec![vec![parts[2], parts[3], parts[4]]];
    order.network = 5;
    order.static_modes = 3;
    order.integrators = 1;
    order.static_sets = vec![
        StaticSet {
            stored: Stored::Charge,
            members: vec![parts[0], parts[1]],
        },
        StaticSet {
            stored: Stored::Flux,
            members: vec![parts[2], parts[3]],
        },
    ];
    let formula = make.expanded(&["0", "L1"], &["1"]);
    let mut result = function("Z", formula, 0, 5);
    result.numerator_order = 1;
    result.cancellations = Some(Vec::new());
    let example = [("k", 3_i64)]
        .map(|(name, value)| (make.builder.symbols().intern(name), Rational::from(value)));
    result.drops_when = vec![
        Drop {
            condition: make.polynomial("3 + -1 k"),
            possible: Verdict::Yes,
            example: example.to_vec(),
        },
        Drop {
            condition: make.polynomial("a^2 + -1 b"),
            possible: Verdict::Undecided,
            example: Vec::new(),
        },
    ];
    result.relied_on = vec!["A0 > 1".to_owned(), "k > 0".to_owned()];
    make.bench(report(order, vec![result]))
}

/// A made-up fraction of `degree` with some `terms` in each coefficient.
pub(crate) fn ladder(terms: usize, degree: usize) -> Bench {
    let mut make = Maker::new("Ladder (invented)", "derive H = voltage(out) / Vs");
    make.question("H", "voltage(out) / Vs");
    let coefficient = |power: usize| -> String {
        let count = if power == 0 {
            1
        } else {
            terms.div_ceil(degree) + power
        };
        let list: Vec<String> = (0..count)
            .map(|index| {
                let product: Vec<String> = (0..power)
                    .map(|step| {
                        let number = (index + 3 * step + index * step) % 11 + 1;
                        format!("R{number} C{}", (number + step) % 11 + 1)
                    })
                    .collect();
                format!("1 {}", product.join(" "))
            })
            .collect();
        list.join(" + ")
    };
    let degree = degree.min(9);
    let powers = if terms < 10 { 4 } else { degree };
    let denominator: Vec<String> = (0..=powers).map(coefficient).collect();
    let denominator: Vec<&str> = denominator.iter().map(String::as_str).collect();
    let formula = make.expanded(&["1", "-1 R1 C1"], &denominator);
    let powers = u32::try_from(powers).expect("small");
    let result = function("H", formula, powers, powers);
    make.bench(report(plain_order(Vec::new()), vec![result]))
}

/// A denominator of more than 500 terms that is a short product.
pub(crate) fn product() -> Bench {
    let mut make = Maker::new("Product (invented)", "derive H = voltage(out) / Vs");
    make.question("H", "voltage(out) / Vs");
    for letter in ["R", "C", "L"] {
        for number in 1..=8 {
            make.part(&format!("{letter}{number}"));
        }
    }
    let mut sum = |letter: &str| {
        let list: Vec<String> = (1..=8).map(|number| format!("{letter}{number}")).collect();
        make.polynomial(&list.join(" + "))
    };
    let (resistors, capacitors, inductors) = (sum("R"), sum("C"), sum("L"));
    let formula = Formula::Expanded(Expanded {
        numerator: vec![Polynomial::one()],
        denominator: vec![
            Polynomial::one(),
            &(&resistors * &capacitors) * &inductors,
            &inductors * &capacitors,
        ],
    });
    let result = function("H", formula, 2, 2);
    make.bench(report(plain_order(Vec::new()), vec![result]))
}

pub(crate) fn shared() -> Bench {
    let mut make = Maker::new("Long chain (invented)", "derive H = voltage(out) / Vs");
    make.question("H", "voltage(out) / Vs");
    let names = ["x1", "x2"].map(str::to_owned).to_vec();
    let definitions = vec![
        (
            make.builder.symbols().fresh("x1"),
            make.polynomial("1 + R1 C1 s"),
        ),
        (
            make.builder.symbols().fresh("x2"),
            make.polynomial("R2 C2 s + R1 C2 s"),
        ),
    ];
    let (first, second) = (definitions[0].0, definitions[1].0);
    let product = Polynomial::symbol(first) * Polynomial::symbol(second);
    let formula = Formula::Nested(Nested {
        numerator: make.polynomial("R1 C1 s"),
        denominator: product + Polynomial::one(),
        definitions,
        names,
        terms: (Integer::from(1_i64), Integer::from(1_234_567_i64)),
        common_degree: 1,
    });
    let result = function("H", formula, 2, 3);
    make.bench(report(plain_order(Vec::new()), vec![result]))
}

pub(crate) fn over_budget() -> Bench {
    let mut make = Maker::new("Grid (invented)", "derive H = voltage(out) / Vs");
    make.question("H", "voltage(out) / Vs");
    let formula = Formula::OverBudget(Exceeded::Terms(200_000));
    let mut result = function("H", formula, 36, 36);
    result.checked_points = 0;
    make.bench(report(plain_order(Vec::new()), vec![result]))
}

pub(crate) fn constant() -> Bench {
    let mut make = Maker::new("Divider (invented)", "derive K = voltage(out) / Vs");
    make.question("K", "voltage(out) / Vs");
    let formula = make.expanded(&["-1 R2"], &["R1 + R2"]);
    let result = function("K", formula, 0, 0);
    make.bench(report(plain_order(Vec::new()), vec![result]))
}

pub(crate) fn claims() -> Bench {
    let text =
        "derive H = voltage(out) / Vs\nclaim order(H) = 1\nclaim dc(H) = 1/2\n  claim stable(H)\n";
    let mut make = Maker::new("Claims (invented)", text);
    make.question("H", "voltage(out) / Vs");
    for text in ["order(H) = 1", "dc(H) = 1/2", "stable(H)"] {
        make.claim(text);
    }
    let formula = |make: &mut Maker, above: &str, below: &str| {
        Some((make.polynomial(above), make.polynomial(below)))
    };
    let finding = |label: &str, text: Option<&str>, formula| Finding {
        label: label.to_owned(),
        text: text.map(str::to_owned),
        formula,
        as_product: label == "difference",
    };
    let found = vec![
        finding("claimed", None, formula(&mut make, "1", "2")),
        finding("found", None, formula(&mut make, "R2", "R1 + R2")),
        finding(
            "difference",
            None,
            formula(&mut make, "R1 + -1 R2", "2 R1 + 2 R2"),
        ),
        finding(
            "values",
            Some("R1 = 1, R2 = 2: claimed 1/2, found 2/3"),
            None,
        ),
    ];
    let claim = |claim, holds, findings| ClaimReport {
        claim,
        holds,
        findings,
        relied_on: Vec::new(),
    };
    let mut reports = report(plain_order(Vec::new()), Vec::new());
    reports.claims = vec![
        claim(0, Verdict::Yes, Vec::new()),
        claim(1, Verdict::No, found),
        claim(2, Verdict::Undecided, Vec::new()),
    ];
    reports.claims[0].relied_on = vec!["R1 > 0".to_owned()];
    let place = make.place("claim dc(H)");
    reports.warnings =
        vec![Diagnostic::warning(place, "stable at the terminals only").help("say more")];
    make.bench(reports)
}
