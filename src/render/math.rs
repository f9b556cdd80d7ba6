//! One tree for every writer: precedence, signs and the order of terms are decided here; writers only
//! spell.
//!
//! Terms stand by ascending total degree, then by names in byte order (for reading with digits counted as
//! numbers), larger exponents first.
//! Within a term: the number, then the symbols as [`Names`](crate::render::names::Names) orders them. `R1*C1 - R2*C2` is
//! `Sum[+ Product[R1, C1], − Product[R2, C2]]`.

mod terms;

use std::sync::Arc;

use crate::algebra::Integer;
pub use terms::{
    by_powers_of_s, equation, factored_series, for_reading, ordered_terms, polynomial,
    power_series, power_terms, ratio,
};

/// An expression to be written.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub enum Math {
    /// A whole number, not negative.
    Number(Integer),
    /// A name.
    Symbol(Arc<str>),
    /// Terms with their signs; at least two.
    Sum(Vec<Term>),
    /// Factors; at least two.
    Product(Vec<Math>),
    /// Above and below the bar.
    Quotient(Box<Math>, Box<Math>),
    /// Exponent at least two.
    Power(Box<Math>, u32),
    /// Members in parallel; at least two.
    Parallel(Vec<Math>),
    /// Square root.
    Root(Box<Math>),
    /// Minus what follows.
    Negative(Box<Math>),
}

/// A term of a sum.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct Term {
    /// Whether it is taken away.
    pub negative: bool,
    /// What it is; no sign of its own.
    pub body: Math,
}

/// Where a sub-expression stands.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Within {
    /// By itself, or above and below a drawn bar.
    Alone,
    /// A term of a sum or the operand of a sign.
    Sum,
    /// A factor, or above a slash.
    Product,
    /// Below a slash.
    Divisor,
    /// Under an exponent.
    Base,
    /// Beside `∥`.
    Parallel,
}

/// How quotients are written.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Bars {
    /// With a drawn bar that groups by itself.
    Drawn,
    /// With a slash.
    Slash,
}

impl Math {
    /// A symbol by name.
    #[must_use]
    pub fn name(name: &str) -> Self {
        Self::Symbol(Arc::from(name))
    }

    /// A whole number of any sign.
    #[must_use]
    pub fn integer(value: &Integer) -> Self {
        if value.signum() < 0 {
            Self::Negative(Box::new(Self::Number(value.abs())))
        } else {
            Self::Number(value.clone())
        }
    }

    /// A sum of expressions; their signs become signs of terms.
    #[must_use]
    pub fn sum(parts: impl IntoIterator<Item = Self>) -> Self {
        let mut terms: Vec<Term> = parts.into_iter().flat_map(Self::into_terms).collect();
        match terms.len() {
            0 => Self::Number(Integer::zero()),
            1 => terms.remove(0).into_math(),
            _ => Self::Sum(terms),
        }
    }

    /// A product; signs and numbers move to its front, ones vanish.
    #[must_use]
    pub fn product(parts: impl IntoIterator<Item = Self>) -> Self {
        let mut negative = false;
        let mut factors = Vec::new();
        for part in parts {
            let (minus, body) = part.split_sign();
            negative ^= minus;
            match body {
                Self::Number(number) if number.is_one() => {}
                Self::Product(inner) => factors.extend(inner),
                other => factors.push(other),
            }
        }
        factors.sort_by_key(|factor| !matches!(factor, Self::Number(_)));
        let body = match factors.len() {
            0 => Self::Number(Integer::one()),
            1 => factors.remove(0),
            _ => Self::Product(factors),
        };
        body.signed(negative)
    }

    /// A quotient; the sign of its upper part moves to the front, a divisor of one vanishes.
    #[must_use]
    pub fn quotient(above: Self, below: Self) -> Self {
        if below == Self::Number(Integer::one()) {
            return above;
        }
        let (above_minus, above) = above.split_sign();
        let (below_minus, below) = below.split_sign();
        Self::Quotient(Box::new(above), Box::new(below)).signed(above_minus != below_minus)
    }

    /// A power.
    #[must_use]
    pub fn power(self, exponent: u32) -> Self {
        match exponent {
            0 => Self::Number(Integer::one()),
            1 => self,
            _ => Self::Power(Box::new(self), exponent),
        }
    }

    /// Itself, or minus itself.
    #[must_use]
    pub fn signed(self, negative: bool) -> Self {
        match (negative, self) {
            (false, math) => math,
            (true, Self::Negative(inner)) => *inner,
            (true, math) => Self::Negative(Box::new(math)),
        }
    }

    /// Sign and what stands behind it; a sum whose first term is negative is turned round.
    #[must_use]
    pub fn split_sign(self) -> (bool, Self) {
        match self {
            Self::Negative(inner) => (true, *inner),
            Self::Sum(mut terms) if terms[0].negative => {
                for term in &mut terms {
                    term.negative = !term.negative;
                }
                (true, Self::Sum(terms))
            }
            other => (false, other),
        }
    }

    /// A sum with the terms that are added in front of those that are taken away.
    #[must_use]
    pub fn positive_first(self) -> Self {
        match self {
            Self::Sum(mut terms) => {
                terms.sort_by_key(|term| term.negative);
                Self::Sum(terms)
            }
            other => other,
        }
    }

    fn into_terms(self) -> Vec<Term> {
        match self {
            Self::Sum(terms) => terms,
            Self::Negative(inner) => vec![Term {
                negative: true,
                body: *inner,
            }],
            body => vec![Term {
                negative: false,
                body,
            }],
        }
    }

    /// The terms of a sum, or itself as the only one.
    #[must_use]
    pub fn terms(&self) -> Vec<(bool, &Self)> {
        match self {
            Self::Sum(terms) => terms
                .iter()
                .map(|term| (term.negative, &term.body))
                .collect(),
            Self::Negative(inner) => vec![(true, inner)],
            body => vec![(false, body)],
        }
    }

    /// Whether parentheses are needed in this place.
    #[must_use]
    pub fn is_grouped(&self, within: Within, bars: Bars) -> bool {
        match self {
            Self::Number(_) | Self::Symbol(_) | Self::Root(_) => false,
            Self::Power(..) => within == Within::Base,
            Self::Sum(_) | Self::Negative(_) => within != Within::Alone,
            Self::Parallel(_) => !matches!(within, Within::Alone | Within::Sum),
            Self::Product(_) => {
                matches!(within, Within::Divisor | Within::Base | Within::Parallel)
            }
            Self::Quotient(..) => match bars {
                Bars::Drawn => within == Within::Base,
                Bars::Slash => !matches!(within, Within::Alone | Within::Sum),
            },
        }
    }

    /// How deep sums stand within sums; 0 without any.
    #[must_use]
    pub fn sums_within_sums(&self) -> usize {
        match self {
            Self::Number(_) | Self::Symbol(_) => 0,
            Self::Sum(terms) => {
                let inner = terms.iter().map(|term| term.body.sums_within_sums());
                1 + inner.max().unwrap_or(0)
            }
            Self::Product(parts) | Self::Parallel(parts) => {
                let inner = parts.iter().map(Self::sums_within_sums);
                inner.max().unwrap_or(0)
            }
            Self::Quotient(above, below) => above.sums_within_sums().max(below.sums_within_sums()),
            Self::Power(inner, _) | Self::Root(inner) | Self::Negative(inner) => {
                inner.sums_within_sums()
            }
        }
    }

    /// Number of symbols and numbers in it, a measure of its length.
    #[must_use]
    pub fn leaves(&self) -> usize {
        match self {
            Self::Number(_) | Self::Symbol(_) => 1,
            Self::Sum(terms) => terms.iter().map(|term| term.body.leaves()).sum(),
            Self::Product(parts) | Self::Parallel(parts) => parts.iter().map(Self::leaves).sum(),
            Self::Quotient(above, below) => above.leaves() + below.leaves(),
            Self::Power(inner, _) | Self::Root(inner) | Self::Negative(inner) => inner.leaves(),
        }
    }
}

impl Term {
    fn into_math(self) -> Math {
        self.body.signed(self.negative)
    }
}
