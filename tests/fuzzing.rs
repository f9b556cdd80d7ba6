//! Nothing that is read makes the tool panic: random bytes, token soup, damaged examples.

use std::time::Duration;

use cutloop::analysis::answer;
use cutloop::analysis::report::{Failure, Wanted};
use cutloop::budget::{Budget, Limits};
use cutloop::language::{ReadOptions, read};
use cutloop::source::Sources;
use proptest::prelude::*;

/// Words and signs of the language.
const TOKENS: &[&str] = &[
    "in",
    "out",
    "a",
    "b",
    "ground",
    "gnd",
    "0",
    "1",
    ".",
    "-R1-",
    "-C1-",
    "-L1-",
    "-Vs-",
    "-Is-",
    "-(R2 || C2)-",
    "-(L3 + R4(1k))-",
    "--",
    "-",
    "(",
    ")",
    "{",
    "}",
    "{k}",
    "n{k-1}",
    ";",
    "\n",
    ",",
    ":",
    "=",
    "==",
    "+",
    "*",
    "/",
    "^",
    "||",
    "2",
    "4k7",
    "10 kΩ",
    "± 1 %",
    "+20 % -10 %",
    "R47",
    "1e9",
    "0",
    "..",
    "s",
    "pi",
    "R1",
    "C1",
    "L1",
    "Vs",
    "H",
    "x",
    "K",
    "title \"x\"",
    "use \"y\"",
    "let N = 3",
    "for k = 1 .. 3",
    "for k = 1 .. N",
    "end",
    "module m(a, b) with R",
    "A1 is m(a in, b ground)",
    "free x, K",
    "drive Vd",
    "assume K < 3",
    "derive H = voltage(out) / Vs",
    "derive Z = impedance(in)",
    "derive T = return_ratio(U1)",
    "claim order(H) = 1",
    "claim H = 1/(1 + s*R1*C1)",
    "claim stable(H)",
    "starts voltage(C1) = x",
    "is",
    "with",
    "without",
    "exactly",
    "U1 is opamp(+ a, - b, out)",
    "U1 is opamp(+ a, - b, out) with gain = K/(1 + s)",
    "Q1 is bjt(b a, c out, e ground) with cpi, cmu",
    "T1 is coupling of L1, L2 with k = K",
    "X1 is transformer(p1 in, p2 ground, s1 out, s2 ground)",
    "R1 = 2*x",
    "Z1 = x + 1/(s*K)",
    "I1 = K*voltage(a)",
    "V1 = K*current(R1)",
    "#",
    "\"",
    "\u{0}",
    "µ",
    "Ω",
    "−",
    "∥",
    "voltage(",
    "current(",
    "infinite",
    "none",
];

/// Reads a text and answers what can be answered, within small bounds.
fn survive(text: &str) {
    let mut sources = Sources::new();
    let main = sources.add("fuzz", text);
    let load = |_: &str, path: &str| Err(format!("there is no file {path}"));
    let set = [("N".to_owned(), "2".to_owned())];
    let reading = read(
        &mut sources,
        main,
        &ReadOptions {
            set: &set,
            load: &load,
        },
    );
    let errs = reading.diagnostics.iter().any(|message| message.is_error());
    assert_eq!(reading.network.is_none(), errs, "a network or an error");
    for message in &reading.diagnostics {
        if let Some(place) = message.place {
            let (line, column) = sources.position(place);
            assert!(line >= 1 && column >= 1);
        }
        assert!(!message.message.is_empty());
    }
    if let Some(network) = reading.network {
        let wanted = Wanted {
            formulas: true,
            claims: true,
            cancellations: true,
            ..Wanted::default()
        };
        let budget = Budget::new(Limits {
            terms: 3000,
            states: 20_000,
            time: Duration::from_millis(500),
        });
        if let Err(Failure::Witness(sentence)) = answer(&network, &wanted, &budget) {
            panic!("{sentence}\n{text}");
        }
    }
}

fn examples() -> Vec<String> {
    let folder = concat!(env!("CARGO_MANIFEST_DIR"), "/examples");
    let mut texts: Vec<(String, String)> = std::fs::read_dir(folder)
        .expect("examples")
        .filter_map(|entry| {
            let path = entry.ok()?.path();
            let name = path.file_name()?.to_string_lossy().into_owned();
            let text = std::fs::read_to_string(path).ok()?;
            Some((name, text))
        })
        .collect();
    texts.sort();
    texts.into_iter().map(|(_, text)| text).collect()
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 1500, failure_persistence: None, rng_seed: proptest::test_runner::RngSeed::Fixed(20_261_201), ..ProptestConfig::default() })]

    #[test]
    fn token_soup_is_survived(tokens in prop::collection::vec(prop::sample::select(TOKENS), 0..40), glue in 0..3_usize) {
        survive(&tokens.join([" ", "; ", "\n"][glue]));
    }

    #[test]
    fn random_text_is_survived(text in "\\PC{0,200}") {
        survive(&text);
    }

    #[test]
    fn damaged_examples_are_survived(which in 0..64_usize, cuts in prop::collection::vec((0.0..1.0_f64, 0..6_usize, prop::sample::select(TOKENS)), 1..4)) {
        let texts = examples();
        let mut text = texts[which % texts.len()].clone();
        for (at, length, token) in cuts {
            let chars: Vec<char> = text.chars().collect();
            let start = (at * chars.len() as f64) as usize;
            let end = (start + length).min(chars.len());
            text = chars[..start].iter().collect::<String>() + token + &chars[end..].iter().collect::<String>();
        }
        survive(&text);
    }
}
