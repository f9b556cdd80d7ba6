//! Which pairs of symbols act through one combination alone.
//!
//! f depends on x and y only through g(x, y) exactly when f_x/f_y = g_x/g_y. The ratio tells the
//! combination: a constant for sums, y²/x² for parallel ones, y/x for products, and so on. It is tried
//! modulo a prime at three random points; whoever uses a pair proves the form made of it.

use crate::algebra::{Fraction, PrimeField, Symbol};
use crate::analysis::point::residue;

/// How two symbols act together.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Pattern {
    /// c·x + y, c ≠ 0
    Sum(i64),
    /// c·x ∥ y, c > 0
    Parallel(i64),
    /// x + 1/y
    SumWithInverse,
    /// x ∥ 1/y
    ParallelWithInverse,
    /// x·y
    Product,
    /// x/y
    Ratio,
    /// (x + c)·y, c ≠ 0
    ShiftedProduct(i64),
    /// (x + c)/y, c ≠ 0
    ShiftedRatio(i64),
}

/// Largest number that is looked for as a constant.
const MOST: i64 = 9;
/// Points at which a pattern has to fit.
const POINTS: u64 = 3;

/// Values and derivatives of a fraction at random points.
pub(crate) struct Gradient {
    field: PrimeField,
    symbols: Vec<Symbol>,
    /// For each point: values of the symbols, and the derivatives up to a common factor.
    points: Vec<(Vec<u64>, Vec<u64>)>,
}

impl Gradient {
    /// The gradient over these symbols.
    ///
    /// Cost: one derivative of numerator and denominator for each symbol.
    pub(crate) fn new(fraction: &Fraction, symbols: &[Symbol]) -> Self {
        let field = PrimeField::default_prime();
        let (above, below) = (fraction.numerator(), fraction.denominator());
        let slopes: Vec<_> = symbols
            .iter()
            .map(|symbol| (above.derivative(*symbol), below.derivative(*symbol)))
            .collect();
        let points = (0..POINTS).map(|point| {
            let value = |symbol: Symbol| residue(&field, 40_961 + point, 0, symbol);
            let over = above.value_mod(&field, &value);
            let under = below.value_mod(&field, &value);
            let derivatives = slopes.iter().map(|(rise, fall)| {
                let gain = field.mul(rise.value_mod(&field, &value), under);
                let loss = field.mul(fall.value_mod(&field, &value), over);
                field.sub(gain, loss)
            });
            let derivatives: Vec<u64> = derivatives.collect();
            (symbols.iter().map(|it| value(*it)).collect(), derivatives)
        });
        Self {
            points: points.collect(),
            field,
            symbols: symbols.to_vec(),
        }
    }

    /// The symbols, in the order given.
    pub(crate) fn symbols(&self) -> &[Symbol] {
        &self.symbols
    }

    /// The combinations through which the x-th and the y-th symbol act, if there is one of this kind.
    pub(crate) fn pattern(&self, x: usize, y: usize, kind: Kind) -> Option<Pattern> {
        let field = &self.field;
        let mut found = None;
        for (values, derivatives) in &self.points {
            let ratio = field.mul(derivatives[x], field.inv(derivatives[y])?);
            if ratio == 0 {
                return None;
            }
            let pattern = self.fitting(kind, ratio, values[x], values[y])?;
            if *found.get_or_insert(pattern) != pattern {
                return None;
            }
        }
        found
    }

    /// The pattern at one point.
    fn fitting(&self, kind: Kind, ratio: u64, x: u64, y: u64) -> Option<Pattern> {
        let field = &self.field;
        let over = |above: u64, below: u64| Some(field.mul(above, field.inv(below)?));
        match kind {
            Kind::Sum => self.small(ratio).map(Pattern::Sum),
            Kind::Parallel => {
                // ratio = y²/(c·x²)
                let square = field.mul(y, y);
                let factor = over(square, field.mul(ratio, field.mul(x, x)))?;
                let factor = self.small(factor).filter(|factor| *factor > 0);
                factor.map(Pattern::Parallel)
            }
            Kind::SumWithInverse => {
                let fits = ratio == field.neg(field.mul(y, y));
                fits.then_some(Pattern::SumWithInverse)
            }
            Kind::ParallelWithInverse => {
                let fits = ratio == field.neg(over(1, field.mul(x, x))?);
                fits.then_some(Pattern::ParallelWithInverse)
            }
            Kind::Product => (ratio == over(y, x)?).then_some(Pattern::Product),
            Kind::Ratio => (ratio == field.neg(over(y, x)?)).then_some(Pattern::Ratio),
            Kind::ShiftedProduct => {
                let shift = field.sub(over(y, ratio)?, x);
                self.small(shift).map(Pattern::ShiftedProduct)
            }
            Kind::ShiftedRatio => {
                let shift = field.sub(field.neg(over(y, ratio)?), x);
                self.small(shift).map(Pattern::ShiftedRatio)
            }
        }
    }

    /// A small whole number other than zero with this residue.
    fn small(&self, value: u64) -> Option<i64> {
        (-MOST..=MOST).find(|number| *number != 0 && self.field.from_i64(*number) == value)
    }
}

/// Kinds of patterns, in the order in which they are looked for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Kind {
    Sum,
    Parallel,
    SumWithInverse,
    ParallelWithInverse,
    Product,
    Ratio,
    ShiftedProduct,
    ShiftedRatio,
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::algebra::{Polynomial, SymbolTable};
    use crate::budget::Budget;

    fn pattern(
        kind: Kind,
        make: impl Fn(&Polynomial, &Polynomial, &Polynomial) -> [Polynomial; 2],
    ) -> Option<Pattern> {
        let mut table = SymbolTable::new();
        let symbols = ["x", "y", "z"].map(|name| table.intern(name));
        let [x, y, z] = symbols.map(Polynomial::symbol);
        let [above, below] = make(&x, &y, &z);
        let fraction = Fraction::new(above, below, &Budget::unlimited());
        let fraction = fraction.expect("no budget").expect("not by zero");
        Gradient::new(&fraction, &symbols).pattern(0, 1, kind)
    }

    #[test]
    fn each_combination_is_known_by_its_ratio() {
        let one = Polynomial::one;
        let two = Polynomial::constant(2_i64);
        let sum = pattern(Kind::Sum, |x, y, z| [z * &(&(x * &two) + y), one()]);
        assert_eq!(sum, Some(Pattern::Sum(2)));
        let parallel = pattern(Kind::Parallel, |x, y, z| [&(x * y) * z, x + y]);
        assert_eq!(parallel, Some(Pattern::Parallel(1)));
        let inverse = pattern(Kind::SumWithInverse, |x, y, z| {
            [z * &(&(x * y) + &one()), y.clone()]
        });
        assert_eq!(inverse, Some(Pattern::SumWithInverse));
        let inverse = pattern(Kind::ParallelWithInverse, |x, y, z| {
            [z * x, &(x * y) + &one()]
        });
        assert_eq!(inverse, Some(Pattern::ParallelWithInverse));
        let product = pattern(Kind::Product, |x, y, z| [&(x * y) + z, one()]);
        assert_eq!(product, Some(Pattern::Product));
        let ratio = pattern(Kind::Ratio, |x, y, z| [x * z, x + y]);
        assert_eq!(ratio, Some(Pattern::Ratio));
        let shifted = pattern(Kind::ShiftedProduct, |x, y, z| {
            [&(&(x + &one()) * y) + z, one()]
        });
        assert_eq!(shifted, Some(Pattern::ShiftedProduct(1)));
        let shifted = pattern(Kind::ShiftedRatio, |x, y, z| {
            [&(x - &two) + &(z * y), y.clone()]
        });
        assert_eq!(shifted, Some(Pattern::ShiftedRatio(-2)));
        let none = pattern(Kind::Sum, |x, y, z| [&(x * z) + y, one()]);
        assert_eq!(none, None);
    }
}
