//! Whatever form an expression is given, it keeps its value: forms against polynomials at exact points.

use std::collections::BTreeMap;

use crate::algebra::{Integer, Monomial, Polynomial, Rational, Symbol};
use crate::analysis::report::Expanded;
use crate::network::NetworkBuilder;
use crate::render::math::{self, Math};
use crate::render::names::{FrequencyPlace, Names};
use crate::render::{coefficients, nest};
use crate::source::{Sources, Span};

type Values = BTreeMap<String, Rational>;

/// The value of an expression; panics on roots and on division by zero.
fn value(math: &Math, values: &Values) -> Rational {
    let one = || Rational::from(1_i64);
    match math {
        Math::Number(number) => Rational::from(number.clone()),
        Math::Symbol(name) => values[name.as_ref()].clone(),
        Math::Sum(terms) => terms.iter().fold(Rational::from(0_i64), |sum, term| {
            let term_value = value(&term.body, values);
            if term.negative {
                sum - term_value
            } else {
                sum + term_value
            }
        }),
        Math::Product(factors) => factors
            .iter()
            .fold(one(), |it, factor| it * value(factor, values)),
        Math::Quotient(above, below) => {
            value(above, values) * value(below, values).recip().expect("not zero")
        }
        Math::Power(base, exponent) => {
            let base = value(base, values);
            (0..*exponent).fold(one(), |it, _| it * base.clone())
        }
        Math::Parallel(members) => {
            let sum = members.iter().fold(Rational::from(0_i64), |sum, member| {
                sum + value(member, values).recip().expect("not zero")
            });
            sum.recip().expect("not zero")
        }
        Math::Negative(inner) => Rational::from(0_i64) - value(inner, values),
        Math::Root(_) => panic!("roots have no exact value"),
    }
}

/// Numbers that look random and are the same on every run.
struct Dice(u64);

impl Dice {
    fn roll(&mut self, sides: u64) -> u64 {
        self.0 = self
            .0
            .wrapping_mul(6_364_136_223_846_793_005)
            .wrapping_add(1_442_695_040_888_963_407);
        (self.0 >> 33) % sides
    }

    /// A sum of a few terms in these symbols, or a product of two such sums.
    fn polynomial(&mut self, symbols: &[Symbol]) -> Polynomial {
        let sum = self.sum(symbols);
        match self.roll(2) {
            0 => sum,
            _ => &sum * &self.sum(symbols),
        }
    }

    fn sum(&mut self, symbols: &[Symbol]) -> Polynomial {
        let count = 1 + self.roll(6);
        Polynomial::from_terms((0..count).map(|_| {
            let factors = self.roll(4);
            let monomial = (0..factors).fold(Monomial::one(), |monomial, _| {
                let symbol = symbols[self.roll(symbols.len() as u64) as usize];
                monomial.mul(&Monomial::symbol(symbol))
            });
            (monomial, Integer::from(self.roll(9) as i64 - 4))
        }))
    }
}

/// Names and values of a handful of parts and of s.
fn bench() -> (NetworkBuilder, Vec<Symbol>, Values) {
    let source = Sources::new().add("test", "");
    let mut builder = NetworkBuilder::new(Span::new(source, 0, 0));
    let names = ["R1", "R2", "R3", "C1", "C2", "L1", "gm"];
    let symbols = names.map(|name| builder.symbols().intern(name)).to_vec();
    let mut values: Values = names
        .iter()
        .zip([2_i64, 3, 5, 7, 11, 13, 17])
        .map(|(name, value)| ((*name).to_owned(), Rational::from(value)))
        .collect();
    values.insert("s".to_owned(), Rational::from(19_i64));
    (builder, symbols, values)
}

fn at(polynomial: &Polynomial, names: &Names<'_>, values: &Values) -> Rational {
    polynomial.value(&|symbol| values[names.name(symbol)].clone())
}

#[test]
fn nested_forms_keep_their_value() {
    let (builder, symbols, values) = bench();
    let names = Names::new(builder.network(), FrequencyPlace::First);
    let mut dice = Dice(1);
    for round in 0..2000 {
        let polynomial = dice.polynomial(&symbols);
        let expected = at(&polynomial, &names, &values);
        for form in [
            math::polynomial(&polynomial, &names),
            math::for_reading(&polynomial, &names),
            math::by_powers_of_s(&polynomial, &names),
            nest::nested(&polynomial, &names),
        ] {
            assert_eq!(value(&form, &values), expected, "round {round}: {form:?}");
        }
    }
}

#[test]
fn named_and_shared_forms_keep_their_value() {
    let (builder, symbols, values) = bench();
    let names = Names::new(builder.network(), FrequencyPlace::First);
    let mut dice = Dice(2);
    for round in 0..60 {
        let mut side = || -> Vec<Polynomial> {
            let product = |dice: &mut Dice| {
                let left = dice.polynomial(&symbols);
                &(&left * &dice.polynomial(&symbols)) + &dice.sum(&symbols)
            };
            (0..4).map(|_| product(&mut dice)).collect()
        };
        let formula = Expanded {
            numerator: side(),
            denominator: side(),
        };
        let form = coefficients::named(&formula, &names, round % 2 == 0);
        let mut known = values.clone();
        for definition in &form.definitions {
            let found = value(&definition.value, &known);
            known.insert(definition.name.clone(), found);
        }
        for (side, named) in [
            (&formula.numerator, &form.numerator),
            (&formula.denominator, &form.denominator),
        ] {
            let whole = Polynomial::from_coefficients(Symbol::S, side);
            let expected = at(&whole, &names, &values);
            assert_eq!(value(named, &known), expected, "round {round}");
            let factored = math::factored_series(side, &names);
            assert_eq!(value(&factored, &values), expected, "round {round}");
        }
    }
}
