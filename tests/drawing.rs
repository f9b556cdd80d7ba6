//! Geometry of drawings: nothing overlaps, every net hangs together, every part is there.

use std::collections::BTreeSet;
use std::fs;

use cutloop::analysis::report::NetworkOrder;
use cutloop::drawing::{Drawing, Wire, draw};
use cutloop::language::{self, ReadOptions};
use cutloop::network::{Network, NodeId};
use cutloop::render::svg;
use cutloop::source::Sources;

type Point = (i32, i32);

fn network(name: &str, text: &str) -> Network {
    let mut sources = Sources::new();
    let source = sources.add(name, text.to_owned());
    let load = |_: &str, path: &str| {
        let file = format!("examples/{path}");
        let text = fs::read_to_string(&file).map_err(|error| error.to_string())?;
        Ok((file, text))
    };
    let options = ReadOptions {
        set: &[],
        load: &load,
    };
    let reading = language::read(&mut sources, source, &options);
    let messages = reading.diagnostics;
    reading
        .network
        .unwrap_or_else(|| panic!("{name}: {messages:?}\n{text}"))
}

fn no_order() -> NetworkOrder {
    NetworkOrder {
        reactive: Vec::new(),
        device_states: 0,
        device_state_relations: Vec::new(),
        capacitor_loops: Vec::new(),
        inductor_cutsets: Vec::new(),
        constraints: 0,
        constraint_evidence: Vec::new(),
        network: 0,
        static_modes: 0,
        static_sets: Vec::new(),
        integrators: 0,
    }
}

/// Whether the insides of two boxes meet.
fn meet(a: (Point, Point), b: (Point, Point)) -> bool {
    a.0.0 < b.1.0 && b.0.0 < a.1.0 && a.0.1 < b.1.1 && b.0.1 < a.1.1
}

fn span(wire: &Wire) -> (Point, Point) {
    let (a, b) = (wire.from, wire.to);
    ((a.0.min(b.0), a.1.min(b.1)), (a.0.max(b.0), a.1.max(b.1)))
}

/// Whether the points of two closed boxes meet.
fn touch(a: (Point, Point), b: (Point, Point)) -> bool {
    a.0.0 <= b.1.0 && b.0.0 <= a.1.0 && a.0.1 <= b.1.1 && b.0.1 <= a.1.1
}

/// What is wrong with a drawing.
fn faults(network: &Network, drawing: &Drawing) -> Vec<String> {
    let mut list = Vec::new();
    let drawn: BTreeSet<usize> = drawing
        .symbols
        .iter()
        .flat_map(|symbol| symbol.elements.iter().map(|id| id.index()))
        .collect();
    if drawn.len() != network.elements().len() {
        list.push("a part is missing".to_owned());
    }
    for (index, label) in drawing.labels.iter().enumerate() {
        for other in &drawing.labels[..index] {
            if meet(label.space(), other.space()) {
                list.push(format!("labels {} and {} overlap", label.text, other.text));
            }
        }
        for symbol in &drawing.symbols {
            if meet(label.space(), (symbol.low, symbol.high)) {
                list.push(format!("label {} lies on {}", label.text, symbol.name));
            }
        }
        for wire in &drawing.wires {
            if meet(label.space(), span(wire)) {
                list.push(format!("a wire runs through label {}", label.text));
            }
        }
    }
    for (index, symbol) in drawing.symbols.iter().enumerate() {
        for other in &drawing.symbols[..index] {
            if meet((symbol.low, symbol.high), (other.low, other.high)) {
                list.push(format!("{} lies on {}", symbol.name, other.name));
            }
        }
        for wire in &drawing.wires {
            if meet((symbol.low, symbol.high), span(wire)) {
                list.push(format!("a wire runs through {}", symbol.name));
            }
        }
    }
    for (index, wire) in drawing.wires.iter().enumerate() {
        if wire.from.0 != wire.to.0 && wire.from.1 != wire.to.1 {
            list.push("a wire is slanted".to_owned());
        }
        for other in &drawing.wires[..index] {
            let crossing = is_level(wire) != is_level(other) && !ends_on(wire, other);
            if wire.node != other.node && touch(span(wire), span(other)) && !crossing {
                list.push(format!("wires of two nodes touch at {:?}", wire.from));
            }
        }
    }
    list.extend(loose(drawing));
    list
}

fn is_level(wire: &Wire) -> bool {
    wire.from.1 == wire.to.1
}

/// Whether an end of one wire lies on the other.
fn ends_on(a: &Wire, b: &Wire) -> bool {
    let on = |point: Point, wire: &Wire| touch((point, point), span(wire));
    on(a.from, b) || on(a.to, b) || on(b.from, a) || on(b.to, a)
}

/// Nodes whose wires and pins do not hang together; ground hangs together by its marks.
fn loose(drawing: &Drawing) -> Vec<String> {
    let mut list = Vec::new();
    let pins = || drawing.symbols.iter().flat_map(|symbol| &symbol.pins);
    let nodes: BTreeSet<NodeId> = pins().map(|pin| pin.1).collect();
    for node in nodes {
        let wires: Vec<&Wire> = drawing.wires.iter().filter(|it| it.node == node).collect();
        let mut points: Vec<Point> = pins().filter(|it| it.1 == node).map(|it| it.0).collect();
        points.sort_unstable();
        points.dedup();
        let ground = node == NodeId::GROUND;
        let mut reached: Vec<bool> = wires
            .iter()
            .map(|wire| {
                let mark = |at: &Point| *at == wire.from || *at == wire.to;
                ground && drawing.grounds.iter().any(mark)
            })
            .collect();
        if !ground && let Some(first) = reached.first_mut() {
            *first = true;
        }
        for _ in 0..wires.len() {
            for index in 0..wires.len() {
                let joined = (0..wires.len())
                    .any(|other| reached[other] && ends_on(wires[index], wires[other]));
                reached[index] |= joined;
            }
        }
        let alone = points.len() < 2 && !ground;
        let met = points
            .iter()
            .all(|point| wires.iter().any(|wire| touch((*point, *point), span(wire))));
        if reached.contains(&false) || !(alone || met) {
            list.push(format!("node {} does not hang together", node.index()));
        }
    }
    list
}

fn sound(name: &str, text: &str) {
    let network = network(name, text);
    if let Ok(drawing) = draw(&network, &no_order()) {
        let found = faults(&network, &drawing);
        assert!(found.is_empty(), "{name}: {found:#?}\n{text}");
        assert_eq!(
            svg::drawing(&drawing),
            svg::drawing(&draw(&network, &no_order()).unwrap())
        );
    }
}

#[test]
fn every_example_is_drawn_without_overlap() {
    let mut files: Vec<_> = fs::read_dir("examples")
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|it| it == "cutloop"))
        .collect();
    files.sort();
    assert!(files.len() > 20);
    for file in files {
        let text = fs::read_to_string(&file).unwrap();
        sound(file.to_str().unwrap(), &text);
    }
}

#[test]
fn five_hundred_random_networks_are_drawn_without_overlap() {
    let mut state = 0x00c0_ffee_u64;
    let mut roll = |sides: u64| {
        state = state
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        (state >> 33) % sides
    };
    for trial in 0..500 {
        let mut text = String::from("n1 -Vs- ground\n");
        let nodes = 2 + roll(7);
        let parts = nodes + roll(12);
        for part in 1..=parts {
            let kind = ["R", "C", "L"][usize::try_from(roll(3)).unwrap()];
            let from = if part < nodes { part } else { 1 + roll(nodes) };
            let to = if part < nodes {
                part + 1
            } else {
                roll(nodes + 1)
            };
            let name = |node| {
                if node == 0 {
                    "ground".to_owned()
                } else {
                    format!("n{node}")
                }
            };
            let value = ["", "(10)", "group"][usize::try_from(roll(3)).unwrap()];
            let one = format!("{kind}{part}");
            let group = match value {
                "" => one,
                "(10)" if kind == "R" => format!("{one}(4k7)"),
                _ => format!("({one} || RS{part} + LS{part})"),
            };
            text += &format!("{} -{group}- {}\n", name(from), name(to));
        }
        text += &format!("n{nodes} -RL- ground\n");
        if roll(3) == 0 {
            let (a, b) = (1 + roll(nodes), roll(nodes + 1));
            let b = if b == 0 {
                "ground".to_owned()
            } else {
                format!("n{b}")
            };
            text += &format!(
                "U1 is opamp(+ n{a}, - {b}, out x) with gain = A\nfree A\nx -RX- n{nodes}\n"
            );
            text += "Q1 is bjt(b x, c n1, e ground)\n";
        }
        text += &format!("derive H = voltage(n{nodes})/Vs\n");
        sound(&format!("trial {trial}"), &text);
    }
}

#[test]
fn a_divider_in_svg() {
    let network = network(
        "divider",
        "in -Vs- ground; in -R1(10k)- out -C1- ground; derive H = voltage(out)/Vs",
    );
    let drawing = draw(&network, &no_order()).unwrap();
    insta::assert_snapshot!(svg::drawing(&drawing));
}

#[test]
fn too_many_parts_are_counted() {
    let text = "in -Vs- ground\nfor k = 1 .. 50\nn{k} -R{k}- ground\nn{k} -C{k}- in\nend";
    assert_eq!(draw(&network("wide", text), &no_order()).unwrap_err(), 101);
}

#[test]
fn the_checks_find_a_moved_label_a_cut_net_and_a_bridge() {
    let text =
        "in -Vs- ground; in -R1(10k)- out -C1- ground; in -R2- out; derive H = voltage(out)/Vs";
    let network = network("divider", text);
    let whole = draw(&network, &no_order()).unwrap();
    assert!(faults(&network, &whole).is_empty());
    let mut moved = whole.clone();
    let first = &moved.symbols[0];
    moved.labels[0].at = (
        (first.low.0 + first.high.0) / 2,
        (first.low.1 + first.high.1) / 2,
    );
    assert!(!faults(&network, &moved).is_empty());
    for index in 0..whole.wires.len() {
        let mut cut = whole.clone();
        cut.wires.remove(index);
        assert!(
            !faults(&network, &cut).is_empty(),
            "wire {index} is not missed"
        );
    }
    let mut bridged = whole.clone();
    let (a, b) = (whole.symbols[0].pins[0], whole.symbols[0].pins[1]);
    bridged.wires.push(Wire {
        from: a.0,
        to: b.0,
        node: a.1,
        tint: None,
    });
    assert!(!faults(&network, &bridged).is_empty());
    let mut lost = whole.clone();
    lost.symbols.pop();
    assert!(!faults(&network, &lost).is_empty());
}
