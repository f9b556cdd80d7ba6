//! Reductions: series–parallel networks whole, and cases worked by hand.

use cutloop::analysis::answer;
use cutloop::analysis::equivalent::{Reduction, Rule, Tree, proof::same, reduce};
use cutloop::analysis::report::{Report, Verdict, Wanted};
use cutloop::budget::Budget;
use cutloop::language::{ReadOptions, read};
use cutloop::network::Network;
use cutloop::render::netlist::{Netlist, netlist};
use cutloop::source::Sources;

fn solved(text: &str) -> (Network, Report) {
    let mut sources = Sources::new();
    let main = sources.add("case", text);
    let load = |_: &str, _: &str| Err("none".to_owned());
    let options = ReadOptions {
        set: &[],
        load: &load,
    };
    let reading = read(&mut sources, main, &options);
    let network = reading
        .network
        .unwrap_or_else(|| panic!("{:?}\n{text}", reading.diagnostics));
    let report = answer(&network, &wanted(), &Budget::default())
        .unwrap_or_else(|failure| panic!("{failure:?}\n{text}"));
    (network, report)
}

fn wanted() -> Wanted {
    Wanted {
        formulas: true,
        ..Wanted::default()
    }
}

/// Reduces, prints, reads again and proves.
fn proven(text: &str, star_delta: bool) -> (Network, Reduction, Netlist) {
    let (network, report) = solved(text);
    let reduction = reduce(&network, &wanted(), star_delta);
    let written = netlist(&network, &reduction);
    assert!(written.missing.is_empty(), "{:?}", written.missing);
    let (again, second) = solved(&written.text);
    let verdict = same(
        (&network, &report),
        (&again, &second),
        &|name| written.spelled(name),
        &Budget::default(),
    );
    assert_eq!(verdict, Verdict::Yes, "{text}\n{}", written.text);
    (network, reduction, written)
}

fn rules(reduction: &Reduction) -> Vec<Rule> {
    reduction.steps.iter().map(|step| step.rule).collect()
}

struct Random(u64);

impl Random {
    fn below(&mut self, limit: u64) -> u64 {
        self.0 = self
            .0
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1);
        (self.0 >> 33) % limit
    }
}

/// A random series–parallel one-port between `a` and ground, its parts of the classes given, in
/// scattered order.
fn one_port(random: &mut Random, letters: &[&str], parts: usize) -> String {
    let mut open = vec![("a".to_owned(), "ground".to_owned())];
    let mut count = 0;
    while open.len() < parts {
        let index = random.below(open.len() as u64) as usize;
        let (from, to) = open[index].clone();
        if random.below(2) == 0 {
            open.push((from, to));
        } else {
            count += 1;
            let middle = format!("n{count}");
            open[index].1.clone_from(&middle);
            open.push((middle, to));
        }
    }
    let mut lines = Vec::new();
    for (number, (from, to)) in open.iter().enumerate() {
        let letter = letters[random.below(letters.len() as u64) as usize];
        lines.push(format!("{from} -{letter}{number}- {to}\n"));
    }
    for index in 0..lines.len() {
        let other = random.below(lines.len() as u64) as usize;
        lines.swap(index, other);
    }
    lines.concat() + "derive Z = impedance(a)\n"
}

#[test]
fn a_series_parallel_one_port_of_one_class_becomes_one_part() {
    let mut random = Random(7);
    for trial in 0..120 {
        let letter = [["R"], ["C"], ["L"]][trial % 3];
        let parts = 2 + random.below(9) as usize;
        let text = one_port(&mut random, &letter, parts);
        let (_, reduction, written) = proven(&text, false);
        let edges: Vec<_> = reduction.circuit.living().collect();
        assert_eq!(edges.len(), 1, "{text}\n{}", written.text);
        let tree = &reduction.circuit.trees[edges[0].tree];
        assert!(matches!(tree, Tree::Part(_)), "{text}\n{}", written.text);
    }
}

#[test]
fn a_series_parallel_one_port_of_many_classes_keeps_no_two_alike_side_by_side() {
    let mut random = Random(8);
    for _ in 0..60 {
        let parts = 2 + random.below(8) as usize;
        let text = one_port(&mut random, &["R", "C", "L"], parts);
        let (_, reduction, _) = proven(&text, false);
        let edges: Vec<_> = reduction.circuit.living().collect();
        assert_eq!(edges.len(), 1, "{text}");
        let circuit = &reduction.circuit;
        let mut waiting = vec![edges[0].tree];
        while let Some(tree) = waiting.pop() {
            let (items, series) = match &circuit.trees[tree] {
                Tree::Part(_) => continue,
                Tree::Series { items, .. } => (items, true),
                Tree::Parallel(items) => (items, false),
            };
            let mut classes = Vec::new();
            for &item in items {
                match &circuit.trees[item] {
                    Tree::Part(part) => classes.push(circuit.parts[*part].class),
                    Tree::Series { .. } => assert!(!series, "strings within strings\n{text}"),
                    Tree::Parallel(_) => assert!(series, "bundles within bundles\n{text}"),
                }
            }
            let all = classes.len();
            classes.sort();
            classes.dedup();
            assert_eq!(classes.len(), all, "{text}");
            waiting.extend(items);
        }
    }
}

#[test]
fn a_deep_one_port_needs_no_stack() {
    let sections = 20_000;
    let mut text = String::from("a -R0- n0\n");
    for k in 0..sections {
        text.push_str(&format!("n{k} -C{k}- ground\nn{k} -L{k}- n{}\n", k + 1));
    }
    text.push_str(&format!(
        "n{sections} -Rz- ground\nderive Z = impedance(a)\n"
    ));
    let mut sources = Sources::new();
    let main = sources.add("case", text);
    let load = |_: &str, _: &str| Err("none".to_owned());
    let options = ReadOptions {
        set: &[],
        load: &load,
    };
    let network = read(&mut sources, main, &options).network.unwrap();
    let reduction = reduce(&network, &wanted(), false);
    assert_eq!(reduction.circuit.living().count(), 1);
    assert!(netlist(&network, &reduction).text.lines().count() > sections);
}

/// Values in series and in parallel: IEC 60050-131 (inductances and resistances add in series,
/// capacitances in parallel).
#[test]
fn a_string_with_its_order_changed() {
    let text =
        "in -Vs- ground; in -C1- x -R1- y -C2- out; out -R2- ground; derive H = voltage(out)/Vs";
    let (_, reduction, written) = proven(text, false);
    assert_eq!(rules(&reduction), [Rule::Exchange]);
    assert!(
        written.text.contains("Ceq1 = C1 || C2\n"),
        "{}",
        written.text
    );
}

#[test]
fn what_is_asked_sensed_taken_out_or_coupled_stays() {
    for text in [
        "in -Vs- ground; in -R1- x -R2- ground; derive I = current(R1)/Vs",
        "in -Vs- ground; in -R1- x -R2- ground; derive H = voltage(x)/Vs",
        "in -Vs- ground; in -R1- x -R2- ground; derive H = voltage(R2)/Vs",
        "in -Vs- ground; in -R1- x -R2- y -R3- ground; I1 = b*current(R2); ground -I1- out -R4- ground; free b; derive H = voltage(out)/Vs; derive Z = impedance(x) without R3",
        "in -Vs- ground; in -R1- ground; derive Z = impedance(in) without Vs",
        "in -Vs- ground; in -L1- ground; out -L2- x -R9- ground; out -R1- ground; T1 is coupling of L1, L2 with k = k12; free k12; derive H = voltage(out)/Vs; derive F = voltage(x)/Vs",
    ] {
        let (_, reduction, _) = proven(text, false);
        assert_eq!(rules(&reduction), [], "{text}");
    }
}

#[test]
fn idle_parts_go() {
    for (text, rule) in [
        (
            "in -Vs- ground; in -R1- out -C1- ground; out -R2- q; derive H = voltage(out)/Vs",
            Rule::NoCurrent,
        ),
        (
            "in -Vs- ground; in -R1- out -C1- ground; out -R2- out; derive H = voltage(out)/Vs",
            Rule::NoVoltage,
        ),
        (
            "in -Vs- ground; in -R1- out -C1- ground; in -C2- ground; derive H = voltage(out)/Vs",
            Rule::Held,
        ),
        (
            "ground -Is- in; in -R1- out; out -C1- ground; derive H = voltage(out)/Is",
            Rule::Driven,
        ),
        (
            "in -Vs- ground; in -R1- m -R2- out; m -R3- p; p -- ground; out -R4- ground; U1 is opamp(+ ground, - m, out out); derive H = voltage(out)/Vs",
            Rule::NoVoltage,
        ),
    ] {
        let (_, reduction, _) = proven(text, false);
        assert!(
            rules(&reduction).contains(&rule),
            "{text}: {:?}",
            rules(&reduction)
        );
    }
}

/// Star and triangle: A. E. Kennelly, "The equivalence of triangles and three-pointed stars in
/// conducting networks", Electrical World and Engineer 34 (1899); the formula from memory.
#[test]
fn a_bridge_falls_to_one_part_by_a_triangle() {
    for letter in ["R", "C", "L"] {
        let bridge =
            "a -R1- x -R2- ground; a -R3- y -R4- ground; x -R5- y; derive Z = impedance(a)"
                .replace("-R", &format!("-{letter}"));
        let (_, stays, _) = proven(&bridge, false);
        assert_eq!(rules(&stays), []);
        let (_, reduction, _) = proven(&bridge, true);
        assert!(rules(&reduction).contains(&Rule::StarDelta));
        assert_eq!(reduction.circuit.living().count(), 1);
    }
}

#[test]
fn a_name_in_use_is_not_taken() {
    let text = "free Req1; in -Vs- ground; in -R1- x -R2- out -C1- ground; derive H = voltage(out)/Vs*Req1";
    let text = text.replace("/Vs*Req1", "/Vs; derive F = H*Req1");
    let (_, _, written) = proven(&text, false);
    assert!(
        written.text.contains("Req2 = R1 + R2\n"),
        "{}",
        written.text
    );
}
