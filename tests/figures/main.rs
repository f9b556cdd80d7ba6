//! Poles, zeros, residues and slow tails against SciPy; what breaks a cancellation against roots found
//! anew. `figures.json` beside this file was made by `make.py` there.

use std::collections::BTreeMap;

use cutloop::analysis::report::{Report, Wanted};
use cutloop::budget::Budget;
use cutloop::language::{self, ReadOptions};
use cutloop::network::Network;
use cutloop::numeric::{FunctionFigures, figures};
use cutloop::source::Sources;
use nalgebra::Complex;
use serde_json::Value;

/// Doubles through a general polynomial solver keep some ten digits.
const CLOSE: f64 = 1e-8;

fn answered(text: &str) -> (Network, Report) {
    let mut sources = Sources::new();
    let source = sources.add("figures", text);
    let options = ReadOptions {
        set: &[],
        load: &|_, _| Err("no other files".to_owned()),
    };
    let reading = language::read(&mut sources, source, &options);
    let network = reading.network.unwrap_or_else(|| panic!("{text}"));
    let wanted = Wanted {
        formulas: true,
        cancellations: true,
        figures: true,
        ..Wanted::default()
    };
    let report = cutloop::analysis::answer(&network, &wanted, &Budget::default());
    (network, report.expect("an answer"))
}

/// The figures of the only function.
fn figures_of(text: &str) -> FunctionFigures {
    let (network, report) = answered(text);
    let mut all = figures(&network, &report, &Budget::default()).expect("within the budget");
    all.remove(0)
}

/// A case of `figures.json`.
struct Case {
    name: String,
    netlist: String,
    last: f64,
    poles: Vec<Complex<f64>>,
    residues: Vec<Complex<f64>>,
    zeros: Vec<Complex<f64>>,
}

fn cases() -> Vec<Case> {
    let text = include_str!("figures.json");
    let all: Value = serde_json::from_str(text).expect("figures.json");
    let places = |list: &Value| {
        let number = |value: &Value| value.as_f64().expect("a number");
        let list = list.as_array().expect("a list").iter();
        list.map(|it| Complex::new(number(&it[0]), number(&it[1])))
            .collect()
    };
    let of = |case: &Value| Case {
        name: case["name"].as_str().expect("a name").to_owned(),
        netlist: case["netlist"].as_str().expect("a netlist").to_owned(),
        last: case["final"].as_f64().expect("a number"),
        poles: places(&case["poles"]),
        residues: places(&case["residues"]),
        zeros: places(&case["zeros"]),
    };
    let all = all["cases"].as_array().expect("cases").iter();
    all.map(of).collect()
}

fn same(found: Complex<f64>, expected: Complex<f64>, scale: f64) -> bool {
    (found - expected).norm() <= CLOSE * scale
}

fn nearest(places: &[Complex<f64>], to: Complex<f64>) -> usize {
    let distance = |index: &usize| (places[*index] - to).norm();
    (0..places.len())
        .min_by(|a, b| distance(a).total_cmp(&distance(b)))
        .expect("some")
}

#[test]
fn poles_zeros_and_residues_are_those_of_scipy() {
    for case in cases() {
        let name = &case.name;
        let quotient = figures_of(&case.netlist).quotient.expect("nominals");
        assert_eq!(quotient.poles.len(), case.poles.len(), "{name}");
        assert_eq!(quotient.zeros.len(), case.zeros.len(), "{name}");
        let last = quotient.final_value().expect("it settles");
        assert!((last / case.last - 1.0).abs() < CLOSE, "{name}");
        for pole in &quotient.poles {
            let place = pole.centre.to_f64();
            let index = nearest(&case.poles, place);
            assert!(
                same(place, case.poles[index], place.norm()),
                "{name}: {place}"
            );
            let residue = quotient.residue(pole).expect("a simple pole");
            // A residue beside a zero keeps fewer digits in doubles.
            let scale = residue.norm().max(1e-6 * place.norm());
            assert!(
                same(residue, case.residues[index], scale),
                "{name}: {residue}"
            );
        }
        for zero in &quotient.zeros {
            let place = zero.centre.to_f64();
            let index = nearest(&case.zeros, place);
            assert!(
                same(place, case.zeros[index], place.norm()),
                "{name}: {place}"
            );
        }
    }
}

#[test]
fn near_pairs_and_their_tails() {
    // How many pairs, with the conjugate ones: those whose distance is within the stated tolerances.
    let expected = BTreeMap::from([
        ("compensated_divider_off_by_little", 1),
        ("two_sections_of_nearly_one_time_constant", 1),
        ("ladder_of_three", 0),
        ("supply_filter_with_a_slow_branch", 1),
        ("resonance_with_a_trap_beside_it", 2),
        ("series_resonance", 0),
        ("bridged_branch", 0),
        ("three_branches_of_a_slow_capacitor", 2),
    ]);
    for case in cases() {
        let name = case.name.as_str();
        let near = figures_of(&case.netlist).near;
        assert_eq!(near.len(), expected[name], "{name}");
        for pair in &near {
            let pole = nearest(&case.poles, pair.pole);
            let zero = nearest(&case.zeros, pair.pole);
            let distance = (case.poles[pole] - case.zeros[zero]).norm();
            assert!(
                (pair.distance - distance).abs() < CLOSE * pair.pole.norm(),
                "{name}"
            );
            let tail = pair.tail.expect("a stable simple pole");
            let sides = if pair.pole.im == 0.0 { 1.0 } else { 2.0 };
            let size = sides * (case.residues[pole] / case.poles[pole]).norm() / case.last.abs();
            let found = tail.of_final.expect("a final value");
            assert!((found - size).abs() < 1e-6 * size, "{name}: {found} {size}");
            let time = -1.0 / case.poles[pole].re;
            assert!((tail.time_constant / time - 1.0).abs() < CLOSE, "{name}");
        }
    }
}

/// A network whose cancellation one part breaks: the text with `DRIFT` where the part's value stands.
struct Broken {
    whole: &'static str,
    part: &'static str,
    /// The same without the relation, `{}` for the value of the part.
    open: fn(f64) -> String,
    value: f64,
}

fn broken() -> Vec<Broken> {
    let divider = "tip -Vs- ground\ntip -(R1 || C1)- out -(R2 || C2)- ground\nR1 : 9M\nR2 : 1M\n\
                   C2 : 120p\nC1 = R2*C2/R1\nderive H = voltage(out)/Vs\n";
    let lucky = "in -Vs- ground\nin -(R1 || C1)- a -R2- ground\nU1 is buffer(in a, out b)\n\
                 b -R3- out -C3- ground\nR1 : 10k\nC1 : 10n\nR2 : 1k\nR3 : 1k\nC3 : 100n\n\
                 derive H = voltage(out)/Vs\n";
    vec![
        Broken {
            whole: divider,
            part: "C1",
            open: |value| {
                format!(
                    "tip -Vs- ground\ntip -(R1 || C1)- out -(R2 || C2)- ground\nR1 : 9M\nR2 : 1M\n\
                     C2 : 120p\nC1 : {value:e}\nderive H = voltage(out)/Vs\n"
                )
            },
            value: 120e-12 / 9.0,
        },
        Broken {
            whole: divider,
            part: "R2",
            open: |value| {
                format!(
                    "tip -Vs- ground\ntip -(R1 || C1)- out -(R2 || C2)- ground\nR1 : 9M\n\
                     R2 : {value:e}\nC2 : 120p\nC1 : {:e}\nderive H = voltage(out)/Vs\n",
                    120e-12 / 9.0
                )
            },
            value: 1e6,
        },
        Broken {
            whole: lucky,
            part: "C3",
            open: |value| {
                format!(
                    "in -Vs- ground\nin -(R1 || C1)- a -R2- ground\nU1 is buffer(in a, out b)\n\
                     b -R3- out -C3- ground\nR1 : 10k\nC1 : 10n\nR2 : 1k\nR3 : 1k\n\
                     C3 : {value:e}\nderive H = voltage(out)/Vs\n"
                )
            },
            value: 100e-9,
        },
    ]
}

#[test]
fn shifts_are_those_of_roots_found_anew() {
    const STEP: f64 = 1e-6;
    for case in broken() {
        let figures = figures_of(case.whole);
        let cancelled = &figures.cancelled[0];
        let mode = cancelled.modes[0].centre.to_f64();
        let drift = cancelled.drifts[0].iter().find(|it| it.part == case.part);
        let drift = drift.expect("a responsible part");
        let there = figures_of(&(case.open)(case.value * (1.0 + STEP)));
        let quotient = there.quotient.expect("nominals");
        for (roots, shift) in [(&quotient.poles, drift.pole), (&quotient.zeros, drift.zero)] {
            let places: Vec<_> = roots.iter().map(|root| root.centre.to_f64()).collect();
            let moved = places[nearest(&places, mode)] - mode;
            let expected = shift * (STEP / 0.01);
            assert!(
                (moved - expected).norm() < 1e-8 * mode.norm(),
                "{}",
                case.part
            );
            let close = (moved - expected).norm() <= 1e-4 * expected.norm();
            assert!(
                close || expected.norm() == 0.0,
                "{}: {moved} {expected}",
                case.part
            );
        }
        let tail = there.near.first().and_then(|pair| pair.tail?.of_final);
        let expected = drift.tail.expect("it settles") * (STEP / 0.01);
        let tail = tail.expect("a near pair");
        assert!(
            (tail / expected - 1.0).abs() < 1e-4,
            "{}: {tail} {expected}",
            case.part
        );
    }
}
