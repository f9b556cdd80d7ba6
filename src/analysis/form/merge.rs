//! Pairs of symbols joined into one, until no pair acts through one combination alone.

use std::collections::BTreeMap;

use crate::algebra::{Fraction, Integer, Polynomial, Symbol};
use crate::analysis::form::gradient::{Gradient, Kind, Pattern};
use crate::analysis::form::tree::Form;
use crate::budget::{Budget, Exceeded};
use crate::network::Dimension;

/// A function of symbols, each of which stands for a form.
#[derive(Clone, Debug)]
pub(crate) struct State {
    /// The function.
    pub(crate) fraction: Fraction,
    /// What the symbols stand for, and its dimension where that is known.
    pub(crate) members: BTreeMap<Symbol, Member>,
}

/// What a symbol stands for.
#[derive(Clone, Debug)]
pub(crate) struct Member {
    pub(crate) form: Form,
    pub(crate) dimension: Option<Dimension>,
}

/// Sums and products alone, or ratios too.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Range {
    Plain,
    WithRatios,
}

const PLAIN: [Kind; 3] = [Kind::Sum, Kind::Parallel, Kind::Product];
const ALL: [Kind; 8] = [
    Kind::Sum,
    Kind::Parallel,
    Kind::ParallelWithInverse,
    Kind::SumWithInverse,
    Kind::Product,
    Kind::Ratio,
    Kind::ShiftedProduct,
    Kind::ShiftedRatio,
];

impl State {
    /// Joins pairs as long as there are any.
    ///
    /// Cost: at most one step for each symbol, each with one gradient and v² looks at it.
    pub(crate) fn merged(mut self, range: Range, budget: &Budget) -> Result<Self, Exceeded> {
        let kinds: &[Kind] = match range {
            Range::Plain => &PLAIN,
            Range::WithRatios => &ALL,
        };
        while let Some((x, y, pattern)) = self.next(kinds) {
            let joining = |x, y| joined(&self.fraction, x, y, pattern, budget);
            let Some(mut joined) = joining(x, y)? else {
                break;
            };
            let (mut x, mut y) = (x, y);
            // A ratio fits upside down too; the one that stands above the bar is wanted.
            if pattern == Pattern::Ratio
                && let Some(other) = joining(y, x)?
                && other.denominator().total_degree() < joined.denominator().total_degree()
            {
                joined = other;
                (x, y) = (y, x);
            }
            self.join(x, y, pattern);
            self.fraction = joined;
        }
        Ok(self)
    }

    fn next(&self, kinds: &[Kind]) -> Option<(Symbol, Symbol, Pattern)> {
        let symbols = self.fraction.symbols();
        if symbols.len() < 2 {
            return None;
        }
        let gradient = Gradient::new(&self.fraction, &symbols);
        for kind in kinds {
            for (place, &first) in symbols.iter().enumerate() {
                for (offset, &second) in symbols.iter().enumerate().skip(place + 1) {
                    for (x, y, one, other) in [
                        (place, offset, first, second),
                        (offset, place, second, first),
                    ] {
                        if self.suits(*kind, one, other)
                            && let Some(pattern) = gradient.pattern(x, y, *kind)
                        {
                            return Some((gradient.symbols()[x], gradient.symbols()[y], pattern));
                        }
                    }
                }
            }
        }
        None
    }

    /// Whether a reader would accept the combination: ∥ stands between resistances and between
    /// inductances only.
    fn suits(&self, kind: Kind, x: Symbol, y: Symbol) -> bool {
        let of = |symbol| self.members.get(&symbol).and_then(|it| it.dimension);
        let in_parallel = [Some(Dimension::OHM), Some(Dimension::HENRY)];
        match kind {
            Kind::Parallel => of(x) == of(y) && in_parallel.contains(&of(x)),
            Kind::ParallelWithInverse => {
                of(x) == Some(Dimension::OHM) && of(y) == Some(Dimension::SIEMENS)
            }
            _ => true,
        }
    }

    /// Puts the combination in the place of the symbol that stays.
    fn join(&mut self, x: Symbol, y: Symbol, pattern: Pattern) {
        let (Some(first), Some(second)) = (self.members.remove(&x), self.members.remove(&y)) else {
            return;
        };
        let times = |power: i32| {
            let other = second.dimension?.power(power);
            Some(first.dimension?.times(other))
        };
        let scaled = |factor: i64| {
            Form::product([Form::integer(&Integer::from(factor)), first.form.clone()])
        };
        let inverse = || Form::quotient(Form::one(), second.form.clone());
        let shifted =
            |shift: i64| Form::sum([first.form.clone(), Form::integer(&Integer::from(shift))]);
        let own = second.form.clone();
        let (stays, form, dimension) = match pattern {
            Pattern::Sum(c) => (y, Form::sum([scaled(c), own]), second.dimension),
            Pattern::Parallel(c) => (y, Form::parallel([scaled(c), own]), second.dimension),
            Pattern::SumWithInverse => {
                let form = Form::sum([first.form.clone(), inverse()]);
                (x, form, first.dimension)
            }
            Pattern::ParallelWithInverse => {
                let form = Form::parallel([first.form.clone(), inverse()]);
                (x, form, first.dimension)
            }
            Pattern::Product => (y, Form::product([first.form.clone(), own]), times(1)),
            Pattern::Ratio => (x, Form::quotient(first.form.clone(), own), times(-1)),
            Pattern::ShiftedProduct(c) => (y, Form::product([shifted(c), own]), second.dimension),
            Pattern::ShiftedRatio(c) => (x, Form::quotient(shifted(c), own), times(-1)),
        };
        self.members.insert(stays, Member { form, dimension });
    }
}

/// The function over the combination: F(u) with u in the place of the symbol that stays.
fn joined(
    fraction: &Fraction,
    x: Symbol,
    y: Symbol,
    pattern: Pattern,
    budget: &Budget,
) -> Result<Option<Fraction>, Exceeded> {
    let (above, below) = (fraction.numerator(), fraction.denominator());
    let at = |symbol: Symbol, value: &Polynomial| {
        Fraction::new(
            above.substitute(symbol, value),
            below.substitute(symbol, value),
            budget,
        )
    };
    // The limit for a symbol that grows without bound.
    let far = |symbol: Symbol| {
        let degree = above.degree(symbol).max(below.degree(symbol)) as usize;
        let part = |side: &Polynomial| side.coefficients(symbol).get(degree).cloned();
        let [above, below] = [above, below].map(|side| part(side).unwrap_or_default());
        Fraction::new(above, below, budget)
    };
    let number = |value: i64| Polynomial::constant(value);
    match pattern {
        Pattern::Sum(_) => at(x, &Polynomial::zero()),
        Pattern::Parallel(_) => far(x),
        Pattern::SumWithInverse => far(y),
        Pattern::ParallelWithInverse => at(y, &Polynomial::zero()),
        Pattern::Product => at(x, &number(1)),
        Pattern::Ratio => at(y, &number(1)),
        Pattern::ShiftedProduct(c) => at(x, &number(1 - c)),
        Pattern::ShiftedRatio(c) => {
            let moved = &Polynomial::symbol(x) - &number(c);
            let [above, below] =
                [above, below].map(|side| side.substitute(y, &number(1)).substitute(x, &moved));
            Fraction::new(above, below, budget)
        }
    }
}
