//! The stages of an answer, each by itself: parse, diagram, sweeps, GCD.

mod families;

use std::convert::Infallible;
use std::hint::black_box;

use cutloop::algebra::gcd::gcd;
use cutloop::algebra::{
    Polynomial, PrimeField, Ring, Symbol, SymbolTable, Univariate, UnivariateRing,
};
use cutloop::analysis::determinant::{Determinant, Values};
use cutloop::analysis::order::passive_order;
use cutloop::analysis::setup::{Frame, Insertion};
use cutloop::budget::Budget;
use cutloop::language::{ReadOptions, read};
use cutloop::network::Network;
use cutloop::source::Sources;
use divan::Bencher;
use divan::counter::BytesCount;

fn main() {
    divan::main();
}

fn network(text: &str) -> Network {
    let mut sources = Sources::new();
    let main = sources.add("bench", text);
    let load = |_: &str, path: &str| Err(format!("no file {path}"));
    let options = ReadOptions {
        set: &[],
        load: &load,
    };
    read(&mut sources, main, &options)
        .network
        .expect("a family is sound")
}

fn parsing(bencher: Bencher<'_, '_>, text: &str) {
    bencher
        .counter(BytesCount::of_str(text))
        .bench(|| network(black_box(text)));
}

#[divan::bench(args = [10, 100, 1_000, 10_000, 100_000, 1_000_000], max_time = 5)]
fn parse_rc_ladder(bencher: Bencher<'_, '_>, sections: usize) {
    parsing(bencher, &families::rc_ladder(sections));
}

#[divan::bench(args = [1_000, 10_000, 100_000], max_time = 5)]
fn parse_amplifier_cascade(bencher: Bencher<'_, '_>, stages: usize) {
    parsing(bencher, &families::amplifier_cascade(stages));
}

#[divan::bench]
fn parse_operational_amplifier(bencher: Bencher<'_, '_>) {
    parsing(bencher, &families::operational_amplifier());
}

/// The order of a passive network by union–find.
#[divan::bench(args = [1_000, 100_000, 500_000], max_time = 5)]
fn passive_order_of_rc_ladder(bencher: Bencher<'_, '_>, sections: usize) {
    let network = network(&families::rc_ladder(sections));
    bencher.bench(|| passive_order(black_box(&network)));
}

fn determinant(network: &Network) -> Determinant {
    let budget = Budget::unlimited();
    Determinant::build(network, &Frame::default(), &Insertion::None, &budget)
        .expect("no budget")
        .expect("solvable")
}

/// Search for an order of the parts, and the diagram.
fn diagram(bencher: Bencher<'_, '_>, text: &str) {
    let network = network(text);
    bencher.bench(|| determinant(black_box(&network)));
}

#[divan::bench(args = [10, 100, 1_000, 10_000], max_time = 5)]
fn diagram_of_rc_ladder(bencher: Bencher<'_, '_>, sections: usize) {
    diagram(bencher, &families::rc_ladder(sections));
}

#[divan::bench(args = [2, 3, 4, 5, 6, 7, 8, 9], max_time = 5)]
fn diagram_of_rc_grid(bencher: Bencher<'_, '_>, side: usize) {
    diagram(bencher, &families::rc_grid(side));
}

#[divan::bench(args = [4, 5, 6, 7, 8, 9, 10], max_time = 5)]
fn diagram_of_complete_graph(bencher: Bencher<'_, '_>, nodes: usize) {
    diagram(bencher, &families::complete_graph(nodes));
}

#[divan::bench(args = [1, 10, 100, 1_000], max_time = 5)]
fn diagram_of_amplifier_cascade(bencher: Bencher<'_, '_>, stages: usize) {
    diagram(bencher, &families::amplifier_cascade(stages));
}

#[divan::bench(max_time = 5)]
fn diagram_of_operational_amplifier(bencher: Bencher<'_, '_>) {
    diagram(bencher, &families::operational_amplifier());
}

/// Values modulo a prime, by the number of the symbol.
struct Residues(PrimeField);

impl Residues {
    fn of(&self, symbol: Symbol) -> u64 {
        self.0.pow(3, symbol.index() as u64 + 5)
    }
}

impl Values<PrimeField> for Residues {
    fn symbol(&self, symbol: Symbol) -> Result<(u64, u64), Infallible> {
        Ok((self.of(symbol), 1))
    }
    fn mutual(&self, _: usize) -> Result<(u64, u64), Infallible> {
        Ok((1, 1))
    }
    fn s(&self) -> u64 {
        17
    }
    fn polynomial(&self, _: &Polynomial) -> Result<(u64, u64), Infallible> {
        Ok((1, 1))
    }
}

impl Values<UnivariateRing> for Residues {
    fn symbol(&self, symbol: Symbol) -> Result<(Univariate, Univariate), Infallible> {
        Ok((
            Univariate::constant(self.of(symbol)),
            Univariate::constant(1),
        ))
    }
    fn mutual(&self, _: usize) -> Result<(Univariate, Univariate), Infallible> {
        Ok((Univariate::constant(1), Univariate::constant(1)))
    }
    fn s(&self) -> Univariate {
        Univariate::variable()
    }
    fn polynomial(&self, _: &Polynomial) -> Result<(Univariate, Univariate), Infallible> {
        Ok((Univariate::constant(1), Univariate::constant(1)))
    }
}

fn sweep<R>(bencher: Bencher<'_, '_>, text: &str, ring: &R)
where
    R: Ring<Error = Infallible> + Sync,
    Residues: Values<R>,
{
    let built = determinant(&network(text));
    let values = Residues(PrimeField::default_prime());
    bencher.bench_local(|| built.value(ring, black_box(&values)).is_ok());
}

#[divan::bench(args = [10, 100, 1_000, 10_000], max_time = 5)]
fn value_of_rc_ladder(bencher: Bencher<'_, '_>, sections: usize) {
    let field = PrimeField::default_prime();
    sweep(bencher, &families::rc_ladder(sections), &field);
}

#[divan::bench(args = [10, 100, 1_000], max_time = 5)]
fn coefficients_of_rc_ladder(bencher: Bencher<'_, '_>, sections: usize) {
    let field = PrimeField::default_prime();
    sweep(
        bencher,
        &families::rc_ladder(sections),
        &UnivariateRing { field },
    );
}

#[divan::bench(args = [4, 6, 8], max_time = 5)]
fn value_of_rc_grid(bencher: Bencher<'_, '_>, side: usize) {
    sweep(
        bencher,
        &families::rc_grid(side),
        &PrimeField::default_prime(),
    );
}

#[divan::bench(max_time = 5)]
fn coefficients_of_operational_amplifier(bencher: Bencher<'_, '_>) {
    let field = PrimeField::default_prime();
    sweep(
        bencher,
        &families::operational_amplifier(),
        &UnivariateRing { field },
    );
}

#[divan::bench(args = [10, 100, 1_000, 10_000], max_time = 5)]
fn count_of_terms_of_rc_ladder(bencher: Bencher<'_, '_>, sections: usize) {
    let built = determinant(&network(&families::rc_ladder(sections)));
    bencher.bench_local(|| black_box(&built).term_count());
}

/// gcd of f·h and g·h with sums of `variables` symbols, squared.
#[divan::bench(args = [2, 3, 4, 5], max_time = 5)]
fn gcd_of_squared_sums(bencher: Bencher<'_, '_>, variables: usize) {
    let mut table = SymbolTable::new();
    let symbols: Vec<Polynomial> = (0..variables)
        .map(|index| Polynomial::symbol(table.fresh(&format!("x{index}"))))
        .collect();
    let sum = |step: i64| {
        let terms = symbols.iter().zip(1_i64..);
        let linear = terms.fold(Polynomial::constant(step), |sum, (symbol, index)| {
            let weight = Polynomial::constant(index * step % 7 + 1);
            &sum + &(symbol * &weight)
        });
        linear.pow(2)
    };
    let common = sum(1);
    let (above, below) = (&sum(2) * &common, &sum(5) * &common);
    let budget = Budget::unlimited();
    bencher.bench_local(|| gcd(black_box(&above), black_box(&below), &budget));
}
