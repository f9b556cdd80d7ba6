//! What the writers draw of reports made by hand: every shape of a finding at least once.

mod bench;
mod reports;

use cutloop::render::{Detail, json, latex, text};

use bench::Bench;

fn text_of(bench: &Bench, detail: Detail) -> String {
    text::answer(&bench.answer(detail), &text::Page::default())
}

fn json_of(bench: &Bench, detail: Detail) -> String {
    format!("{:#}", json::answer(&bench.answer(detail)))
}

fn latex_of(bench: &Bench, detail: Detail) -> String {
    latex::answer(&bench.answer(detail))
}

macro_rules! drawn {
    ($($name:ident: $bench:expr, $detail:expr;)*) => {
        $(
            mod $name {
                use super::*;

                #[test]
                fn as_text() {
                    insta::assert_snapshot!(text_of(&$bench, $detail));
                }

                #[test]
                fn as_json() {
                    insta::assert_snapshot!(json_of(&$bench, $detail));
                }

                #[test]
                fn as_latex() {
                    insta::assert_snapshot!(latex_of(&$bench, $detail));
                }
            }
        )*
    };
}

drawn! {
    order_with_a_hidden_mode: reports::hidden_mode(), Detail::Order;
    order_with_static_modes: reports::static_modes(), Detail::Order;
    formula_of_first_order: reports::hidden_mode(), Detail::Formula;
    formula_of_medium_length: reports::ladder(6, 8), Detail::Formula;
    formula_with_named_coefficients: reports::ladder(24, 12), Detail::Formula;
    formula_in_nested_form: reports::shared(), Detail::Formula;
    formula_of_many_terms: reports::product(), Detail::Formula;
    formula_over_budget: reports::over_budget(), Detail::Formula;
    formula_without_s: reports::constant(), Detail::Formula;
    audit_of_every_class: reports::hidden_mode(), Detail::Audit;
    claims_of_every_fate: reports::claims(), Detail::Claims;
}

#[test]
fn no_line_is_wider_than_the_page() {
    for width in [60, 80, 120] {
        let page = text::Page {
            width,
            colour: false,
        };
        for (bench, detail) in [
            (reports::hidden_mode(), Detail::Order),
            (reports::hidden_mode(), Detail::Audit),
            (reports::ladder(6, 8), Detail::Formula),
            (reports::product(), Detail::Formula),
        ] {
            let drawn = text::answer(&bench.answer(detail), &page);
            for line in drawn.lines() {
                let columns = line.chars().count();
                assert!(columns <= width, "{columns} > {width}: {line}");
            }
        }
    }
}

#[test]
fn a_long_formula_is_nested_and_says_how_many_terms_it_stands_for() {
    let drawn = text_of(&reports::product(), Detail::Formula);
    assert!(drawn.contains("term over"), "{drawn}");
    assert!(drawn.contains("577 terms"), "{drawn}");
    assert!(drawn.lines().count() < 24, "{drawn}");
}

#[test]
fn colour_changes_nothing_but_colour() {
    let bench = reports::hidden_mode();
    let page = text::Page {
        width: 96,
        colour: true,
    };
    let coloured = text::answer(&bench.answer(Detail::Order), &page);
    let mut plain = String::new();
    let mut code = false;
    for letter in coloured.chars() {
        match (code, letter) {
            (false, '\u{1b}') => code = true,
            (true, 'm') => code = false,
            (false, letter) => plain.push(letter),
            (true, _) => {}
        }
    }
    assert_ne!(coloured, plain);
    assert_eq!(plain, text_of(&bench, Detail::Order));
}
