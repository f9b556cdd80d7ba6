//! Products and quotients.

use super::*;

impl Lowering<'_> {
    pub(super) fn product(
        &mut self,
        factors: &[(bool, Expression)],
        scope: &Rc<Scope>,
        allowed: Allowed,
        place: Span,
    ) -> Out<Linear> {
        let mut product = Linear::number(Fraction::one(), Some(Dimension::NUMBER));
        let mut hertz = false;
        let mut has_s = false;
        let mut has_pi = false;
        let plain_number = |factor: &Expression| match &factor.node {
            ExpressionNode::Number(literal) => literal.dimension.is_none(),
            _ => false,
        };
        // A number without a unit may be a value in SI units; as a factor it is a pure number.
        let all_plain = factors.iter().all(|(_, factor)| plain_number(factor));
        for (over, factor) in factors {
            let mut value = self.linear(factor, scope, allowed)?;
            if plain_number(factor) && !all_plain {
                value.dimension = Some(Dimension::NUMBER);
            }
            if let ExpressionNode::Name(name) = &factor.node {
                let text = plain(name);
                has_s |= text == "s";
                has_pi |= text == "pi";
                hertz |= self.is_in_hertz(&scope.own(&text));
            }
            product = self.times(product, value, *over, factor.place, place)?;
        }
        if hertz && has_s && !has_pi {
            self.warning(
                place,
                "a frequency in hertz stands beside s without 2*pi",
                "s is in rad/s: write 2*pi*f0",
            );
        }
        Ok(product)
    }

    pub(super) fn is_in_hertz(&self, name: &str) -> bool {
        let network = self.builder.network();
        network
            .symbols()
            .find(name)
            .and_then(|symbol| network.facts(symbol))
            .is_some_and(|facts| facts.in_hertz)
    }

    pub(super) fn times(
        &mut self,
        left: Linear,
        right: Linear,
        over: bool,
        factor_place: Span,
        place: Span,
    ) -> Out<Linear> {
        let dimension = match (left.dimension, right.dimension) {
            (Some(a), Some(b)) => Some(a.times(if over { b.power(-1) } else { b })),
            _ => None,
        };
        if over {
            return self.divided(left, right, dimension, factor_place, place);
        }
        let (linear, constant) = if right.is_constant() {
            (left, right.constant)
        } else if left.is_constant() {
            (right, left.constant)
        } else {
            self.not_linear(factor_place);
            return Err(Reported);
        };
        self.scaled(linear, &constant, dimension, place)
    }

    pub(super) fn divided(
        &mut self,
        left: Linear,
        right: Linear,
        dimension: Option<Dimension>,
        factor_place: Span,
        place: Span,
    ) -> Out<Linear> {
        if let ([], [(coefficient, drive)]) = (right.probes.as_slice(), right.drives.as_slice()) {
            let is_drive = right.constant.is_zero() && right.over.is_none();
            if is_drive && left.over.is_none() && left.drives.is_empty() {
                let Some(inverse) = coefficient.recip() else {
                    return self.divides_by_zero(factor_place);
                };
                let mut over = self.scaled(left, &inverse, dimension, place)?;
                over.over = Some((*drive, factor_place));
                return Ok(over);
            }
        }
        if !right.is_constant() {
            self.not_linear(factor_place);
            return Err(Reported);
        }
        let Some(inverse) = right.constant.recip() else {
            return self.divides_by_zero(factor_place);
        };
        self.scaled(left, &inverse, dimension, place)
    }

    pub(super) fn scaled(
        &mut self,
        mut linear: Linear,
        factor: &Fraction,
        dimension: Option<Dimension>,
        place: Span,
    ) -> Out<Linear> {
        linear.dimension = dimension;
        let constant = linear.constant.mul(factor, &self.budget);
        linear.constant = self.exceeded(place, constant)?;
        for (coefficient, _) in &mut linear.probes {
            let product = coefficient.mul(factor, &self.budget);
            match product {
                Ok(value) => *coefficient = value,
                Err(exceeded) => return self.exceeded(place, Err(exceeded)),
            }
        }
        for (coefficient, _) in &mut linear.drives {
            let product = coefficient.mul(factor, &self.budget);
            match product {
                Ok(value) => *coefficient = value,
                Err(exceeded) => return self.exceeded(place, Err(exceeded)),
            }
        }
        Ok(linear)
    }
}
