//! Random networks of every kind of part, written as text, read, answered, and compared with an
//! independent solution: dense nodal equations written here from the definitions of the language,
//! solved modulo a prime of their own. Values, signs, degrees and coefficients must agree.
//!
//! `CUTLOOP_TRIALS` sets the number of networks, `CUTLOOP_SEED` the first seed.

use std::collections::BTreeMap;
use std::fmt::Write as _;

use cutloop::algebra::{Fraction, Polynomial, Symbol};
use cutloop::analysis::answer;
use cutloop::analysis::equivalent::{proof::same, reduce};
use cutloop::analysis::report::{Failure, Formula, Verdict, Wanted};
use cutloop::budget::Budget;
use cutloop::language::{ReadOptions, read};
use cutloop::network::Network;
use cutloop::render::netlist::netlist;
use cutloop::source::Sources;

/// 2^62 − 57, prime.
const PRIME: u64 = (1 << 62) - 57;

fn add(a: u64, b: u64) -> u64 {
    (a + b) % PRIME
}

fn neg(a: u64) -> u64 {
    (PRIME - a) % PRIME
}

fn mul(a: u64, b: u64) -> u64 {
    (u128::from(a) * u128::from(b) % u128::from(PRIME)) as u64
}

fn power(mut a: u64, mut exponent: u64) -> u64 {
    let mut result = 1;
    while exponent > 0 {
        if exponent & 1 == 1 {
            result = mul(result, a);
        }
        a = mul(a, a);
        exponent >>= 1;
    }
    result
}

fn inverse(a: u64) -> u64 {
    power(a, PRIME - 2)
}

struct Random(u64);

impl Random {
    fn next(&mut self) -> u64 {
        self.0 ^= self.0 << 13;
        self.0 ^= self.0 >> 7;
        self.0 ^= self.0 << 17;
        self.0.wrapping_mul(0x2545_F491_4F6C_DD1D)
    }

    fn below(&mut self, limit: usize) -> usize {
        (self.next() >> 11) as usize % limit
    }

    fn chance(&mut self, percent: usize) -> bool {
        self.below(100) < percent
    }
}

/// A coefficient: a symbol, or a small number.
#[derive(Clone, Debug)]
enum Value {
    Symbol(String),
    Number(i64),
}

impl Value {
    fn text(&self) -> String {
        match self {
            Self::Symbol(name) => name.clone(),
            Self::Number(number) => number.to_string(),
        }
    }
}

/// What the language says of a part, node 0 is ground.
#[derive(Clone, Debug)]
enum Part {
    R(usize, usize, String),
    C(usize, usize, String),
    L(usize, usize, String),
    Source(usize, usize, String),
    Current(usize, usize, String),
    Meter(usize, usize, String),
    /// Output pair, voltage output?, coefficient, sensed pair or part.
    Controlled(usize, usize, bool, Value, Sensed, String),
    /// plus, minus, out, gain, rout
    Amplifier(usize, usize, usize, Option<Value>, Option<String>),
    Buffer(usize, usize),
    Nullor(usize, usize, usize, usize),
    Conveyor(usize, usize, usize, i64),
    Transformer([usize; 4], Value),
    Gyrator([usize; 4], Value),
    Transconductor(usize, usize, usize, Value),
    Diffamp([usize; 5], Value),
}

#[derive(Clone, Debug)]
enum Sensed {
    Voltage(usize, usize),
    Current(String),
}

#[derive(Debug, Default)]
struct Case {
    nodes: usize,
    parts: Vec<Part>,
    /// (coil, coil, M)
    couplings: Vec<(String, String, String)>,
    /// Tied symbol = factor · other symbol.
    relations: Vec<(String, i64, String)>,
    text: String,
    probe: (usize, usize),
}

fn node(index: usize) -> String {
    if index == 0 {
        "ground".to_owned()
    } else {
        format!("n{index}")
    }
}

fn pair(random: &mut Random, nodes: usize) -> (usize, usize) {
    let a = random.below(nodes + 1);
    let b = (a + 1 + random.below(nodes)) % (nodes + 1);
    (a, b)
}

fn value(random: &mut Random, case: &mut Case, name: &str) -> Value {
    if random.chance(30) {
        let number = random.below(3) as i64 + 1;
        return Value::Number(if random.chance(30) { -number } else { number });
    }
    let _ = writeln!(case.text, "free {name}");
    Value::Symbol(name.to_owned())
}

fn make(seed: u64) -> Case {
    let mut random = Random(seed.wrapping_mul(0x9E37_79B9_7F4A_7C15) | 1);
    for _ in 0..8 {
        random.next();
    }
    let most = if random.chance(20) { 11 } else { 5 };
    let nodes = 2 + random.below(most);
    let mut case = Case {
        nodes,
        ..Case::default()
    };
    // A tree of passive parts makes most networks solvable.
    let mut number = 0;
    let mut coils = Vec::new();
    let mut named = Vec::new();
    let mut passive = |random: &mut Random, case: &mut Case, a: usize, b: usize| {
        number += 1;
        let letter = ["R", "C", "L"][[0, 0, 1, 1, 2][random.below(5)]];
        let name = format!("{letter}{number}");
        let _ = writeln!(case.text, "{} -{name}- {}", node(a), node(b));
        named.push(name.clone());
        case.parts.push(match letter {
            "R" => Part::R(a, b, name),
            "C" => Part::C(a, b, name),
            _ => {
                coils.push(name.clone());
                Part::L(a, b, name)
            }
        });
    };
    for index in 1..=nodes {
        let other = random.below(index);
        passive(&mut random, &mut case, index, other);
    }
    for _ in 0..random.below(nodes + 2) {
        let (a, b) = pair(&mut random, nodes);
        passive(&mut random, &mut case, a, b);
    }
    let (a, b) = pair(&mut random, nodes);
    if random.chance(70) {
        let _ = writeln!(case.text, "{} -Vs- {}", node(a), node(b));
        case.parts.push(Part::Source(a, b, "Vs".to_owned()));
        named.push("Vs".to_owned());
    } else {
        let _ = writeln!(case.text, "{} -Is- {}", node(a), node(b));
        case.parts.push(Part::Current(a, b, "Is".to_owned()));
    }
    if random.chance(15) {
        let (a, b) = pair(&mut random, nodes);
        let _ = writeln!(case.text, "{} -m1- {}\nm1 is meter", node(a), node(b));
        case.parts.push(Part::Meter(a, b, "m1".to_owned()));
        named.push("m1".to_owned());
    }
    for index in 0..random.below(4) {
        active(&mut random, &mut case, index, &named);
    }
    if coils.len() >= 2 && random.chance(40) {
        let _ = writeln!(
            case.text,
            "T1 is coupling of {}, {} with M = Mx\nfree Mx",
            coils[0], coils[1]
        );
        case.couplings
            .push((coils[0].clone(), coils[1].clone(), "Mx".to_owned()));
    }
    relate(&mut random, &mut case, &named);
    case.probe = pair(&mut random, nodes);
    let source = if case.text.contains("-Vs-") {
        "Vs"
    } else {
        "Is"
    };
    let _ = writeln!(
        case.text,
        "derive H = voltage({}, {}) / {source}",
        node(case.probe.0),
        node(case.probe.1)
    );
    case
}

fn relate(random: &mut Random, case: &mut Case, named: &[String]) {
    let mut last: BTreeMap<char, String> = BTreeMap::new();
    for name in named {
        let letter = name.chars().next().unwrap_or('x');
        if !"RCL".contains(letter) {
            continue;
        }
        match last.get(&letter) {
            Some(other) if random.chance(35) => {
                let factor = random.below(3) as i64 + 1;
                let right = if factor == 1 {
                    other.clone()
                } else {
                    format!("{factor}*{other}")
                };
                let _ = writeln!(case.text, "{name} = {right}");
                case.relations.push((name.clone(), factor, other.clone()));
            }
            _ => {
                last.insert(letter, name.clone());
            }
        }
    }
}

fn active(random: &mut Random, case: &mut Case, index: usize, named: &[String]) {
    let nodes = case.nodes;
    let (a, b) = pair(random, nodes);
    let (c, d) = pair(random, nodes);
    match random.below(10) {
        0 | 1 => {
            let is_voltage = random.chance(50);
            let name = format!("{}c{index}", if is_voltage { "V" } else { "I" });
            let gain = value(random, case, &format!("g{index}"));
            let sensed = if random.chance(50) {
                Sensed::Voltage(c, d)
            } else {
                Sensed::Current(named[random.below(named.len())].clone())
            };
            let right = match &sensed {
                Sensed::Voltage(c, d) => format!("voltage({}, {})", node(*c), node(*d)),
                Sensed::Current(of) => format!("current({of})"),
            };
            let _ = writeln!(
                case.text,
                "{} -{name}- {}\n{name} = {}*{right}",
                node(a),
                node(b),
                gain.text()
            );
            case.parts
                .push(Part::Controlled(a, b, is_voltage, gain, sensed, name));
        }
        2 | 3 => {
            let out = 1 + random.below(nodes);
            let gain = random
                .chance(40)
                .then(|| value(random, case, &format!("A{index}")));
            let rout = (gain.is_some() && random.chance(40)).then(|| {
                let _ = writeln!(case.text, "free ro{index}");
                format!("ro{index}")
            });
            let mut options = Vec::new();
            if let Some(gain) = &gain {
                options.push(format!("gain = {}", gain.text()));
            }
            if let Some(rout) = &rout {
                options.push(format!("rout = {rout}"));
            }
            let with = if options.is_empty() {
                String::new()
            } else {
                format!(" with {}", options.join(", "))
            };
            let _ = writeln!(
                case.text,
                "U{index} is opamp(+ {}, - {}, out {}){with}",
                node(c),
                node(d),
                node(out)
            );
            case.parts.push(Part::Amplifier(c, d, out, gain, rout));
        }
        4 => {
            let out = 1 + random.below(nodes);
            let _ = writeln!(
                case.text,
                "B{index} is buffer(in {}, out {})",
                node(c),
                node(out)
            );
            case.parts.push(Part::Buffer(c, out));
        }
        5 => {
            let _ = writeln!(
                case.text,
                "N{index} is nullor(+ {}, - {}, p {}, q {})",
                node(c),
                node(d),
                node(a),
                node(b)
            );
            case.parts.push(Part::Nullor(c, d, a, b));
        }
        6 => {
            let z = random.below(nodes + 1);
            let polarity = if random.chance(50) { 1 } else { -1 };
            let _ = writeln!(
                case.text,
                "K{index} is conveyor(x {}, y {}, z {}) with polarity = {polarity}",
                node(c),
                node(d),
                node(z)
            );
            case.parts.push(Part::Conveyor(c, d, z, polarity));
        }
        7 => {
            let ratio = value(random, case, &format!("r{index}"));
            let _ = writeln!(
                case.text,
                "X{index} is transformer(p1 {}, p2 {}, s1 {}, s2 {}) with ratio = {}",
                node(a),
                node(b),
                node(c),
                node(d),
                ratio.text()
            );
            case.parts.push(Part::Transformer([a, b, c, d], ratio));
        }
        8 => {
            let g = value(random, case, &format!("y{index}"));
            let _ = writeln!(
                case.text,
                "Y{index}g is gyrator(p1 {}, p2 {}, s1 {}, s2 {}) with g = {}",
                node(a),
                node(b),
                node(c),
                node(d),
                g.text()
            );
            case.parts.push(Part::Gyrator([a, b, c, d], g));
        }
        _ if random.chance(50) => {
            let out = 1 + random.below(nodes);
            let gm = value(random, case, &format!("gm{index}"));
            let _ = writeln!(
                case.text,
                "G{index} is transconductor(+ {}, - {}, out {}) with gm = {}",
                node(c),
                node(d),
                node(out),
                gm.text()
            );
            case.parts.push(Part::Transconductor(c, d, out, gm));
        }
        _ => {
            let cm = random.below(nodes + 1);
            let gain = value(random, case, &format!("ad{index}"));
            let _ = writeln!(
                case.text,
                "D{index} is diffamp(+ {}, - {}, out+ {}, out- {}, cm {}) with gain = {}",
                node(c),
                node(d),
                node(a),
                node(b),
                node(cm),
                gain.text()
            );
            case.parts.push(Part::Diffamp([c, d, a, b, cm], gain));
        }
    }
}

/// Dense equations: node voltages, then one current for each branch.
struct Dense {
    rows: Vec<Vec<u64>>,
    right: Vec<u64>,
}

impl Dense {
    fn set(&mut self, row: usize, column: Option<usize>, value: u64) {
        if let Some(column) = column {
            self.rows[row][column] = add(self.rows[row][column], value);
        }
    }

    fn voltage(&mut self, row: usize, a: usize, b: usize, value: u64) {
        self.set(row, a.checked_sub(1), value);
        self.set(row, b.checked_sub(1), neg(value));
    }

    fn branch(&mut self, a: usize, b: usize, column: usize) {
        if a > 0 {
            self.set(a - 1, Some(column), 1);
        }
        if b > 0 {
            self.set(b - 1, Some(column), neg(1));
        }
    }

    /// Determinant and the value of the response.
    fn solve(mut self, response: (usize, usize)) -> (u64, u64) {
        let size = self.rows.len();
        let mut determinant = 1;
        for step in 0..size {
            let Some(pivot) = (step..size).find(|&row| self.rows[row][step] != 0) else {
                return (0, 0);
            };
            if pivot != step {
                self.rows.swap(pivot, step);
                self.right.swap(pivot, step);
                determinant = neg(determinant);
            }
            determinant = mul(determinant, self.rows[step][step]);
            let scale = inverse(self.rows[step][step]);
            for row in 0..size {
                if row == step || self.rows[row][step] == 0 {
                    continue;
                }
                let factor = mul(self.rows[row][step], scale);
                for column in step..size {
                    let change = mul(factor, self.rows[step][column]);
                    self.rows[row][column] = add(self.rows[row][column], neg(change));
                }
                let change = mul(factor, self.right[step]);
                self.right[row] = add(self.right[row], neg(change));
            }
        }
        let at = |node: usize| {
            node.checked_sub(1).map_or(0, |index| {
                mul(self.right[index], inverse(self.rows[index][index]))
            })
        };
        (determinant, add(at(response.0), neg(at(response.1))))
    }
}

fn residue(number: i64) -> u64 {
    if number < 0 {
        neg(number.unsigned_abs())
    } else {
        number.unsigned_abs()
    }
}

/// Branches of a part: node pairs in order.
fn branches(part: &Part) -> Vec<(usize, usize)> {
    match part {
        Part::R(a, b, _)
        | Part::C(a, b, _)
        | Part::L(a, b, _)
        | Part::Source(a, b, _)
        | Part::Current(a, b, _)
        | Part::Meter(a, b, _)
        | Part::Controlled(a, b, ..)
        | Part::Nullor(_, _, a, b) => vec![(*a, *b)],
        Part::Amplifier(_, _, out, ..) | Part::Buffer(_, out) => vec![(*out, 0)],
        Part::Conveyor(x, _, z, _) => vec![(*x, 0), (*z, 0)],
        Part::Transformer([a, b, c, d], _) | Part::Gyrator([a, b, c, d], _) => {
            vec![(*a, *b), (*c, *d)]
        }
        Part::Transconductor(_, _, out, _) => vec![(0, *out)],
        Part::Diffamp([_, _, plus, minus, _], _) => vec![(*plus, 0), (*minus, 0)],
    }
}

/// Determinant and response at values of the symbols and of s.
fn solution(case: &Case, symbol: &dyn Fn(&str) -> u64, s: u64) -> (u64, u64) {
    let mut first = Vec::new();
    let mut count = case.nodes;
    let mut current: BTreeMap<String, usize> = BTreeMap::new();
    for part in &case.parts {
        first.push(count);
        if let Part::R(.., name)
        | Part::C(.., name)
        | Part::L(.., name)
        | Part::Source(.., name)
        | Part::Current(.., name)
        | Part::Meter(.., name)
        | Part::Controlled(.., name) = part
        {
            current.insert(name.clone(), count);
        }
        count += branches(part).len();
    }
    let mut dense = Dense {
        rows: vec![vec![0; count]; count],
        right: vec![0; count],
    };
    let of = |value: &Value| match value {
        Value::Symbol(name) => symbol(name),
        Value::Number(number) => residue(*number),
    };
    for (part, &row) in case.parts.iter().zip(&first) {
        for (offset, (a, b)) in branches(part).into_iter().enumerate() {
            dense.branch(a, b, row + offset);
        }
        match part {
            Part::R(a, b, name) => {
                dense.voltage(row, *a, *b, 1);
                dense.set(row, Some(row), neg(symbol(name)));
            }
            Part::C(a, b, name) => {
                dense.voltage(row, *a, *b, mul(s, symbol(name)));
                dense.set(row, Some(row), neg(1));
            }
            Part::L(a, b, name) => {
                dense.voltage(row, *a, *b, 1);
                dense.set(row, Some(row), neg(mul(s, symbol(name))));
                for (one, two, mutual) in &case.couplings {
                    let other = if one == name {
                        two
                    } else if two == name {
                        one
                    } else {
                        continue;
                    };
                    dense.set(row, Some(current[other]), neg(mul(s, symbol(mutual))));
                }
            }
            Part::Source(a, b, _) => {
                dense.voltage(row, *a, *b, 1);
                dense.right[row] = 1;
            }
            Part::Current(..) => {
                dense.set(row, Some(row), 1);
                dense.right[row] = 1;
            }
            Part::Meter(a, b, _) => dense.voltage(row, *a, *b, 1),
            Part::Controlled(a, b, is_voltage, gain, sensed, _) => {
                if *is_voltage {
                    dense.voltage(row, *a, *b, 1);
                } else {
                    dense.set(row, Some(row), 1);
                }
                match sensed {
                    Sensed::Voltage(c, d) => dense.voltage(row, *c, *d, neg(of(gain))),
                    Sensed::Current(name) => dense.set(row, Some(current[name]), neg(of(gain))),
                }
            }
            Part::Amplifier(plus, minus, out, gain, rout) => match gain {
                None => dense.voltage(row, *plus, *minus, 1),
                Some(gain) => {
                    dense.voltage(row, *out, 0, 1);
                    dense.voltage(row, *plus, *minus, neg(of(gain)));
                    if let Some(rout) = rout {
                        dense.set(row, Some(row), neg(symbol(rout)));
                    }
                }
            },
            Part::Buffer(input, out) => {
                dense.voltage(row, *out, 0, 1);
                dense.voltage(row, *input, 0, neg(1));
            }
            Part::Nullor(plus, minus, ..) => dense.voltage(row, *plus, *minus, 1),
            Part::Conveyor(x, y, _, polarity) => {
                dense.voltage(row, *x, *y, 1);
                dense.set(row + 1, Some(row + 1), 1);
                dense.set(row + 1, Some(row), neg(residue(*polarity)));
            }
            Part::Transformer([a, b, c, d], ratio) => {
                dense.voltage(row, *a, *b, 1);
                dense.voltage(row, *c, *d, neg(of(ratio)));
                dense.set(row + 1, Some(row + 1), 1);
                dense.set(row + 1, Some(row), of(ratio));
            }
            Part::Gyrator([a, b, c, d], g) => {
                dense.set(row, Some(row), 1);
                dense.voltage(row, *c, *d, neg(of(g)));
                dense.set(row + 1, Some(row + 1), 1);
                dense.voltage(row + 1, *a, *b, of(g));
            }
            Part::Transconductor(plus, minus, _, gm) => {
                dense.set(row, Some(row), 1);
                dense.voltage(row, *plus, *minus, neg(of(gm)));
            }
            Part::Diffamp([plus, minus, out_plus, out_minus, cm], gain) => {
                // Difference and mean of the outputs.
                dense.voltage(row, *out_plus, *out_minus, 1);
                dense.voltage(row, *plus, *minus, neg(of(gain)));
                dense.voltage(row + 1, *out_plus, 0, 1);
                dense.voltage(row + 1, *out_minus, 0, 1);
                dense.voltage(row + 1, *cm, 0, neg(2));
            }
        }
    }
    dense.solve(case.probe)
}

/// Values of the symbols by name, relations kept.
fn values(case: &Case, seed: u64) -> impl Fn(&str) -> u64 {
    let mut tied: BTreeMap<String, (i64, String)> = BTreeMap::new();
    for (name, factor, other) in &case.relations {
        tied.insert(name.clone(), (*factor, other.clone()));
    }
    let plain = move |name: &str| {
        let mut hash = seed ^ 0xCBF2_9CE4_8422_2325;
        for byte in name.bytes() {
            hash = (hash ^ u64::from(byte)).wrapping_mul(0x0000_0100_0000_01B3);
            hash ^= hash >> 29;
        }
        hash % PRIME
    };
    move |name: &str| match tied.get(name) {
        Some((factor, other)) => mul(residue(*factor), plain(other)),
        None => plain(name),
    }
}

/// Coefficients of the polynomial through points, trailing zeros dropped.
fn interpolate(points: &[(u64, u64)]) -> Vec<u64> {
    let mut result = vec![0; points.len()];
    let mut basis = vec![1];
    for (known, &(x, y)) in points.iter().enumerate() {
        let at = |list: &[u64]| {
            list.iter()
                .rev()
                .fold(0, |sum, &value| add(mul(sum, x), value))
        };
        let missing = mul(
            add(y, neg(at(&result[..known.max(1)]))),
            inverse(at(&basis)),
        );
        for (target, value) in result.iter_mut().zip(&basis) {
            *target = add(*target, mul(missing, *value));
        }
        let mut next = vec![0; basis.len() + 1];
        for (power, value) in basis.iter().enumerate() {
            next[power + 1] = add(next[power + 1], *value);
            next[power] = add(next[power], mul(*value, neg(x)));
        }
        basis = next;
    }
    while result.last() == Some(&0) {
        result.pop();
    }
    result
}

fn gcd_degree(a: &[u64], b: &[u64]) -> usize {
    let (mut a, mut b) = (a.to_vec(), b.to_vec());
    while !b.is_empty() {
        while a.len() >= b.len() {
            let factor = mul(a[a.len() - 1], inverse(b[b.len() - 1]));
            let shift = a.len() - b.len();
            for (index, value) in b.iter().enumerate() {
                a[shift + index] = add(a[shift + index], neg(mul(factor, *value)));
            }
            while a.last() == Some(&0) {
                a.pop();
            }
            if a.is_empty() {
                break;
            }
        }
        std::mem::swap(&mut a, &mut b);
    }
    a.len() - 1
}

/// The value of a polynomial at named values.
fn evaluate(
    polynomial: &Polynomial,
    network: &Network,
    symbol: &dyn Fn(&str) -> u64,
    s: u64,
) -> u64 {
    let mut sum = 0;
    for (monomial, coefficient) in polynomial.terms() {
        let mut term = coefficient.modulo(PRIME);
        for (found, exponent) in monomial.factors() {
            let base = if found == Symbol::S {
                s
            } else {
                symbol(network.symbols().name(found))
            };
            term = mul(term, power(base, u64::from(exponent)));
        }
        sum = add(sum, term);
    }
    sum
}

/// What an own solution says of a case at values: determinant and numerator as polynomials in s.
fn polynomials(case: &Case, symbol: &dyn Fn(&str) -> u64) -> (Vec<u64>, Vec<u64>) {
    let bound = case
        .parts
        .iter()
        .filter(|part| matches!(part, Part::C(..) | Part::L(..)))
        .count()
        + 2;
    let mut lower = Vec::new();
    let mut upper = Vec::new();
    for s in 1.. {
        let (determinant, response) = solution(case, symbol, s);
        if determinant == 0 && s > 3 * bound as u64 + 20 {
            return (Vec::new(), Vec::new());
        }
        if determinant != 0 {
            lower.push((s, determinant));
            upper.push((s, mul(determinant, response)));
        }
        if lower.len() > bound {
            break;
        }
    }
    (interpolate(&lower), interpolate(&upper))
}

/// A square system solved; the determinant too.
fn eliminated(mut rows: Vec<Vec<u64>>, mut right: Vec<u64>) -> Option<(u64, Vec<u64>)> {
    let size = rows.len();
    let mut determinant = 1;
    for at in 0..size {
        let pivot = (at..size).find(|&row| rows[row][at] != 0)?;
        if pivot != at {
            rows.swap(pivot, at);
            right.swap(pivot, at);
            determinant = neg(determinant);
        }
        determinant = mul(determinant, rows[at][at]);
        let inverse = inverse(rows[at][at]);
        for row in (0..size).filter(|&row| row != at) {
            let factor = neg(mul(rows[row][at], inverse));
            if factor == 0 {
                continue;
            }
            let pivot = rows[at].clone();
            for (value, own) in rows[row].iter_mut().zip(&pivot) {
                *value = add(*value, mul(factor, *own));
            }
            right[row] = add(right[row], mul(factor, right[at]));
        }
    }
    let solution = (0..size).map(|at| mul(right[at], inverse(rows[at][at])));
    Some((determinant, solution.collect()))
}

/// C(sI − A)⁻¹B + D(s) is the response, det(sI − A) the determinant up to a factor free of s.
fn compare_states(case: &Case, network: &Network, lower: &[u64], seed: u64) {
    let context = || format!("seed {seed}\n{}", case.text);
    let wanted = Wanted {
        states: true,
        ..Wanted::default()
    };
    let report = match answer(network, &wanted, &Budget::default()) {
        Ok(report) => report,
        Err(Failure::Budget(_)) if case.nodes > 8 => return,
        Err(other) => panic!("{other:?}\n{}", context()),
    };
    let found = report.states.expect("asked for");
    let system = &found.systems[0];
    let size = system.vector.len();
    assert_eq!(size, lower.len() - 1, "states\n{}", context());
    let symbol = values(case, seed);
    let mut ratio = None;
    for s in [1_000_003, 2_000_003, 3_000_017] {
        let at = |value: &Fraction| {
            let above = evaluate(value.numerator(), network, &symbol, s);
            let below = evaluate(value.denominator(), network, &symbol, s);
            assert_ne!(below, 0, "unlucky\n{}", context());
            mul(above, inverse(below))
        };
        let driven = |matrices: &[Vec<Vec<Fraction>>], row: usize| {
            matrices
                .iter()
                .rev()
                .fold(0, |sum, matrix| add(mul(sum, s), at(&matrix[row][0])))
        };
        let rows: Vec<Vec<u64>> = (0..size)
            .map(|row| {
                let entry = |column| {
                    let own = if row == column { s } else { 0 };
                    add(own, neg(at(&system.a[row][column])))
                };
                (0..size).map(entry).collect()
            })
            .collect();
        let right = (0..size).map(|row| driven(&system.b, row)).collect();
        let Some((own, states)) = eliminated(rows, right) else {
            continue;
        };
        let (determinant, response) = solution(case, &symbol, s);
        let mut output = driven(&system.d, 0);
        for (weight, state) in system.c[0].iter().zip(&states) {
            output = add(output, mul(at(weight), *state));
        }
        assert_eq!(output, response, "response of the states\n{}", context());
        let factor = mul(determinant, inverse(own));
        assert_eq!(*ratio.get_or_insert(factor), factor, "modes\n{}", context());
    }
}

/// Whether the case could be solved.
fn compare(seed: u64) -> bool {
    let case = make(seed);
    let mut sources = Sources::new();
    let main = sources.add("random", case.text.as_str());
    let load = |_: &str, _: &str| Err("none".to_owned());
    let reading = read(
        &mut sources,
        main,
        &ReadOptions {
            set: &[],
            load: &load,
        },
    );
    let symbol = values(&case, seed);
    let (lower, upper) = polynomials(&case, &symbol);
    let context = || format!("seed {seed}\n{}", case.text);
    let Some(network) = reading.network else {
        let messages: Vec<String> = reading
            .diagnostics
            .iter()
            .filter(|message| message.is_error())
            .map(|message| message.message.clone())
            .collect();
        assert!(
            lower.is_empty(),
            "solvable, but refused: {messages:?}\n{}",
            context()
        );
        return false;
    };
    let wanted = Wanted {
        formulas: true,
        cancellations: true,
        ..Wanted::default()
    };
    let report = match answer(&network, &wanted, &Budget::default()) {
        Ok(report) => report,
        Err(Failure::Unusable(errors)) => {
            assert!(
                lower.is_empty(),
                "solvable, but refused: {}\n{}",
                errors[0].message,
                context()
            );
            return false;
        }
        // Large networks may pass the budget; that is said, not guessed.
        Err(Failure::Budget(_)) if case.nodes > 8 => return true,
        Err(other) => panic!("{other:?}\n{}", context()),
    };
    assert!(
        !lower.is_empty(),
        "not solvable, but answered\n{}",
        context()
    );
    let result = &report.results[0];
    assert_eq!(
        report.order.network as usize,
        lower.len() - 1,
        "network order\n{}",
        context()
    );
    let low = lower.iter().position(|&value| value != 0).unwrap_or(0);
    assert_eq!(
        report.order.static_modes as usize,
        low,
        "static modes\n{}",
        context()
    );
    let Formula::Expanded(formula) = &result.formula else {
        assert!(case.nodes > 8, "no formula\n{}", context());
        return true;
    };
    if upper.is_empty() {
        assert!(result.zero, "zero function\n{}", context());
        return true;
    }
    compare_states(&case, &network, &lower, seed);
    let common = gcd_degree(&upper, &lower);
    assert_eq!(
        result.order as usize,
        lower.len() - 1 - common,
        "order\n{}",
        context()
    );
    assert_eq!(
        result.numerator_order as usize,
        upper.len() - 1 - common,
        "numerator order\n{}",
        context()
    );
    for point in 0..2 {
        let symbol = values(&case, seed + 7 * point + 1);
        let s = 1_000_003 + 17 * point;
        let side = |list: &[Polynomial]| {
            list.iter().rev().fold(0, |sum, part| {
                add(mul(sum, s), evaluate(part, &network, &symbol, s))
            })
        };
        let (determinant, response) = solution(&case, &symbol, s);
        if determinant == 0 {
            continue;
        }
        assert_eq!(
            side(&formula.numerator),
            mul(response, side(&formula.denominator)),
            "value\n{}",
            context()
        );
    }
    let hidden: u32 = result
        .cancellations
        .iter()
        .flatten()
        .filter(|entry| entry.class != cutloop::network::CancellationClass::Coincidental)
        .map(|entry| entry.degree * entry.multiplicity)
        .sum();
    assert_eq!(
        result.hidden,
        Some(hidden),
        "cancelled factors\n{}",
        context()
    );
    true
}

fn setting(name: &str, default: u64) -> u64 {
    std::env::var(name)
        .ok()
        .and_then(|text| text.parse().ok())
        .unwrap_or(default)
}

#[test]
fn agrees_with_an_independent_solution_on_random_networks() {
    let trials = setting("CUTLOOP_TRIALS", 1500);
    let first = setting("CUTLOOP_SEED", 1);
    let solved = (first..first + trials)
        .filter(|&seed| compare(seed))
        .count();
    assert!(
        solved * 3 > trials as usize,
        "only {solved} of {trials} networks from seed {first} have a unique solution"
    );
}

/// Compares each form that is shown with the quotient of polynomials; gives the number of forms.
fn forms(seed: u64) -> usize {
    let case = make(seed);
    let mut sources = Sources::new();
    let main = sources.add("random", case.text.as_str());
    let load = |_: &str, _: &str| Err("none".to_owned());
    let options = ReadOptions {
        set: &[],
        load: &load,
    };
    let Some(network) = read(&mut sources, main, &options).network else {
        return 0;
    };
    let wanted = Wanted {
        formulas: true,
        forms: true,
        ..Wanted::default()
    };
    let budget = Budget::unlimited();
    let Ok(report) = answer(&network, &wanted, &Budget::default()) else {
        return 0;
    };
    let mut count = 0;
    for result in &report.results {
        let Formula::Expanded(formula) = &result.formula else {
            continue;
        };
        let side = |list: &[Polynomial]| Polynomial::from_coefficients(Symbol::S, list);
        let (above, below) = (side(&formula.numerator), side(&formula.denominator));
        if above.is_zero() || above.len() + below.len() > 200 {
            continue;
        }
        let context = || format!("seed {seed}\n{}", case.text);
        let whole = Fraction::new(above, below, &budget).expect("no budget");
        let designer = result.forms.designer.as_ref();
        let designer = designer.unwrap_or_else(|| panic!("no form: {}", context()));
        let value = designer.value(&budget).expect("no budget");
        assert_eq!(value, whole, "{}", context());
        let normalised = result.forms.normalised.as_ref().expect("a short formula");
        let first = formula.denominator.iter().find(|it| !it.is_zero());
        let first = first.expect("a denominator");
        for (forms, coefficients) in [
            (&normalised.numerator, &formula.numerator),
            (&normalised.denominator, &formula.denominator),
        ] {
            for (form, coefficient) in forms.iter().zip(coefficients) {
                let ratio = Fraction::new(coefficient.clone(), first.clone(), &budget);
                assert_eq!(form.value(&budget), ratio, "{}", context());
            }
        }
        count += 1;
    }
    count
}

#[test]
fn every_form_that_is_shown_is_equal_to_the_quotient_of_polynomials() {
    let trials = setting("CUTLOOP_TRIALS", 150);
    let first = setting("CUTLOOP_SEED", 1);
    let found: usize = (first..first + trials).map(forms).sum();
    assert!(found * 4 > trials as usize, "only {found} forms");
}

/// Whether the reduced network has the functions of the case; `None` where the case has no answer.
fn reduced_agrees(seed: u64) -> Option<bool> {
    let case = make(seed);
    let wanted = Wanted {
        formulas: true,
        ..Wanted::default()
    };
    let solved = |text: &str| {
        let mut sources = Sources::new();
        let main = sources.add("random", text);
        let load = |_: &str, _: &str| Err("none".to_owned());
        let options = ReadOptions {
            set: &[],
            load: &load,
        };
        let reading = read(&mut sources, main, &options);
        let messages = format!("{:?}", reading.diagnostics);
        let network = reading.network.ok_or(messages)?;
        let report = answer(&network, &wanted, &Budget::default());
        let report = report.map_err(|failure| format!("{failure:?}"))?;
        Ok::<_, String>((network, report))
    };
    let (network, report) = solved(&case.text).ok()?;
    if !matches!(report.results[0].formula, Formula::Expanded(_)) {
        return None;
    }
    let reduction = reduce(&network, &wanted, seed.is_multiple_of(2));
    let written = netlist(&network, &reduction);
    let context = format!("seed {seed}\n{}\n{}", case.text, written.text);
    let (again, second) = match solved(&written.text) {
        Ok(found) => found,
        Err(message) => panic!("{message}\n{context}"),
    };
    let spelled = |name: &str| written.spelled(name);
    let verdict = same(
        (&network, &report),
        (&again, &second),
        &spelled,
        &Budget::default(),
    );
    // Large functions may pass the budget; that is said, not guessed.
    let undecided = verdict == Verdict::Undecided && case.nodes > 8;
    assert!(verdict == Verdict::Yes || undecided, "{context}");
    Some(verdict == Verdict::Yes && !reduction.steps.is_empty())
}

#[test]
fn reduction_keeps_the_functions_of_random_networks() {
    let trials = setting("CUTLOOP_TRIALS", 1500) / 3;
    let first = setting("CUTLOOP_SEED", 1);
    let stepped = (first..first + trials)
        .filter(|&seed| reduced_agrees(seed) == Some(true))
        .count();
    assert!(
        stepped * 4 > trials as usize,
        "only {stepped} of {trials} networks from seed {first} had a step"
    );
}
