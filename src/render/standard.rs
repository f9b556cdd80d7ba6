//! First and second order in the designer's terms: gain, τ, ω0, Q, where they are short.

use crate::algebra::{Fraction, Integer, Monomial, Polynomial};
use crate::analysis::report::Expanded;
use crate::budget::Budget;
use crate::render::coefficients::term_counts;
use crate::render::math::{self, Math};
use crate::render::names::Names;
use crate::render::parallel;

/// Definitions with more names and numbers than this are no help to a reader.
const LONGEST: usize = 24;

/// Formulas with more terms are not tried.
const MOST_TERMS: usize = 16;

/// A function over τ, ω0 and Q.
#[derive(Clone, Debug)]
pub struct StandardForm {
    /// Whether a minus stands in front.
    pub negative: bool,
    /// What stands in front, where it is not one.
    pub gain: Option<Math>,
    /// The fraction.
    pub fraction: Math,
    /// What its names stand for.
    pub definitions: Vec<(&'static str, Math)>,
}

/// The standard form, if there is one and it is short and none of its names is taken.
#[must_use]
pub fn standard(formula: &Expanded, names: &Names<'_>) -> Option<StandardForm> {
    let (above, below) = term_counts(formula);
    if above + below > MOST_TERMS {
        return None;
    }
    let mut writer = Writer {
        names,
        budget: Budget::default(),
        definitions: Vec::new(),
    };
    let (below, kind) = writer.denominator(&formula.denominator)?;
    let (gain, above) = writer.numerator(formula, kind)?;
    let taken = writer
        .definitions
        .iter()
        .any(|(name, _)| names.is_taken(name));
    let leaves: usize = writer.definitions.iter().map(|(_, it)| it.leaves()).sum();
    if taken || leaves + gain.leaves() > LONGEST {
        return None;
    }
    let (negative, gain) = gain.split_sign();
    Some(StandardForm {
        negative,
        gain: (!is_one(&gain)).then_some(gain),
        fraction: Math::quotient(above, below),
        definitions: writer.definitions,
    })
}

/// Which powers of s the denominator has.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Kind {
    First,
    Damped,
    Undamped,
}

struct Writer<'a> {
    names: &'a Names<'a>,
    budget: Budget,
    definitions: Vec<(&'static str, Math)>,
}

impl Writer<'_> {
    fn denominator(&mut self, below: &[Polynomial]) -> Option<(Math, Kind)> {
        match below {
            [constant, linear] if !constant.is_zero() => {
                let tau = self.ratio(linear, constant)?;
                self.definitions.push(("τ", tau));
                Some((one_plus([times_s("τ")]), Kind::First))
            }
            [constant, linear, square] if self.positive(constant) && self.positive(square) => {
                let omega = self.root_of_ratio(constant, square)?;
                self.definitions.push(("ω0", omega));
                let last = relative_square("ω0");
                if linear.is_zero() {
                    return Some((one_plus([last]), Kind::Undamped));
                }
                let quality = self.quality(constant, linear, square)?;
                self.definitions.push(("Q", quality));
                Some((one_plus([damping(), last]), Kind::Damped))
            }
            _ => None,
        }
    }

    /// Gain and the numerator beside it.
    fn numerator(&mut self, formula: &Expanded, kind: Kind) -> Option<(Math, Math)> {
        let below = &formula.denominator;
        match (formula.numerator.as_slice(), kind) {
            ([only], _) if !only.is_zero() => Some((self.ratio(only, &below[0])?, one())),
            ([zero, slope], Kind::First) if zero.is_zero() => {
                Some((self.ratio(slope, &below[1])?, times_s("τ")))
            }
            ([zero, slope], Kind::Damped) if zero.is_zero() => {
                Some((self.ratio(slope, &below[1])?, damping()))
            }
            ([zero, none, square], Kind::Damped | Kind::Undamped)
                if zero.is_zero() && none.is_zero() =>
            {
                Some((self.ratio(square, &below[2])?, relative_square("ω0")))
            }
            ([constant, slope], _) if !constant.is_zero() => {
                let tau = self.ratio(slope, constant)?;
                self.definitions.push(("τz", tau));
                Some((self.ratio(constant, &below[0])?, one_plus([times_s("τz")])))
            }
            ([constant, none, square], Kind::Damped | Kind::Undamped)
                if none.is_zero() && self.positive(constant) && self.positive(square) =>
            {
                let omega = self.root_of_ratio(constant, square)?;
                self.definitions.push(("ωz", omega));
                Some((
                    self.ratio(constant, &below[0])?,
                    one_plus([relative_square("ωz")]),
                ))
            }
            _ => None,
        }
    }

    fn reduced(&self, above: &Polynomial, below: &Polynomial) -> Option<Fraction> {
        Fraction::new(above.clone(), below.clone(), &self.budget)
            .ok()
            .flatten()
    }

    fn ratio(&self, above: &Polynomial, below: &Polynomial) -> Option<Math> {
        let reduced = self.reduced(above, below)?;
        Some(parallel::quotient(
            reduced.numerator(),
            reduced.denominator(),
            self.names,
        ))
    }

    fn root_of_ratio(&self, above: &Polynomial, below: &Polynomial) -> Option<Math> {
        let reduced = self.reduced(above, below)?;
        Some(self.root(&reduced, false))
    }

    /// Q = √(d0·d2)/d1, common symbols divided out. The root of a positive polynomial has a positive
    /// leading coefficient, and so has each of its factors: the sign of Q is that of d1's.
    fn quality(
        &self,
        constant: &Polynomial,
        linear: &Polynomial,
        square: &Polynomial,
    ) -> Option<Math> {
        let product = constant.product(square, &self.budget).ok()?;
        let reduced = self.reduced(&product, &linear.power(2, &self.budget).ok()?)?;
        Some(self.root(&reduced, linear.lead().signum() < 0))
    }

    /// √ of a positive quotient, with a sign.
    fn root(&self, value: &Fraction, negative: bool) -> Math {
        let spell = |part: &Polynomial| math::for_reading(part, self.names);
        let under = |part: Math| Math::Root(Box::new(part));
        let (above, above_root) = without_squares(value.numerator());
        let (below, below_root) = without_squares(value.denominator());
        let below = if negative { -below } else { below };
        match (above_root.is_one(), below_root.is_one()) {
            (true, true) => Math::quotient(spell(&above), spell(&below)),
            (false, true) => {
                let root = under(spell(&above_root));
                Math::quotient(Math::product([spell(&above), root]), spell(&below))
            }
            (true, false) => {
                let root = under(spell(&below_root));
                Math::quotient(spell(&above), Math::product([spell(&below), root]))
            }
            (false, false) => {
                let root = under(Math::quotient(spell(&above_root), spell(&below_root)));
                Math::quotient(Math::product([spell(&above), root]), spell(&below))
            }
        }
    }

    fn positive(&self, value: &Polynomial) -> bool {
        let terms = value.terms();
        !terms.is_empty()
            && terms
                .iter()
                .all(|(_, coefficient)| coefficient.signum() > 0)
            && value.symbols().iter().all(|it| self.names.is_positive(*it))
    }
}

/// A positive polynomial as square and rest: the root of the former, and the latter.
fn without_squares(value: &Polynomial) -> (Polynomial, Polynomial) {
    let content = value.content();
    let (outer_number, inner_number) = match content.square_root() {
        Some(number) => (number, Integer::one()),
        None => (Integer::one(), content.clone()),
    };
    let (mut outer, mut inner) = (Monomial::one(), Monomial::one());
    for (symbol, exponent) in value.monomial_content().factors() {
        outer = outer.mul(&Monomial::power(symbol, exponent / 2));
        inner = inner.mul(&Monomial::power(symbol, exponent % 2));
    }
    let shared = Polynomial::monomial(content, value.monomial_content());
    let sum = value.div_exact(&shared).unwrap_or_else(Polynomial::one);
    let (whole, under) = match square_root(&sum) {
        Some(whole) => (whole, Polynomial::one()),
        None => (Polynomial::one(), sum),
    };
    let under = &under * &Polynomial::monomial(inner_number, inner);
    let front = &whole * &Polynomial::monomial(outer_number, outer);
    (front, under)
}

/// The polynomial whose square this is: term after term from the leading one.
fn square_root(square: &Polynomial) -> Option<Polynomial> {
    let (monomial, coefficient) = square.terms().first()?;
    let mut half = Monomial::one();
    for (symbol, exponent) in monomial.factors() {
        if exponent % 2 == 1 {
            return None;
        }
        half = half.mul(&Monomial::power(symbol, exponent / 2));
    }
    let lead = coefficient.square_root()?;
    let mut root = Polynomial::monomial(lead.clone(), half.clone());
    let double = &lead + &lead;
    for _ in 0..=square.len() {
        let rest = square - &(&root * &root);
        let Some((monomial, coefficient)) = rest.terms().first() else {
            return Some(root);
        };
        let next = Polynomial::monomial(coefficient.div_exact(&double)?, monomial.div(&half)?);
        root = &root + &next;
    }
    None
}

fn one() -> Math {
    Math::Number(1_i64.into())
}

fn is_one(math: &Math) -> bool {
    *math == one()
}

fn one_plus<const N: usize>(parts: [Math; N]) -> Math {
    Math::sum(std::iter::once(one()).chain(parts))
}

fn times_s(name: &str) -> Math {
    Math::product([Math::name("s"), Math::name(name)])
}

/// s/(Q·ω0)
fn damping() -> Math {
    Math::quotient(
        Math::name("s"),
        Math::product([Math::name("Q"), Math::name("ω0")]),
    )
}

/// s²/ω²
fn relative_square(name: &str) -> Math {
    Math::quotient(Math::name("s").power(2), Math::name(name).power(2))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::algebra::Symbol;
    use crate::network::{NetworkBuilder, Origin, Sign, SymbolFacts};
    use crate::render::linear::READING;
    use crate::render::names::FrequencyPlace;
    use crate::source::{Sources, Span};

    /// Gain, fraction and definitions, spelled.
    fn spelled(make: impl Fn(&[Polynomial]) -> [Vec<Polynomial>; 2]) -> Vec<String> {
        let source = Sources::new().add("test", "");
        let place = Span::new(source, 0, 0);
        let mut builder = NetworkBuilder::new(place);
        let symbols = ["R1", "R2", "L1", "C1", "C2"].map(|name| {
            let symbol = builder.symbols().intern(name);
            builder.facts(facts(symbol, place));
            Polynomial::symbol(symbol)
        });
        let [numerator, denominator] = make(&symbols);
        let names = Names::new(builder.network(), FrequencyPlace::First);
        let formula = Expanded {
            numerator,
            denominator,
        };
        let Some(form) = standard(&formula, &names) else {
            return Vec::new();
        };
        let front = form.gain.iter().chain([&form.fraction]);
        let mut list: Vec<String> = front.map(|it| READING.spell(it)).collect();
        for (name, value) in &form.definitions {
            list.push(format!("{name} = {}", READING.spell(value)));
        }
        list
    }

    fn facts(symbol: Symbol, place: Span) -> SymbolFacts {
        SymbolFacts {
            symbol,
            origin: Origin::Part,
            dimension: None,
            sign: Sign::Positive,
            nominal: None,
            tolerance: None,
            range: None,
            in_hertz: false,
            place,
        }
    }

    #[test]
    fn a_loaded_low_pass_has_a_gain_and_a_time_constant() {
        let found = spelled(|it| {
            let slope = &(&it[0] * &it[1]) * &(&it[3] + &it[4]);
            [vec![it[1].clone()], vec![&it[0] + &it[1], slope]]
        });
        let expected = ["R2/(R1 + R2)", "1/(1 + s·τ)", "τ = (R1 ∥ R2)·(C1 + C2)"];
        assert_eq!(found, expected);
    }

    #[test]
    fn a_resonator_has_a_frequency_and_a_quality() {
        let found = spelled(|it| {
            let denominator = vec![Polynomial::one(), &it[0] * &it[3], &it[2] * &it[3]];
            [vec![Polynomial::one()], denominator]
        });
        let expected = [
            "1/(1 + s/(Q·ω0) + s²/ω0²)",
            "ω0 = 1/√(L1·C1)",
            "Q = √(L1/C1)/R1",
        ];
        assert_eq!(found, expected);
    }

    #[test]
    fn squares_come_out_of_the_root() {
        let found = spelled(|it| {
            let time = &it[0] * &it[3];
            let linear = &time * &Polynomial::constant(2_i64);
            [
                vec![Polynomial::one()],
                vec![Polynomial::one(), linear, time.pow(2)],
            ]
        });
        assert_eq!(found[1], "ω0 = 1/(R1·C1)");
        assert_eq!(found[2], "Q = 1/2");
    }

    #[test]
    fn the_quality_has_the_sign_of_the_damping() {
        for turn in [false, true] {
            let found = spelled(|it| {
                let damping = &(&it[0] * &it[4]) - &(&it[1] * &it[3]);
                let damping = if turn { -damping } else { damping };
                let square = &(&it[0] * &it[3]) * &(&it[1] * &it[4]);
                [
                    vec![Polynomial::one()],
                    vec![Polynomial::one(), damping, square],
                ]
            });
            let expected = if turn {
                "Q = √(R1·R2·C1·C2)/(R2·C1 − R1·C2)"
            } else {
                "Q = √(R1·R2·C1·C2)/(R1·C2 − R2·C1)"
            };
            assert_eq!(found[2], expected);
        }
    }

    #[test]
    fn no_frequency_where_its_square_may_be_negative() {
        let found = spelled(|it| {
            let square = &it[0] - &it[1];
            [
                vec![Polynomial::one()],
                vec![Polynomial::one(), it[0].clone(), square],
            ]
        });
        assert!(found.is_empty(), "{found:?}");
    }
}
