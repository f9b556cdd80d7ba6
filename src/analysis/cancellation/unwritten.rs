//! What cancels in a function that is too long to be written down.
//!
//! The common factor of N and D usually depends on few quantities. Which, is seen modulo a prime: the
//! factor changes when one of them does. With numbers in place of all others N and D are short enough
//! to expand. Their common factor is the true one when its degree in s is the degree found modulo the
//! prime for general values: it divides the true one's image, and no quantity of that is missing.

use super::*;
use crate::analysis::point::Point;

impl Auditor<'_> {
    /// The common factor in s with the relations put in; 1 if there is none.
    pub(super) fn common(&self) -> Result<Polynomial, Exceeded> {
        if let Ok(reduced) = &self.solved.function {
            return Ok(reduced.common.clone());
        }
        let wanted = self.solved.degrees.common;
        if wanted == 0 {
            return Ok(Polynomial::one());
        }
        let budget = self.setting.budget;
        let unknown = Exceeded::Terms(budget.limits().terms);
        if !self.setting.couplings.roots().is_empty() {
            return Err(unknown);
        }
        let others = self.indifferent().ok_or(unknown)?;
        for attempt in 0..4 {
            let value = |symbol: Symbol| {
                others.contains(&symbol).then(|| {
                    let index = symbol.index() as u64;
                    Fraction::from(Integer::from(2 + (index * 37 + attempt * 101) % 211))
                })
            };
            let (numerator, denominator) = self.with_numbers(&value, &others)?;
            let common = part_in_s(&gcd(&numerator, &denominator, budget)?, budget)?;
            if common.degree(Symbol::S) == wanted {
                return Ok(common);
            }
        }
        Err(unknown)
    }

    /// Independent symbols that the common factor does not depend on.
    fn indifferent(&self) -> Option<BTreeSet<Symbol>> {
        let (network, pairing) = (self.network(), &self.solved.pairing);
        let common_with = |salt| {
            let choice = Choice {
                seed: SEED,
                shift: 0,
                released: &|_| false,
                salt,
            };
            let sample = pairing.sample(network, &choice)?;
            Some(sample.numerator.gcd(&sample.denominator, pairing.field()))
        };
        let common = common_with(None)?;
        let symbols = self.independent().into_iter();
        Some(
            symbols
                .filter(|&symbol| {
                    common_with(Some(Quantity::Free(symbol))).is_some_and(|it| it == common)
                })
                .collect(),
        )
    }

    /// The symbols that the determinants are made of when all relations hold.
    fn independent(&self) -> BTreeSet<Symbol> {
        let inner = |symbol| self.plain.value(symbol).symbols();
        let symbols = self.solved.pairing.symbols().into_iter().flat_map(inner);
        symbols
            .filter(|&symbol| symbol != Symbol::S && symbol != Symbol::PI)
            .collect()
    }

    /// N and D with numbers in place of some independent symbols.
    fn with_numbers(
        &self,
        value: &dyn Fn(Symbol) -> Option<Fraction>,
        symbols: &BTreeSet<Symbol>,
    ) -> Result<(Polynomial, Polynomial), Exceeded> {
        let budget = self.setting.budget;
        let mut substitution = self.plain.clone();
        substitution.extend(value, symbols.iter().copied(), budget)?;
        let couplings = self.setting.couplings;
        let symbolic = Symbolic::new(self.network(), &substitution, couplings, budget)?;
        let ring = PolynomialRing { budget };
        self.solved.pairing.expand(&ring, &symbolic)
    }

    /// Common factors at the nominals of a function that is not written down; the names of missing
    /// nominals otherwise.
    pub(super) fn coincidental_by_numbers(
        &self,
        common: &Polynomial,
        entries: &mut Vec<Cancellation>,
    ) -> Result<Vec<String>, Exceeded> {
        let degrees = self.solved.degrees;
        if degrees.order == 0 || degrees.numerator == 0 {
            return Ok(Vec::new());
        }
        let symbols = self.independent();
        let unknown: Vec<String> = symbols
            .iter()
            .filter(|&&symbol| self.nominal(symbol).is_none())
            .map(|&symbol| self.names.name(symbol).to_owned())
            .collect();
        if !unknown.is_empty() {
            return Ok(unknown);
        }
        let pairing = &self.solved.pairing;
        let field = pairing.field();
        // A common factor over the rationals is one modulo the prime, too.
        let nothing_more = Point::nominal(self.network(), field).is_some_and(|point| {
            let sample = pairing.at(&point);
            let shared = sample.numerator.gcd(&sample.denominator, field).degree();
            shared == Some(degrees.common as usize)
        });
        if nothing_more {
            return Ok(Vec::new());
        }
        let budget = self.setting.budget;
        if !self.setting.couplings.roots().is_empty() {
            return Err(Exceeded::Terms(budget.limits().terms));
        }
        let value = |symbol: Symbol| {
            let number = self.nominal(symbol)?;
            let above = Polynomial::constant(number.numerator().clone());
            let below = Polynomial::constant(number.denominator().clone());
            Fraction::new(above, below, budget).ok().flatten()
        };
        let (numerator, denominator) = self.with_numbers(&value, &symbols)?;
        let shared = gcd(&numerator, &denominator, budget)?;
        let known = common
            .evaluate(&|symbol| self.nominal(symbol))
            .0
            .primitive();
        let more = shared.primitive().div_exact(&known).unwrap_or(shared);
        for (factor, multiplicity) in factors_in_s(&more, budget)? {
            entries.push(self.entry(CancellationClass::Coincidental, &factor, multiplicity));
        }
        Ok(Vec::new())
    }
}
