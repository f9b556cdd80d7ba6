//! Polynomials as sums of terms in their written order.

use std::cmp::Ordering;
use std::sync::Arc;

use smallvec::SmallVec;

use crate::algebra::{Integer, Monomial, Polynomial, Symbol};
use crate::render::math::Math;
use crate::render::names::Names;
use crate::render::nest::nested;

/// A polynomial as a flat sum, the complex frequency treated like any symbol.
///
/// Cost: t·log t comparisons for t terms.
#[must_use]
pub fn polynomial(polynomial: &Polynomial, names: &Names<'_>) -> Math {
    let order = TermOrder::new(polynomial, names);
    let mut terms: Vec<(Key, &Monomial, &Integer)> = polynomial
        .terms()
        .iter()
        .map(|(monomial, coefficient)| (order.key(monomial), monomial, coefficient))
        .collect();
    terms.sort_by(|left, right| compare_keys(&left.0, &right.0));
    Math::sum(
        terms
            .into_iter()
            .map(|(_, monomial, coefficient)| order.term(monomial, coefficient)),
    )
}

/// The terms of a polynomial in the order in which they are written.
#[must_use]
pub fn ordered_terms(polynomial: &Polynomial, names: &Names<'_>) -> Vec<(Monomial, Integer)> {
    let order = TermOrder::new(polynomial, names);
    let mut terms: Vec<(Key, &(Monomial, Integer))> = polynomial
        .terms()
        .iter()
        .map(|term| (order.key(&term.0), term))
        .collect();
    terms.sort_by(|left, right| compare_keys(&left.0, &right.0));
    terms.into_iter().map(|(_, term)| term.clone()).collect()
}

/// A polynomial by ascending powers of s, each power once: `1 + s·(R1·C1 + R2·C1)`.
#[must_use]
pub fn by_powers_of_s(whole: &Polynomial, names: &Names<'_>) -> Math {
    power_series(&whole.coefficients(Symbol::S), names)
}

/// Coefficients of s^0, s^1, … as one expression.
#[must_use]
pub fn power_series(coefficients: &[Polynomial], names: &Names<'_>) -> Math {
    Math::sum(power_terms(coefficients, names))
}

/// The same with the number, the symbols and the power of s that all terms share in front:
/// `s·C1·(1 + s·R2·C1)`.
#[must_use]
pub fn factored_series(coefficients: &[Polynomial], names: &Names<'_>) -> Math {
    let Some(lowest) = coefficients.iter().position(|it| !it.is_zero()) else {
        return power_series(coefficients, names);
    };
    let present = || coefficients.iter().filter(|it| !it.is_zero());
    let number = present().fold(Integer::zero(), |gcd, it| gcd.gcd(&it.content()));
    let symbols = present()
        .map(Polynomial::monomial_content)
        .reduce(|gcd, it| gcd.gcd(&it))
        .unwrap_or_else(Monomial::one);
    let shared = Polynomial::monomial(number, symbols);
    let reduced: Option<Vec<Polynomial>> = coefficients[lowest..]
        .iter()
        .map(|it| it.div_exact(&shared))
        .collect();
    let power = u32::try_from(lowest).unwrap_or(u32::MAX);
    let front = shared.mul_monomial(&Monomial::power(Symbol::S, power));
    match reduced {
        Some(reduced) if reduced.len() > 1 && !front.is_one() => {
            Math::product([polynomial(&front, names), power_series(&reduced, names)])
        }
        _ => power_series(coefficients, names),
    }
}

/// Coefficients of s^0, s^1, …, each with its power; zero coefficients are left out.
#[must_use]
pub fn power_terms(coefficients: &[Polynomial], names: &Names<'_>) -> Vec<Math> {
    coefficients
        .iter()
        .enumerate()
        .filter(|(_, coefficient)| !coefficient.is_zero())
        .map(|(power, coefficient)| {
            let power = u32::try_from(power).unwrap_or(u32::MAX);
            with_power(coefficient, power, names)
        })
        .collect()
}

fn with_power(coefficient: &Polynomial, power: u32, names: &Names<'_>) -> Math {
    if coefficient.len() == 1 {
        let frequency = Monomial::power(Symbol::S, power);
        return polynomial(&coefficient.mul_monomial(&frequency), names);
    }
    let frequency = Math::name(names.name(Symbol::S)).power(power);
    Math::product([frequency, for_reading(coefficient, names)])
}

/// A polynomial without s with the number and the symbols that all its terms share in front, and as a
/// product where taking out symbols makes it one, or shorter by a third: `2·R1·(C1 + C2)`,
/// `(R1 + R2)·(C1 + C2)`.
#[must_use]
pub fn for_reading(whole: &Polynomial, names: &Names<'_>) -> Math {
    let shared = Polynomial::monomial(whole.content(), whole.monomial_content());
    let Some(rest) = whole.div_exact(&shared) else {
        return polynomial(whole, names);
    };
    let sum = polynomial(&rest, names).positive_first();
    let nested = nested(&rest, names);
    let (long, short) = (sum.leaves(), nested.leaves());
    let rest = match nested {
        deep if deep.sums_within_sums() > 2 => sum,
        product @ Math::Product(_) if short < long => product,
        nested if 3 * short <= 2 * long => nested,
        _ => sum,
    };
    Math::product([polynomial(&shared, names), rest])
}

/// A condition `p = 0` with its negative terms brought to the other side: `R1·C1 = R2·C2`.
#[must_use]
pub fn equation(condition: &Polynomial, names: &Names<'_>) -> (Math, Math) {
    let (_, whole) = by_powers_of_s(condition, names).split_sign();
    let terms = whole.terms();
    let side = |wanted: bool| {
        let terms = terms.iter().filter(|(negative, _)| *negative == wanted);
        Math::sum(terms.map(|(_, body)| (*body).clone()))
    };
    match (side(false), side(true)) {
        (number @ Math::Number(_), other) => (other, number),
        sides => sides,
    }
}

/// N/D, reduced beforehand by whoever made it, each side by powers of s.
#[must_use]
pub fn ratio(numerator: &Polynomial, denominator: &Polynomial, names: &Names<'_>) -> Math {
    Math::quotient(
        by_powers_of_s(numerator, names),
        by_powers_of_s(denominator, names),
    )
}

/// Rank in byte order and exponent of each symbol, with the total degree in front.
type Key = (u32, SmallVec<[(u32, u32); 8]>);

fn compare_keys(left: &Key, right: &Key) -> Ordering {
    left.0.cmp(&right.0).then_with(|| {
        let mut pairs = left.1.iter().zip(right.1.iter());
        pairs
            .find_map(|(left, right)| {
                let order = left.0.cmp(&right.0).then(right.1.cmp(&left.1));
                (order != Ordering::Equal).then_some(order)
            })
            .unwrap_or(right.1.len().cmp(&left.1.len()))
    })
}

/// Places of the symbols of one polynomial, in both orders, found once.
struct TermOrder {
    first: usize,
    by_name: Vec<u32>,
    reading: Vec<u32>,
    spelled: Vec<Arc<str>>,
}

impl TermOrder {
    fn new(polynomial: &Polynomial, names: &Names<'_>) -> Self {
        let symbols = polynomial.symbols();
        let first = symbols
            .iter()
            .map(|symbol| symbol.index())
            .min()
            .unwrap_or(0);
        let last = symbols
            .iter()
            .map(|symbol| symbol.index())
            .max()
            .unwrap_or(0);
        let ranks = |compare: &dyn Fn(Symbol, Symbol) -> Ordering| {
            let mut sorted = symbols.clone();
            sorted.sort_by(|left, right| compare(*left, *right));
            let mut ranks = vec![0; last - first + 1];
            for (rank, symbol) in (0_u32..).zip(sorted) {
                ranks[symbol.index() - first] = rank;
            }
            ranks
        };
        let mut spelled = vec![Arc::from(""); last - first + 1];
        for symbol in &symbols {
            spelled[symbol.index() - first] = Arc::from(names.name(*symbol));
        }
        Self {
            first,
            spelled,
            by_name: ranks(&|left, right| names.by_name(left, right)),
            reading: ranks(&|left, right| names.by_reading(left, right)),
        }
    }

    fn key(&self, monomial: &Monomial) -> Key {
        let mut ranks: SmallVec<[(u32, u32); 8]> = monomial
            .factors()
            .map(|(symbol, exponent)| (self.by_name[symbol.index() - self.first], exponent))
            .collect();
        ranks.sort_unstable();
        (monomial.total_degree(), ranks)
    }

    fn term(&self, monomial: &Monomial, coefficient: &Integer) -> Math {
        let mut factors: SmallVec<[(Symbol, u32); 8]> = monomial.factors().collect();
        factors.sort_by_key(|(symbol, _)| self.reading[symbol.index() - self.first]);
        let symbols = factors.into_iter().map(|(symbol, exponent)| {
            Math::Symbol(self.spelled[symbol.index() - self.first].clone()).power(exponent)
        });
        Math::product(std::iter::once(Math::integer(coefficient)).chain(symbols))
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::network::NetworkBuilder;
    use crate::render::linear::{MACHINE, READING};
    use crate::render::names::FrequencyPlace;
    use crate::source::{Sources, Span};

    /// A builder, and the polynomial made by `make` of the named symbols.
    fn with_symbols(
        list: &[&str],
        make: impl Fn(&[Polynomial]) -> Polynomial,
    ) -> (NetworkBuilder, Polynomial) {
        let source = Sources::new().add("test", "");
        let mut builder = NetworkBuilder::new(Span::new(source, 0, 0));
        let symbols: Vec<Polynomial> = list
            .iter()
            .map(|name| match *name {
                "s" => Polynomial::symbol(Symbol::S),
                "pi" => Polynomial::symbol(Symbol::PI),
                name => Polynomial::symbol(builder.symbols().intern(name)),
            })
            .collect();
        let polynomial = make(&symbols);
        (builder, polynomial)
    }

    fn machine(list: &[&str], make: impl Fn(&[Polynomial]) -> Polynomial) -> String {
        let (builder, value) = with_symbols(list, make);
        let names = Names::new(builder.network(), FrequencyPlace::Last);
        MACHINE.spell(&polynomial(&value, &names))
    }

    #[test]
    fn numbers_then_resistors_then_capacitors_then_s() {
        let spelled = machine(&["C3", "R3", "s"], |it| {
            Polynomial::one() + &(&it[0] * &it[1]) * &it[2]
        });
        assert_eq!(spelled, "1 + R3*C3*s");
        let spelled = machine(&["C1", "R1"], |it| {
            Polynomial::constant(3_i64) * (&it[0] * &it[1])
        });
        assert_eq!(spelled, "3*R1*C1");
    }

    #[test]
    fn terms_stand_by_degree_then_by_bytes() {
        let spelled = machine(&["R2", "C2", "R1", "C1"], |it| {
            &(&it[2] * &it[3]) - &(&it[0] * &it[1])
        });
        assert_eq!(spelled, "R1*C1 - R2*C2");
        let spelled = machine(&["R10", "R2", "R1"], |it| {
            (&it[0] + &it[1]) + it[2].pow(2) + &it[2] * &it[0]
        });
        assert_eq!(spelled, "R10 + R2 + R1^2 + R1*R10");
    }

    #[test]
    fn gains_stand_before_conductances_and_pi_before_both() {
        let spelled = machine(&["gm", "A0", "R1", "L1", "M_T1", "C1", "pi"], |it| {
            it.iter()
                .fold(Polynomial::constant(2_i64), |product, it| &product * it)
        });
        assert_eq!(spelled, "2*pi*A0*gm*R1*L1*C1*M_T1");
    }

    #[test]
    fn for_reading_powers_of_s_stand_once_and_first() {
        let (builder, value) = with_symbols(&["R1", "R2", "C1", "s"], |it| {
            let slope = &(&it[0] * &it[2]) + &(&it[1] * &it[2]);
            let square = &(&it[0] * &it[1]) * &(&it[2] * &it[2]);
            let linear = -(&slope * &it[3]);
            Polynomial::one() + linear + square * it[3].pow(2)
        });
        let names = Names::new(builder.network(), FrequencyPlace::First);
        assert_eq!(
            READING.spell(&by_powers_of_s(&value, &names)),
            "1 − s·C1·(R1 + R2) + s²·R1·R2·C1²"
        );
    }

    #[test]
    fn zero_and_negative_polynomials_are_spelled() {
        assert_eq!(machine(&[], |_| Polynomial::zero()), "0");
        assert_eq!(machine(&["R1"], |it| -it[0].clone()), "-R1");
    }

    #[test]
    fn nested_form_takes_common_symbols_out() {
        let (builder, value) = with_symbols(&["R1", "R2", "C1", "C2"], |it| {
            &(&it[0] + &it[1]) * &(&it[2] + &it[3])
        });
        let names = Names::new(builder.network(), FrequencyPlace::Last);
        let spelled = MACHINE.spell(&crate::render::nest::nested(&value, &names));
        assert_eq!(spelled, "(R1 + R2)*(C1 + C2)");
    }
}
