//! What a function of first or second order does: its kind, its poles, its answer to a step.

use crate::algebra::Polynomial;
use crate::analysis::form::root::positive;
use crate::analysis::form::tree::Form;
use crate::analysis::form::write::Writer;
use crate::analysis::report::Expanded;
use crate::budget::{Budget, Exceeded};
use crate::network::Network;

/// Longer conditions help nobody.
const MOST_TERMS: usize = 8;

/// What a proper function of first or second order does.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Character {
    /// One or two.
    pub order: usize,
    /// The kind of the response, where it is one with a name.
    pub kind: Option<Kind>,
    /// Equations under which it is an all-pass, where it is none for all values.
    pub all_pass_where: Vec<(Form, Form)>,
    /// Where the poles are conjugate; `None` for first order and without damping.
    pub conjugate: Option<Inequality>,
    /// The answer to a unit step, where the poles have negative real parts for all positive values.
    pub step: Option<Step>,
}

/// Kinds of responses.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Kind {
    /// A constant numerator.
    LowPass,
    /// The highest power of s alone.
    HighPass,
    /// s alone, second order.
    BandPass,
    /// Zeros on the imaginary axis at ω0.
    Notch,
    /// Zeros on the imaginary axis above ω0 where the inequality holds, below it otherwise.
    UnevenNotch(Inequality),
    /// N(s) = ±c·D(−s).
    AllPass,
}

/// left > right, both free of s; equivalent transformations of what it stands for.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Inequality {
    /// The larger side.
    pub left: Form,
    /// The smaller side.
    pub right: Form,
    /// Whether it holds, where that is so for all values: by the terms of the difference.
    pub always: Option<bool>,
}

/// The answer to a unit step.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Step {
    /// The jump at t = 0.
    pub first: Form,
    /// The value it settles at.
    pub last: Form,
}

/// The character of a proper function of first or second order without a pole at s = 0; `factored`
/// where its denominator is a product of sections of first order.
///
/// # Errors
/// When the budget is reached.
pub(crate) fn character(
    network: &Network,
    formula: &Expanded,
    factored: bool,
    writer: &Writer<'_>,
    budget: &Budget,
) -> Result<Option<Character>, Exceeded> {
    let (above, below) = (&formula.numerator, &formula.denominator);
    let order = below.len().saturating_sub(1);
    let lowest = &below[0];
    if !(1..=2).contains(&order) || above.len() > below.len() || lowest.is_zero() {
        return Ok(None);
    }
    let maker = Maker {
        network,
        writer,
        budget,
    };
    let stable = below.iter().all(|it| positive(network, it));
    let step = if stable {
        let highest = above.get(order).cloned().unwrap_or_default();
        Some(Step {
            first: writer.ratio(&highest, &below[order])?,
            last: writer.ratio(&above[0], lowest)?,
        })
    } else {
        None
    };
    let mut conjugate = match below.as_slice() {
        [constant, slope, square] if !slope.is_zero() => {
            maker.conjugate(constant, slope, square)?
        }
        _ => None,
    };
    if factored && let Some(conjugate) = &mut conjugate {
        conjugate.always = Some(false);
    }
    Ok(Some(Character {
        order,
        kind: maker.kind(above, below)?,
        all_pass_where: maker.all_pass_where(above, below)?,
        conjugate,
        step,
    }))
}

struct Maker<'a> {
    network: &'a Network,
    writer: &'a Writer<'a>,
    budget: &'a Budget,
}

impl Maker<'_> {
    fn kind(&self, above: &[Polynomial], below: &[Polynomial]) -> Result<Option<Kind>, Exceeded> {
        let order = below.len() - 1;
        let present: Vec<usize> = (0..above.len())
            .filter(|it| !above[*it].is_zero())
            .collect();
        Ok(match (present.as_slice(), order) {
            ([0], _) => Some(Kind::LowPass),
            ([1], 1) | ([2], 2) => Some(Kind::HighPass),
            ([1], 2) => Some(Kind::BandPass),
            ([0, 2], 2) => self.notch(above, below)?,
            _ if self.is_all_pass(above, below)? => Some(Kind::AllPass),
            _ => None,
        })
    }

    /// ωz² = n0/n2 against ω0² = d0/d2.
    fn notch(&self, above: &[Polynomial], below: &[Polynomial]) -> Result<Option<Kind>, Exceeded> {
        let product = |a: &Polynomial, b: &Polynomial| a.product(b, self.budget);
        let all = [&above[0], &above[2], &below[0], &below[2]];
        let same_sign = [
            positive(self.network, all[0]),
            positive(self.network, all[1]),
        ];
        let negative = [-all[0], -all[1]].map(|it| positive(self.network, &it));
        let rest = positive(self.network, all[2]) && positive(self.network, all[3]);
        if !rest || (same_sign != [true, true] && negative != [true, true]) {
            return Ok(None);
        }
        let left = product(all[0], all[3])?;
        let right = product(all[1], all[2])?;
        if left == right {
            return Ok(Some(Kind::Notch));
        }
        let turn = negative == [true, true];
        let [left, right] = [left, right].map(|it| if turn { -it } else { it });
        let divisor = shared(&left, &right);
        Ok(Some(Kind::UnevenNotch(
            self.inequality(&left, &right, &divisor)?,
        )))
    }

    /// N(s)·d0 = n0·D(−s).
    fn is_all_pass(&self, above: &[Polynomial], below: &[Polynomial]) -> Result<bool, Exceeded> {
        let rest = self.all_pass(above, below)?;
        Ok(rest.is_some_and(|list| list.is_empty()))
    }

    /// The coefficients of n0·D(−s) − N(s)·d0 that are not zero; `None` where the degrees differ.
    fn all_pass(
        &self,
        above: &[Polynomial],
        below: &[Polynomial],
    ) -> Result<Option<Vec<Polynomial>>, Exceeded> {
        if above.len() != below.len() {
            return Ok(None);
        }
        let mut list = Vec::new();
        for (power, (over, under)) in above.iter().zip(below).enumerate() {
            let left = over.product(&below[0], self.budget)?;
            let right = above[0].product(under, self.budget)?;
            let right = if power % 2 == 1 { -right } else { right };
            let rest = &right - &left;
            if !rest.is_zero() {
                list.push(rest);
            }
        }
        Ok(Some(list))
    }

    /// Equations between positive sums, where such can hold.
    fn all_pass_where(
        &self,
        above: &[Polynomial],
        below: &[Polynomial],
    ) -> Result<Vec<(Form, Form)>, Exceeded> {
        let mut equations = Vec::new();
        for rest in self.all_pass(above, below)?.unwrap_or_default() {
            let side = |sign: i32| {
                let terms = rest.terms().iter().filter(|(_, it)| it.signum() == sign);
                Polynomial::from_terms(terms.map(|(monomial, it)| (monomial.clone(), it.abs())))
            };
            let (left, right) = (side(1), side(-1));
            let sums = positive(self.network, &left) && positive(self.network, &right);
            if !sums || rest.len() > MOST_TERMS {
                return Ok(Vec::new());
            }
            let divisor = shared(&left, &right);
            equations.push((
                self.writer.ratio(&left, &divisor)?,
                self.writer.ratio(&right, &divisor)?,
            ));
        }
        Ok(equations)
    }

    /// 4·d0·d2 > d1², what both sides share divided out.
    fn conjugate(
        &self,
        constant: &Polynomial,
        slope: &Polynomial,
        square: &Polynomial,
    ) -> Result<Option<Inequality>, Exceeded> {
        if [constant, slope, square]
            .iter()
            .any(|it| !positive(self.network, it))
        {
            return Ok(None);
        }
        let four = Polynomial::constant(4_i64);
        let left = constant
            .product(square, self.budget)?
            .product(&four, self.budget)?;
        let front = Polynomial::monomial(slope.content(), slope.monomial_content());
        let sum = slope.div_exact(&front).unwrap_or_else(Polynomial::one);
        let front = front.power(2, self.budget)?;
        let divisor = shared(&left, &front);
        let square = sum.power(2, self.budget)?;
        let right = front.product(&square, self.budget)?;
        let mut found = self.inequality(&left, &right, &divisor)?;
        if found.always.is_none() {
            let sum = self.writer.ratio(&sum, &Polynomial::one())?;
            found.right = Form::product([self.writer.ratio(&front, &divisor)?, sum.power(2)]);
        }
        Ok(Some(found))
    }

    fn inequality(
        &self,
        left: &Polynomial,
        right: &Polynomial,
        divisor: &Polynomial,
    ) -> Result<Inequality, Exceeded> {
        let difference = left - right;
        let always = if positive(self.network, &difference) {
            Some(true)
        } else if positive(self.network, &-&difference) || difference.is_zero() {
            Some(false)
        } else {
            None
        };
        Ok(Inequality {
            left: self.writer.ratio(left, divisor)?,
            right: self.writer.ratio(right, divisor)?,
            always,
        })
    }
}

/// What all terms of both sides share.
fn shared(left: &Polynomial, right: &Polynomial) -> Polynomial {
    Polynomial::monomial(
        left.content().gcd(&right.content()),
        left.monomial_content().gcd(&right.monomial_content()),
    )
}
