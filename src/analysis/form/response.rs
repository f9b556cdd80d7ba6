//! A function of s as gain, powers of s and sections: time constants, frequencies and qualities.

use crate::algebra::factor::factor;
use crate::algebra::{Fraction, Polynomial, Symbol};
use crate::analysis::form::root::{exact_root, positive, root};
use crate::analysis::form::tree::Form;
use crate::analysis::form::write::Writer;
use crate::analysis::report::Expanded;
use crate::budget::{Budget, Exceeded};
use crate::network::Network;

/// ω0 and Q with more names and numbers than this are no help to a reader: coefficients then.
const LONGEST: usize = 24;

/// gain · s^power · Π above / Π below; every section is 1 at s = 0.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Designer {
    /// What stands in front, with its sign.
    pub gain: Form,
    /// Zeros at s = 0, or poles where it is negative.
    pub power: i32,
    /// Sections of the numerator.
    pub above: Vec<Section>,
    /// Sections of the denominator.
    pub below: Vec<Section>,
}

/// A factor of numerator or denominator.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Section {
    /// What it is.
    pub shape: Shape,
    /// How often it stands there.
    pub power: u32,
}

/// A polynomial in s.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Shape {
    /// 1 + s·τ
    First {
        /// τ, in seconds.
        tau: Form,
    },
    /// 1 + s/(Q·ω0) + s²/ω0²
    Second {
        /// ω0, in rad/s.
        omega: Form,
        /// Q; `None` where there is no damping.
        quality: Option<Form>,
    },
    /// 1 + c1·s + c2·s² + …
    Series(Vec<Form>),
    /// s·τ with the τ of the only section below.
    Rise,
    /// s/(Q·ω0) with those of the only section below.
    Damping,
    /// s²/ω0² with that of the only section below.
    Square,
}

impl Designer {
    /// The function it stands for; `None` where it divides by zero.
    ///
    /// # Errors
    /// When the budget is reached.
    pub fn value(&self, budget: &Budget) -> Result<Option<Fraction>, Exceeded> {
        let only = match self.below.as_slice() {
            [only] => Some(&only.shape),
            _ => None,
        };
        let s = Fraction::symbol(Symbol::S).pow(self.power, budget)?;
        let (Some(mut total), Some(s)) = (self.gain.value(budget)?, s) else {
            return Ok(None);
        };
        total = total.mul(&s, budget)?;
        for (sections, upwards) in [(&self.above, true), (&self.below, false)] {
            for section in sections {
                let Some(value) = section.shape.value(only, budget)? else {
                    return Ok(None);
                };
                let power = i32::try_from(section.power).unwrap_or(i32::MAX);
                let power = if upwards { power } else { -power };
                let Some(value) = value.pow(power, budget)? else {
                    return Ok(None);
                };
                total = total.mul(&value, budget)?;
            }
        }
        Ok(Some(total))
    }
}

impl Shape {
    /// Its value; `only` is the section below where there is just one.
    fn value(&self, only: Option<&Self>, budget: &Budget) -> Result<Option<Fraction>, Exceeded> {
        let coefficients = match self {
            Self::Rise | Self::Damping | Self::Square => {
                let place = if *self == Self::Square { 2 } else { 1 };
                let Some(below) = only else {
                    return Ok(None);
                };
                let mut coefficients = below.coefficients(budget)?;
                for (power, coefficient) in coefficients.iter_mut().enumerate() {
                    if power != place {
                        *coefficient = Some(Fraction::zero());
                    }
                }
                coefficients
            }
            other => other.coefficients(budget)?,
        };
        let mut total = Fraction::zero();
        for (power, coefficient) in (0..).zip(coefficients) {
            let s = Fraction::symbol(Symbol::S).pow(power, budget)?;
            let (Some(coefficient), Some(s)) = (coefficient, s) else {
                return Ok(None);
            };
            total = total.add(&coefficient.mul(&s, budget)?, budget)?;
        }
        Ok(Some(total))
    }

    /// Coefficients of s^0, s^1, …, computed back from the forms.
    fn coefficients(&self, budget: &Budget) -> Result<Vec<Option<Fraction>>, Exceeded> {
        let mut list = vec![Some(Fraction::one())];
        match self {
            Self::First { tau } => list.push(tau.value(budget)?),
            Self::Second { omega, quality } => {
                let omega = omega.surd(budget)?;
                let square = match &omega {
                    Some((outer, under)) => outer.mul(outer, budget)?.mul(under, budget)?.recip(),
                    None => None,
                };
                list.push(match (quality, omega) {
                    (None, _) => Some(Fraction::zero()),
                    (Some(quality), Some(omega)) => inverse_of_product(quality, &omega, budget)?,
                    _ => None,
                });
                list.push(square);
            }
            Self::Series(coefficients) => {
                for form in coefficients {
                    list.push(form.value(budget)?);
                }
            }
            Self::Rise | Self::Damping | Self::Square => list.clear(),
        }
        Ok(list)
    }
}

/// 1/(Q·ω0)
fn inverse_of_product(
    quality: &Form,
    omega: &(Fraction, Fraction),
    budget: &Budget,
) -> Result<Option<Fraction>, Exceeded> {
    let Some((outer, under)) = quality.surd(budget)? else {
        return Ok(None);
    };
    match exact_root(&under.mul(&omega.1, budget)?, budget)? {
        Some(root) => Ok(outer.mul(&omega.0, budget)?.mul(&root, budget)?.recip()),
        None => Ok(None),
    }
}

/// A function in a designer's terms; `None` for zero. Its value has been computed back and compared.
///
/// # Errors
/// When the budget is reached.
pub(crate) fn designer(
    network: &Network,
    formula: &Expanded,
    writer: &Writer<'_>,
    budget: &Budget,
) -> Result<Option<Designer>, Exceeded> {
    let Some(found) = made(network, formula, writer, budget)? else {
        return Ok(None);
    };
    let side = |list: &[Polynomial]| Polynomial::from_coefficients(Symbol::S, list);
    let whole = Fraction::new(side(&formula.numerator), side(&formula.denominator), budget)?;
    Ok((found.value(budget)? == whole).then_some(found))
}

fn made(
    network: &Network,
    formula: &Expanded,
    writer: &Writer<'_>,
    budget: &Budget,
) -> Result<Option<Designer>, Exceeded> {
    let sides = Maker {
        network,
        writer,
        budget,
    };
    let (Some((zeros, first_above)), Some((poles, first_below))) =
        (lowest(&formula.numerator), lowest(&formula.denominator))
    else {
        return Ok(None);
    };
    let above = sides.sections(&formula.numerator[zeros..])?;
    let below = sides.sections(&formula.denominator[poles..])?;
    let power = i32::try_from(zeros).unwrap_or(0) - i32::try_from(poles).unwrap_or(0);
    if let ([], 1 | 2, [only]) = (above.as_slice(), power, below.as_slice())
        && let Some((shape, place)) = in_terms_of(&only.shape, power)
        && only.power == 1
    {
        let gain = writer.ratio(&formula.numerator[zeros], &formula.denominator[place])?;
        return Ok(Some(Designer {
            gain,
            power: 0,
            above: vec![Section { shape, power: 1 }],
            below,
        }));
    }
    Ok(Some(Designer {
        gain: writer.ratio(first_above, first_below)?,
        power,
        above,
        below,
    }))
}

/// The first coefficient that is not zero, and its place.
fn lowest(side: &[Polynomial]) -> Option<(usize, &Polynomial)> {
    side.iter().enumerate().find(|(_, it)| !it.is_zero())
}

/// A power of s over the only section below, and which coefficient of the latter the gain refers to.
fn in_terms_of(shape: &Shape, power: i32) -> Option<(Shape, usize)> {
    match (shape, power) {
        (Shape::First { .. }, 1) => Some((Shape::Rise, 1)),
        (
            Shape::Second {
                quality: Some(_), ..
            },
            1,
        ) => Some((Shape::Damping, 1)),
        (Shape::Second { .. }, 2) => Some((Shape::Square, 2)),
        _ => None,
    }
}

struct Maker<'a> {
    network: &'a Network,
    writer: &'a Writer<'a>,
    budget: &'a Budget,
}

impl Maker<'_> {
    /// The factors of a side whose constant coefficient is not zero, each divided by its own.
    fn sections(&self, side: &[Polynomial]) -> Result<Vec<Section>, Exceeded> {
        if side.len() < 2 {
            return Ok(Vec::new());
        }
        let whole = Polynomial::from_coefficients(Symbol::S, side);
        let found = factor(&whole, self.budget)?;
        let dynamic = found
            .factors
            .iter()
            .filter(|(it, _)| it.contains(Symbol::S));
        let mut product = Polynomial::constant(found.unit.clone());
        for (part, power) in &found.factors {
            product = product.product(&part.power(*power, self.budget)?, self.budget)?;
        }
        if product != whole {
            return Ok(vec![self.section(side, 1)?]);
        }
        dynamic
            .map(|(part, power)| self.section(&part.coefficients(Symbol::S), *power))
            .collect()
    }

    fn section(&self, side: &[Polynomial], power: u32) -> Result<Section, Exceeded> {
        let shape = match side {
            [constant, slope] => Shape::First {
                tau: self.writer.ratio(slope, constant)?,
            },
            [constant, slope, square] => match self.second(constant, slope, square)? {
                Some(shape) => shape,
                None => self.series(side)?,
            },
            _ => self.series(side)?,
        };
        Ok(Section { shape, power })
    }

    fn series(&self, side: &[Polynomial]) -> Result<Shape, Exceeded> {
        let coefficients = side[1..].iter().map(|it| self.writer.ratio(it, &side[0]));
        Ok(Shape::Series(coefficients.collect::<Result<_, _>>()?))
    }

    /// ω0 = √(d0/d2), Q = √(d0·d2)/d1, where d0 and d2 are positive and the result is short.
    fn second(
        &self,
        constant: &Polynomial,
        slope: &Polynomial,
        square: &Polynomial,
    ) -> Result<Option<Shape>, Exceeded> {
        // Longer ones would pass LONGEST, and their product is slow to factor.
        if constant.len() * square.len() > LONGEST / 2 {
            return Ok(None);
        }
        if !positive(self.network, constant) || !positive(self.network, square) {
            return Ok(None);
        }
        let product = constant.product(square, self.budget)?;
        let over = |divisor: &Polynomial| root(&product, divisor, self.writer, self.budget);
        let Some(omega) = over(square)? else {
            return Ok(None);
        };
        let quality = if slope.is_zero() {
            None
        } else {
            match over(slope)? {
                Some(quality) => Some(quality),
                None => return Ok(None),
            }
        };
        let leaves = |form: &Form| form.length().0;
        let length = leaves(&omega) + quality.as_ref().map_or(0, leaves);
        Ok((length <= LONGEST).then_some(Shape::Second { omega, quality }))
    }
}
