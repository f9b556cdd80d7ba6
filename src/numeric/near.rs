//! Poles and zeros that almost cancel: closer than the tolerances of the parts can hold apart.

use std::collections::{BTreeMap, BTreeSet};

use nalgebra::Complex;

use crate::algebra::{Polynomial, Rational, Symbol};
use crate::analysis::report::Expanded;
use crate::budget::{Budget, Exceeded};
use crate::numeric::big::{Big, BigComplex};
use crate::numeric::nominal::Nominals;
use crate::numeric::quotient::{Quotient, Tail};
use crate::numeric::roots::{Root, value_at};

/// Bits of slopes.
const BITS: u64 = 192;

/// Pairs farther apart than this fraction of the pole are told apart by any part.
const FARTHEST: f64 = 0.5;

/// A pole and a zero that the tolerances cannot hold apart.
#[derive(Clone, Debug)]
pub struct Near {
    /// The pole, in rad/s.
    pub pole: Complex<f64>,
    /// The zero, in rad/s.
    pub zero: Complex<f64>,
    /// |pole − zero|, in rad/s.
    pub distance: f64,
    /// How far the zero lies beyond the pole, as a fraction of the pole: (zero − pole)/pole for real
    /// ones, the distance for complex ones.
    pub apart: f64,
    /// The same at the two corners of the tolerances that move the pair most.
    pub over_tolerance: Option<(f64, f64)>,
    /// Residue of the function at the pole; `None` where the pole is multiple.
    pub residue: Option<Complex<f64>>,
    /// What the pole leaves in the step response.
    pub tail: Option<Tail>,
    /// Parts whose tolerance was not stated and taken as the default.
    pub assumed: Vec<String>,
    /// Whether some tolerance was stated.
    pub stated: bool,
}

impl Near {
    /// Whether pole and zero of a real pair pass through each other within the tolerances.
    #[must_use]
    pub fn can_meet(&self) -> bool {
        let real = self.pole.im == 0.0 && self.zero.im == 0.0;
        real && self
            .over_tolerance
            .is_some_and(|(low, high)| low <= 0.0 && high >= 0.0)
    }
}

/// Slopes of a polynomial in s: for each symbol x the coefficients of x·∂/∂x at the nominals.
pub(super) type Slopes = BTreeMap<Symbol, Vec<Big>>;

/// The pairs of a function, by the size of the pole.
///
/// The bound is that of first order: a pair is near where |p − z| is no more than what the tolerances
/// move p, or z, or both against each other: Σ |∂p/∂ln x|·tolerance(x), and so for z and p − z. Where
/// parts move both alike the pair stays apart, and is still a doublet with a slow tail.
///
/// # Errors
/// When the budget is reached.
pub fn near(
    expanded: &Expanded,
    quotient: &Quotient,
    nominals: &Nominals<'_>,
    budget: &Budget,
) -> Result<Vec<Near>, Exceeded> {
    let quotient = quotient.reduced(budget)?;
    let candidates = nearest_pairs(&quotient);
    if candidates.is_empty() {
        return Ok(Vec::new());
    }
    let above = Side::new(&expanded.numerator, nominals, budget)?;
    let below = Side::new(&expanded.denominator, nominals, budget)?;
    let symbols: BTreeSet<Symbol> = above
        .slopes
        .keys()
        .chain(below.slopes.keys())
        .copied()
        .collect();
    let mut found = Vec::new();
    for (pole, zero) in candidates {
        let moves: Vec<Move> = symbols
            .iter()
            .map(|&symbol| Move {
                symbol,
                pole: below.shift(symbol, pole),
                zero: above.shift(symbol, zero),
            })
            .collect();
        let reach = reach(&below, pole, &above, zero, &moves, nominals);
        let between = (&zero.centre - &pole.centre).to_f64();
        if between.norm() > reach {
            continue;
        }
        found.push(describe(
            Pair {
                pole,
                zero,
                between,
            },
            &moves,
            expanded,
            &quotient,
            nominals,
            budget,
        )?);
    }
    Ok(found)
}

/// Poles and zeros that are each other's nearest, 0 left out.
fn nearest_pairs(quotient: &Quotient) -> Vec<(&Root, &Root)> {
    let moving = |roots: &'_ [Root]| -> Vec<usize> {
        (0..roots.len())
            .filter(|&index| roots[index].centre != BigComplex::zero())
            .collect()
    };
    let nearest = |root: &Root, others: &[Root]| {
        moving(others)
            .into_iter()
            .min_by_key(|&index| (&others[index].centre - &root.centre).square_norm())
    };
    let mut pairs = Vec::new();
    for index in moving(&quotient.poles) {
        let pole = &quotient.poles[index];
        let Some(partner) = nearest(pole, &quotient.zeros) else {
            continue;
        };
        let zero = &quotient.zeros[partner];
        let distance = (&zero.centre - &pole.centre).to_f64().norm();
        let mutual = nearest(zero, &quotient.poles) == Some(index);
        if mutual && distance < FARTHEST * pole.centre.to_f64().norm() {
            pairs.push((pole, zero));
        }
    }
    pairs
}

/// How a part moves both, for a relative change of one.
struct Move {
    symbol: Symbol,
    pole: Complex<f64>,
    zero: Complex<f64>,
}

/// One side of the function with what its roots depend on.
pub(super) struct Side {
    polynomial: Vec<Big>,
    pub(super) slopes: Slopes,
}

impl Side {
    pub(super) fn new(
        coefficients: &[Polynomial],
        nominals: &Nominals<'_>,
        budget: &Budget,
    ) -> Result<Self, Exceeded> {
        let mut polynomial = vec![Big::zero(); coefficients.len()];
        let mut own: Slopes = BTreeMap::new();
        let rounded: BTreeMap<Symbol, Big> = coefficients
            .iter()
            .flat_map(Polynomial::symbols)
            .filter_map(|symbol| {
                let value = nominals.value(symbol)?;
                Some((symbol, Big::from_rational(value, BITS)))
            })
            .collect();
        for (power, coefficient) in coefficients.iter().enumerate() {
            budget.time()?;
            for (monomial, number) in coefficient.terms() {
                let mut term = Big::from(number);
                for (symbol, exponent) in monomial.factors() {
                    for _ in 0..exponent {
                        if let Some(value) = rounded.get(&symbol) {
                            term = (&term * value).round(BITS);
                        }
                    }
                }
                polynomial[power] = (&polynomial[power] + &term).round(BITS);
                for (symbol, exponent) in monomial.factors() {
                    if symbol == Symbol::PI {
                        continue;
                    }
                    let list = own
                        .entry(symbol)
                        .or_insert_with(|| vec![Big::zero(); coefficients.len()]);
                    let share = &term * &Big::from_f64(f64::from(exponent));
                    list[power] = (&list[power] + &share).round(BITS);
                }
            }
        }
        Ok(Self {
            polynomial,
            slopes: chained(&own, nominals),
        })
    }

    /// dp/dln x of a root, to first order; for a multiple root 0 (see [`Side::spread_of_multiple`]).
    pub(super) fn shift(&self, symbol: Symbol, root: &Root) -> Complex<f64> {
        let Some(slopes) = self.slopes.get(&symbol) else {
            return Complex::new(0.0, 0.0);
        };
        if root.multiplicity > 1 {
            return Complex::new(0.0, 0.0);
        }
        let below = value_at(&derivative(&self.polynomial), &root.centre);
        let above = value_at(slopes, &root.centre);
        settled(-above.div(&below, BITS).to_f64(), root)
    }

    /// How far the parts of a root of multiplicity m can go: (m!·Σ|x ∂P/∂x|·tolerance / |P⁽ᵐ⁾|)^(1/m).
    fn spread_of_multiple(&self, root: &Root, nominals: &Nominals<'_>) -> f64 {
        if root.multiplicity == 1 {
            return 0.0;
        }
        let mut below = self.polynomial.clone();
        let mut factorial = 1.0;
        for step in 1..=root.multiplicity {
            below = derivative(&below);
            factorial *= f64::from(step);
        }
        let below = value_at(&below, &root.centre).to_f64().norm();
        let change: f64 = self
            .slopes
            .iter()
            .map(|(&symbol, slopes)| {
                value_at(slopes, &root.centre).to_f64().norm() * widest(nominals, symbol)
            })
            .sum();
        (factorial * change / below).powf(1.0 / f64::from(root.multiplicity))
    }
}

/// Slopes by independent symbols: a mutual inductance k·√(L1·L2) follows k, L1 and L2.
fn chained(own: &Slopes, nominals: &Nominals<'_>) -> Slopes {
    let network = nominals.network();
    let mut all = Slopes::new();
    for facts in network.all_facts() {
        for (follower, slope) in nominals.follows(facts.symbol) {
            let (Some(list), Some(value)) = (own.get(&follower), nominals.value(follower)) else {
                continue;
            };
            let Some(share) = value.recip().map(|inverse| &slope * &inverse) else {
                continue;
            };
            let share = Big::from_rational(&share, BITS);
            let sum = all
                .entry(facts.symbol)
                .or_insert_with(|| vec![Big::zero(); list.len()]);
            for (target, part) in sum.iter_mut().zip(list) {
                *target = (&*target + &(part * &share)).round(BITS);
            }
        }
    }
    all
}

/// A shift without the dust that is left where it is 0 and the root is known to its radius only.
pub(super) fn settled(shift: Complex<f64>, root: &Root) -> Complex<f64> {
    const DUST: f64 = 1e-20;
    let size = root.centre.to_f64().norm();
    let clean = |part: f64| if part.abs() < DUST * size { 0.0 } else { part };
    Complex::new(clean(shift.re), clean(shift.im))
}

pub(super) fn derivative(coefficients: &[Big]) -> Vec<Big> {
    let powers = (1_u32..).map(|power| Big::from_f64(f64::from(power)));
    let rest = coefficients.iter().skip(1);
    rest.zip(powers).map(|(it, power)| it * &power).collect()
}

/// The larger deviation of a symbol.
fn widest(nominals: &Nominals<'_>, symbol: Symbol) -> f64 {
    let spread = nominals.spread(symbol);
    let widest = spread.up.max(spread.down);
    Big::from_rational(&widest, 64).to_f64()
}

/// How far the tolerances can move pole or zero, or both against each other, to first order.
fn reach(
    below: &Side,
    pole: &Root,
    above: &Side,
    zero: &Root,
    moves: &[Move],
    nominals: &Nominals<'_>,
) -> f64 {
    let multiple =
        below.spread_of_multiple(pole, nominals) + above.spread_of_multiple(zero, nominals);
    let sum = |shift: &dyn Fn(&Move) -> Complex<f64>| -> f64 {
        let moves = moves.iter();
        moves
            .map(|it| shift(it).norm() * widest(nominals, it.symbol))
            .sum()
    };
    let against = sum(&|it| it.pole - it.zero);
    let alone = sum(&|it| it.pole).max(sum(&|it| it.zero));
    multiple + against.max(alone)
}

struct Pair<'a> {
    pole: &'a Root,
    zero: &'a Root,
    /// zero − pole
    between: Complex<f64>,
}

fn describe(
    pair: Pair<'_>,
    moves: &[Move],
    expanded: &Expanded,
    quotient: &Quotient,
    nominals: &Nominals<'_>,
    budget: &Budget,
) -> Result<Near, Exceeded> {
    let (pole, zero) = (pair.pole.centre.to_f64(), pair.zero.centre.to_f64());
    let real = pair.pole.is_real() && pair.zero.is_real();
    let simple = pair.pole.multiplicity == 1 && pair.zero.multiplicity == 1;
    let apart = |pole: Complex<f64>, zero: Complex<f64>| {
        if real {
            ((zero - pole) / pole).re
        } else {
            (zero - pole).norm() / pole.norm()
        }
    };
    let mut over_tolerance = None;
    if simple {
        let mut ends = Vec::new();
        for wider in [false, true] {
            let corner = Corner {
                pair: &pair,
                moves,
                wider,
            };
            if let Some((pole, zero)) = corner.roots(expanded, nominals, budget)? {
                ends.push(apart(pole, zero));
            }
        }
        if let [one, other] = ends[..] {
            over_tolerance = Some((one.min(other), one.max(other)));
        }
    }
    let concerned = moves
        .iter()
        .filter(|it| it.pole.norm() > 0.0 || it.zero.norm() > 0.0);
    let (stated, assumed): (Vec<Symbol>, Vec<Symbol>) = concerned
        .map(|it| it.symbol)
        .partition(|&symbol| nominals.spread(symbol).stated);
    let name = |symbol: Symbol| nominals.network().symbols().name(symbol).to_owned();
    let residue = quotient.residue(pair.pole);
    Ok(Near {
        pole,
        zero,
        distance: pair.between.norm(),
        apart: apart(pole, zero),
        over_tolerance,
        residue,
        tail: residue.and_then(|residue| quotient.tail(pole, residue)),
        assumed: assumed.into_iter().map(name).collect(),
        stated: !stated.is_empty(),
    })
}

/// Pole and zero.
type Places = (Complex<f64>, Complex<f64>);

/// The corner of the tolerances that moves a pair most, apart or together.
struct Corner<'a> {
    pair: &'a Pair<'a>,
    moves: &'a [Move],
    wider: bool,
}

impl Corner<'_> {
    /// Deviation of each symbol at the corner.
    fn deviation(&self, it: &Move, nominals: &Nominals<'_>) -> Rational {
        let along = self.pair.between.conj() * (it.zero - it.pole);
        let spread = nominals.spread(it.symbol);
        if along.re == 0.0 {
            Rational::zero()
        } else if (along.re > 0.0) == self.wider {
            spread.up
        } else {
            -spread.down
        }
    }

    /// Pole and zero there: those nearest to where the slopes take them.
    fn roots(
        &self,
        expanded: &Expanded,
        nominals: &Nominals<'_>,
        budget: &Budget,
    ) -> Result<Option<Places>, Exceeded> {
        let mut values: BTreeMap<Symbol, Rational> = BTreeMap::new();
        let (mut pole, mut zero) = (
            self.pair.pole.centre.to_f64(),
            self.pair.zero.centre.to_f64(),
        );
        for it in self.moves {
            let deviation = self.deviation(it, nominals);
            let size = Big::from_rational(&deviation, 64).to_f64();
            pole += it.pole * size;
            zero += it.zero * size;
            let factor = &Rational::one() + &deviation;
            for (symbol, slope) in nominals.follows(it.symbol) {
                let Some(nominal) = nominals.value(symbol) else {
                    continue;
                };
                let before = values.get(&symbol).unwrap_or(nominal).clone();
                let value = if symbol == it.symbol {
                    &before * &factor
                } else {
                    // A mutual inductance, to first order in its coils.
                    &before + &(&slope * &deviation)
                };
                values.insert(symbol, value);
            }
        }
        let value = |symbol: Symbol| {
            values
                .get(&symbol)
                .or_else(|| nominals.value(symbol))
                .cloned()
        };
        let there = Quotient::at(expanded, &value, budget)?;
        Ok(there.and_then(|there| {
            let pole = closest(&there.poles, pole)?;
            Some((pole, closest(&there.zeros, zero)?))
        }))
    }
}

fn closest(roots: &[Root], to: Complex<f64>) -> Option<Complex<f64>> {
    let places = roots.iter().map(|root| root.centre.to_f64());
    places.min_by(|a, b| (a - to).norm().total_cmp(&(b - to).norm()))
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn derivatives_of_numbers() {
        let polynomial = [5.0, -3.0, 2.0].map(Big::from_f64);
        let slopes: Vec<f64> = derivative(&polynomial).iter().map(Big::to_f64).collect();
        assert_eq!(slopes, [-3.0, 4.0]);
    }
}
