//! Whole commands in one process: from the text to the written answer.

mod families;

use std::ffi::OsString;
use std::io;

use cutloop::cli::{Exit, Streams, Terminal, run};
use divan::Bencher;

fn main() {
    divan::main();
}

/// Runs a command on a text; a formula that is too long counts as an answer.
fn command(bencher: Bencher<'_, '_>, name: &str, text: &str) {
    let arguments: Vec<OsString> = ["cutloop", name, "-"].map(OsString::from).into();
    bencher.bench_local(|| {
        let mut answers = Vec::new();
        let mut streams = Streams {
            input: &mut text.as_bytes(),
            answers: &mut answers,
            errors: &mut io::sink(),
            terminal: Terminal::default(),
        };
        let exit = run(arguments.clone(), &mut streams);
        assert!(exit <= Exit::Undecided, "{exit:?}");
        answers.len()
    });
}

#[divan::bench(args = [10, 100, 1_000, 10_000, 100_000, 1_000_000], max_time = 8, sample_count = 5)]
fn order_of_rc_ladder(bencher: Bencher<'_, '_>, sections: usize) {
    command(bencher, "order", &families::rc_ladder(sections));
}

#[divan::bench(args = [10, 100, 1_000, 10_000, 100_000], max_time = 8, sample_count = 5)]
fn order_of_lc_ladder(bencher: Bencher<'_, '_>, sections: usize) {
    command(bencher, "order", &families::lc_ladder(sections));
}

#[divan::bench(args = [2, 3, 4, 5, 6, 7, 8, 9], max_time = 8, sample_count = 5)]
fn order_of_rc_grid(bencher: Bencher<'_, '_>, side: usize) {
    command(bencher, "order", &families::rc_grid(side));
}

#[divan::bench(args = [1, 10, 100, 1_000, 10_000], max_time = 8, sample_count = 5)]
fn order_of_amplifier_cascade(bencher: Bencher<'_, '_>, stages: usize) {
    command(bencher, "order", &families::amplifier_cascade(stages));
}

#[divan::bench(args = [4, 5, 6, 7, 8, 9, 10], max_time = 8, sample_count = 5)]
fn order_of_complete_graph(bencher: Bencher<'_, '_>, nodes: usize) {
    command(bencher, "order", &families::complete_graph(nodes));
}

#[divan::bench(max_time = 8, sample_count = 5)]
fn order_of_operational_amplifier(bencher: Bencher<'_, '_>) {
    command(bencher, "order", &families::operational_amplifier());
}

#[divan::bench(max_time = 8, sample_count = 5)]
fn audit_of_operational_amplifier(bencher: Bencher<'_, '_>) {
    command(bencher, "audit", &families::operational_amplifier());
}

#[divan::bench(args = [2, 4, 6, 8], max_time = 8, sample_count = 5)]
fn formula_of_rc_ladder(bencher: Bencher<'_, '_>, sections: usize) {
    command(bencher, "formula", &families::rc_ladder(sections));
}

#[divan::bench(args = [4, 8, 16, 32, 64], max_time = 8, sample_count = 5)]
fn formula_of_tied_rc_ladder(bencher: Bencher<'_, '_>, sections: usize) {
    command(bencher, "formula", &families::tied_rc_ladder(sections));
}

#[divan::bench(args = [3, 5, 7, 9, 11, 13, 15], max_time = 8, sample_count = 5)]
fn formula_of_terminated_ladder(bencher: Bencher<'_, '_>, order: usize) {
    command(bencher, "formula", &families::terminated_ladder(order));
}

#[divan::bench(args = [2, 3], max_time = 8, sample_count = 5)]
fn formula_of_rc_grid(bencher: Bencher<'_, '_>, side: usize) {
    command(bencher, "formula", &families::rc_grid(side));
}

#[divan::bench(args = [4, 5, 6], max_time = 8, sample_count = 5)]
fn formula_of_complete_graph(bencher: Bencher<'_, '_>, nodes: usize) {
    command(bencher, "formula", &families::complete_graph(nodes));
}

#[divan::bench]
fn audit_of_twin_t(bencher: Bencher<'_, '_>) {
    command(bencher, "audit", &families::twin_t());
}

#[divan::bench]
fn audit_of_bridged_t(bencher: Bencher<'_, '_>) {
    command(bencher, "audit", &families::bridged_t());
}
