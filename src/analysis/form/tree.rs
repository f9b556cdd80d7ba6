//! Expressions with a value: what a form says is computed back and compared with what it stands for.

use crate::algebra::{Fraction, Integer, Polynomial, Rational, Symbol};
use crate::budget::{Budget, Exceeded};

/// An expression over the symbols of a network. Members of sums, products and parallel combinations
/// stand in no particular order; writers put them in theirs.
#[derive(Clone, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Form {
    /// A whole number, not negative.
    Number(Integer),
    /// A symbol.
    Symbol(Symbol),
    /// At least two terms.
    Sum(Vec<Form>),
    /// At least two factors, none of them a quotient or a minus.
    Product(Vec<Form>),
    /// Above and below the bar, neither a quotient nor a minus.
    Quotient(Box<Form>, Box<Form>),
    /// Exponent at least two.
    Power(Box<Form>, u32),
    /// At least two members: 1/(Σ 1/x).
    Parallel(Vec<Form>),
    /// Square root of something positive.
    Root(Box<Form>),
    /// Minus what follows.
    Negative(Box<Form>),
}

/// Length of a form: leaves first, then operations.
pub(crate) type Length = (usize, usize);

impl Form {
    /// A whole number of any sign.
    #[must_use]
    pub fn integer(value: &Integer) -> Self {
        Self::Number(value.abs()).signed(value.signum() < 0)
    }

    /// A rational number.
    #[must_use]
    pub fn rational(value: &Rational) -> Self {
        Self::quotient(
            Self::integer(value.numerator()),
            Self::integer(value.denominator()),
        )
    }

    /// 1
    #[must_use]
    pub fn one() -> Self {
        Self::Number(Integer::one())
    }

    /// Whether it is the number 1.
    #[must_use]
    pub fn is_one(&self) -> bool {
        matches!(self, Self::Number(number) if number.is_one())
    }

    /// Whether it is the number 0.
    #[must_use]
    pub fn is_zero(&self) -> bool {
        matches!(self, Self::Number(number) if number.is_zero())
    }

    /// Itself or minus itself; a difference is turned round.
    #[must_use]
    pub fn signed(self, negative: bool) -> Self {
        match (negative, self) {
            (false, form) => form,
            (true, Self::Negative(inner)) => *inner,
            (true, form) if form.is_zero() => form,
            (true, Self::Sum(terms)) if is_difference(&terms) => Self::Sum(turned(terms)),
            (true, Self::Product(mut factors)) => {
                let place = factors
                    .iter()
                    .position(|it| matches!(it, Self::Sum(terms) if is_difference(terms)));
                match place {
                    Some(place) => {
                        let factor = std::mem::replace(&mut factors[place], Self::one());
                        factors[place] = factor.signed(true);
                        Self::Product(factors)
                    }
                    None => Self::Negative(Box::new(Self::Product(factors))),
                }
            }
            (true, Self::Quotient(above, below)) => match above.signed(true) {
                Self::Negative(above) => Self::Negative(Box::new(Self::Quotient(above, below))),
                above => Self::Quotient(Box::new(above), below),
            },
            (true, form) => Self::Negative(Box::new(form)),
        }
    }

    /// Sign and what stands behind it.
    #[must_use]
    pub fn split_sign(self) -> (bool, Self) {
        match self {
            Self::Negative(inner) => (true, *inner),
            form => (false, form),
        }
    }

    /// A sum; zeros vanish, sums within are dissolved.
    #[must_use]
    pub fn sum(parts: impl IntoIterator<Item = Self>) -> Self {
        let mut terms = Vec::new();
        for part in parts {
            let (negative, body) = part.split_sign();
            match body {
                body if body.is_zero() => {}
                Self::Sum(inner) => {
                    terms.extend(inner.into_iter().map(|term| {
                        let (minus, body) = term.split_sign();
                        body.signed(minus != negative)
                    }));
                }
                body => terms.push(body.signed(negative)),
            }
        }
        match terms.len() {
            0 => Self::Number(Integer::zero()),
            1 => terms.remove(0),
            _ if terms.iter().all(|it| matches!(it, Self::Negative(_))) => {
                Self::Negative(Box::new(Self::Sum(turned(terms))))
            }
            _ => Self::Sum(terms),
        }
    }

    /// A product; signs and divisors of its factors move out, equal factors become a power.
    #[must_use]
    pub fn product(parts: impl IntoIterator<Item = Self>) -> Self {
        let mut negative = false;
        let (mut above, mut below) = (Vec::new(), Vec::new());
        for part in parts {
            let (minus, body) = part.split_sign();
            negative ^= minus;
            match body {
                Self::Quotient(over, under) => {
                    above.push(*over);
                    below.push(*under);
                }
                body => above.push(body),
            }
        }
        let (above, below) = (gathered(above), gathered(below));
        let whole = if below.is_one() {
            above
        } else if above.is_zero() {
            return above;
        } else {
            Self::Quotient(Box::new(above), Box::new(below))
        };
        whole.signed(negative)
    }

    /// A quotient; quotients above and below the bar are dissolved.
    #[must_use]
    pub fn quotient(above: Self, below: Self) -> Self {
        let (negative, body) = below.split_sign();
        let turned = match body {
            Self::Quotient(over, under) if over.is_one() => *under,
            Self::Quotient(over, under) => Self::Quotient(under, over),
            body if body.is_one() => return above.signed(negative),
            body => Self::Quotient(Box::new(Self::one()), Box::new(body)),
        };
        Self::product([above, turned]).signed(negative)
    }

    /// A power.
    #[must_use]
    pub fn power(self, exponent: u32) -> Self {
        match (exponent, self) {
            (0, _) => Self::one(),
            (1, form) => form,
            (_, form) if form.is_one() => form,
            (_, Self::Power(base, inner)) => Self::Power(base, inner.saturating_mul(exponent)),
            (_, Self::Negative(inner)) => inner.power(exponent).signed(exponent % 2 == 1),
            (_, Self::Quotient(above, below)) => {
                Self::quotient(above.power(exponent), below.power(exponent))
            }
            (_, form) => Self::Power(Box::new(form), exponent),
        }
    }

    /// A parallel combination.
    #[must_use]
    pub fn parallel(parts: impl IntoIterator<Item = Self>) -> Self {
        let mut members = Vec::new();
        for part in parts {
            match part {
                Self::Parallel(inner) => members.extend(inner),
                other => members.push(other),
            }
        }
        if members.len() == 1 {
            return members.remove(0);
        }
        Self::Parallel(members)
    }

    /// A polynomial as the sum of its terms, with a form put in for each symbol.
    #[must_use]
    pub fn of_polynomial(polynomial: &Polynomial, form: &dyn Fn(Symbol) -> Self) -> Self {
        Self::sum(polynomial.terms().iter().map(|(monomial, coefficient)| {
            let powers = monomial.factors();
            let powers = powers.map(|(symbol, exponent)| form(symbol).power(exponent));
            Self::product(std::iter::once(Self::integer(coefficient)).chain(powers))
        }))
    }

    /// The parts of it.
    fn children(&self) -> &[Self] {
        match self {
            Self::Number(_) | Self::Symbol(_) => &[],
            Self::Sum(parts) | Self::Product(parts) | Self::Parallel(parts) => parts,
            Self::Power(inner, _) | Self::Root(inner) | Self::Negative(inner) => {
                std::slice::from_ref(inner)
            }
            Self::Quotient(..) => &[],
        }
    }

    /// Number of symbols and numbers, and of operations.
    #[must_use]
    pub(crate) fn length(&self) -> Length {
        let add = |left: Length, right: Length| (left.0 + right.0, left.1 + right.1);
        match self {
            Self::Number(_) | Self::Symbol(_) => (1, 0),
            Self::Quotient(above, below) => {
                let (leaves, operations) = add(above.length(), below.length());
                (leaves, operations + 1)
            }
            Self::Sum(parts) => {
                // A minus within a sum takes the place of a plus.
                let bodies = parts.iter().map(|part| match part {
                    Self::Negative(inner) => inner.length(),
                    part => part.length(),
                });
                let (leaves, operations) = bodies.fold((0, 0), add);
                (leaves, operations + parts.len() - 1)
            }
            _ => {
                let parts = self.children();
                let (leaves, operations) = parts.iter().map(Self::length).fold((0, 0), add);
                (leaves, operations + (parts.len() - 1).max(1))
            }
        }
    }

    /// Bars within the upper part of a bar, and twice those within a lower part.
    #[must_use]
    pub(crate) fn bars_within_bars(&self) -> usize {
        match self {
            Self::Quotient(above, below) => above.bars() + 2 * below.bars(),
            form => form.children().iter().map(Self::bars_within_bars).sum(),
        }
    }

    fn bars(&self) -> usize {
        match self {
            Self::Quotient(above, below) => 1 + above.bars() + 2 * below.bars(),
            form => form.children().iter().map(Self::bars).sum(),
        }
    }

    /// How deep sums stand within sums.
    #[must_use]
    pub(crate) fn depth(&self) -> usize {
        let deepest = |parts: &[Self]| parts.iter().map(Self::depth).max().unwrap_or(0);
        match self {
            Self::Quotient(above, below) => above.depth().max(below.depth()),
            Self::Sum(parts) => 1 + deepest(parts),
            form => deepest(form.children()),
        }
    }

    /// Whether a symbol stands in it.
    #[must_use]
    pub fn contains(&self, symbol: Symbol) -> bool {
        match self {
            Self::Symbol(own) => *own == symbol,
            Self::Quotient(above, below) => above.contains(symbol) || below.contains(symbol),
            form => form.children().iter().any(|part| part.contains(symbol)),
        }
    }

    /// What it is worth; `None` where it divides by zero or holds a root.
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn value(&self, budget: &Budget) -> Result<Option<Fraction>, Exceeded> {
        let fold =
            |parts: &[Self],
             start: Fraction,
             join: fn(&Fraction, &Fraction, &Budget) -> Result<Fraction, Exceeded>| {
                let mut total = start;
                for part in parts {
                    match part.value(budget)? {
                        Some(value) => total = join(&total, &value, budget)?,
                        None => return Ok(None),
                    }
                }
                Ok(Some(total))
            };
        match self {
            Self::Number(number) => Ok(Some(Fraction::from(number.clone()))),
            Self::Symbol(symbol) => Ok(Some(Fraction::symbol(*symbol))),
            Self::Sum(parts) => fold(parts, Fraction::zero(), Fraction::add),
            Self::Product(parts) => fold(parts, Fraction::one(), Fraction::mul),
            Self::Quotient(above, below) => match (above.value(budget)?, below.value(budget)?) {
                (Some(above), Some(below)) => above.div(&below, budget),
                _ => Ok(None),
            },
            Self::Power(base, exponent) => match (base.value(budget)?, i32::try_from(*exponent)) {
                (Some(base), Ok(exponent)) => base.pow(exponent, budget),
                _ => Ok(None),
            },
            Self::Parallel(parts) => {
                let mut total = Fraction::zero();
                for part in parts {
                    match part.value(budget)?.and_then(|value| value.recip()) {
                        Some(inverse) => total = total.add(&inverse, budget)?,
                        None => return Ok(None),
                    }
                }
                Ok(total.recip())
            }
            Self::Root(_) => Ok(None),
            Self::Negative(inner) => Ok(inner.value(budget)?.map(|value| value.neg())),
        }
    }

    /// r and ρ, where it is r·√ρ: for products and quotients of roots.
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn surd(&self, budget: &Budget) -> Result<Option<(Fraction, Fraction)>, Exceeded> {
        match self {
            Self::Root(inner) => Ok(inner.value(budget)?.map(|under| (Fraction::one(), under))),
            Self::Negative(inner) => {
                let inner = inner.surd(budget)?;
                Ok(inner.map(|(outer, under)| (outer.neg(), under)))
            }
            Self::Product(parts) => {
                let (mut outer, mut under) = (Fraction::one(), Fraction::one());
                for part in parts {
                    let Some((front, inner)) = part.surd(budget)? else {
                        return Ok(None);
                    };
                    outer = outer.mul(&front, budget)?;
                    under = under.mul(&inner, budget)?;
                }
                Ok(Some((outer, under)))
            }
            Self::Quotient(above, below) => {
                let (Some(above), Some(below)) = (above.surd(budget)?, below.surd(budget)?) else {
                    return Ok(None);
                };
                match (
                    above.0.div(&below.0, budget)?,
                    above.1.div(&below.1, budget)?,
                ) {
                    (Some(outer), Some(under)) => Ok(Some((outer, under))),
                    _ => Ok(None),
                }
            }
            form => Ok(form.value(budget)?.map(|value| (value, Fraction::one()))),
        }
    }
}

/// Whether some terms of a sum are taken away.
fn is_difference(terms: &[Form]) -> bool {
    terms.iter().any(|it| matches!(it, Form::Negative(_)))
}

/// Every term with the other sign.
fn turned(terms: Vec<Form>) -> Vec<Form> {
    let turned = terms.into_iter().map(|term| match term {
        Form::Negative(inner) => *inner,
        term => term.signed(true),
    });
    turned.collect()
}

/// Factors without signs and quotients as one: numbers multiplied, equal factors as a power.
fn gathered(parts: Vec<Form>) -> Form {
    let mut number = Integer::one();
    let mut factors: Vec<(Form, u32)> = Vec::new();
    let mut stack: Vec<Form> = parts.into_iter().rev().collect();
    while let Some(part) = stack.pop() {
        let (base, exponent) = match part {
            Form::Product(inner) => {
                stack.extend(inner.into_iter().rev());
                continue;
            }
            Form::Number(value) => {
                number = &number * &value;
                continue;
            }
            Form::Power(base, exponent) => (*base, exponent),
            other => (other, 1),
        };
        match factors.iter_mut().find(|(known, _)| *known == base) {
            Some((_, count)) => *count += exponent,
            None => factors.push((base, exponent)),
        }
    }
    let mut list: Vec<Form> = factors
        .into_iter()
        .map(|(base, exponent)| base.power(exponent))
        .collect();
    if number.is_zero() {
        return Form::Number(number);
    }
    if !number.is_one() || list.is_empty() {
        list.insert(0, Form::Number(number));
    }
    match list.len() {
        1 => list.remove(0),
        _ => Form::Product(list),
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::algebra::SymbolTable;

    #[test]
    fn signs_and_divisors_move_out_of_products() {
        let mut table = SymbolTable::new();
        let [a, b, c] = ["a", "b", "c"].map(|name| Form::Symbol(table.intern(name)));
        let half = Form::quotient(a.clone(), Form::quotient(b.clone(), c.clone()));
        let minus = Form::product([half, c.clone().signed(true), a.clone()]);
        let expected = Form::Quotient(
            Box::new(Form::Product(vec![a.power(2), c.power(2)])),
            Box::new(b),
        );
        assert_eq!(minus, expected.signed(true));
    }

    #[test]
    fn the_value_of_a_parallel_combination_is_the_product_over_the_sum() {
        let budget = Budget::unlimited();
        let mut table = SymbolTable::new();
        let [a, b] = ["a", "b"].map(|name| table.intern(name));
        let form = Form::parallel([Form::Symbol(a), Form::Symbol(b)]);
        let (x, y) = (Polynomial::symbol(a), Polynomial::symbol(b));
        let expected = Fraction::new(&x * &y, &x + &y, &budget);
        assert_eq!(form.value(&budget), expected);
        assert_eq!(form.length(), (2, 1));
        let root = Form::Root(Box::new(Form::Symbol(a)));
        let surd = Form::quotient(root, Form::Symbol(b)).surd(&budget);
        let outer = Fraction::symbol(b).recip().expect("not zero");
        assert_eq!(surd, Ok(Some((outer, Fraction::from(x)))));
    }
}
