//! Quotients as a designer writes them: `R1·R2·C1/(R1 + R2)` is `(R1 ∥ R2)·C1`.

use crate::algebra::{Polynomial, Symbol};
use crate::render::math::{self, Math};
use crate::render::names::Names;

/// A reduced quotient without s, with parallel combinations where its divisor is one.
#[must_use]
pub fn quotient(above: &Polynomial, below: &Polynomial, names: &Names<'_>) -> Math {
    let shared = Polynomial::monomial(below.content(), below.monomial_content());
    let found = below
        .div_exact(&shared)
        .and_then(|sum| with_parallel(above, &sum, names));
    match found {
        Some(math) => Math::quotient(math, math::polynomial(&shared, names)),
        None => Math::quotient(
            math::for_reading(above, names),
            math::for_reading(below, names),
        ),
    }
}

/// `above / sum` as `(x ∥ y)·a + b`, where `sum` is what stands below in `x ∥ y ∥ …`.
fn with_parallel(above: &Polynomial, sum: &Polynomial, names: &Names<'_>) -> Option<Math> {
    let members = members(sum, names)?;
    let product = members.iter().fold(Polynomial::one(), |product, it| {
        &product * &Polynomial::symbol(*it)
    });
    let parallel = Math::Parallel(
        members
            .iter()
            .map(|it| Math::name(names.name(*it)))
            .collect(),
    );
    if let Some(factor) = above.div_exact(&product) {
        return Some(beside(&factor, members[0], parallel, names));
    }
    let shared = Polynomial::monomial(above.content(), above.monomial_content());
    let above = above.div_exact(&shared)?;
    let factor = remainder(&above, &members)?;
    let rest = (&above - &(&product * &factor)).div_exact(sum)?;
    let series = Math::sum([
        math::for_reading(&rest, names),
        beside(&factor, members[0], parallel, names),
    ]);
    let shared_math = math::polynomial(&shared, names);
    Some(if stands_before(&shared, members[0], names) {
        Math::product([shared_math, series])
    } else {
        Math::product([series, shared_math])
    })
}

/// Factor and parallel combination in reading order: `gm·(R1 ∥ R2)`, `(R1 ∥ R2)·C1`.
fn beside(factor: &Polynomial, member: Symbol, parallel: Math, names: &Names<'_>) -> Math {
    let spelled = math::for_reading(factor, names);
    if stands_before(factor, member, names) {
        Math::product([spelled, parallel])
    } else {
        Math::product([parallel, spelled])
    }
}

fn stands_before(factor: &Polynomial, member: Symbol, names: &Names<'_>) -> bool {
    let mut symbols = factor.symbols().into_iter();
    symbols.all(|it| names.by_reading(it, member).is_lt())
}

/// The symbols whose parallel combination has this divisor, in reading order.
fn members(sum: &Polynomial, names: &Names<'_>) -> Option<Vec<Symbol>> {
    let mut symbols = sum.symbols();
    let fits = (2..=5).contains(&symbols.len())
        && sum.len() == symbols.len()
        && symbols.iter().all(|it| names.stands_in_parallel(*it));
    if !fits {
        return None;
    }
    let others = |left_out: Symbol| {
        let kept = symbols.iter().filter(|it| **it != left_out);
        kept.fold(Polynomial::one(), |product, it| {
            &product * &Polynomial::symbol(*it)
        })
    };
    let expected = symbols
        .iter()
        .fold(Polynomial::zero(), |total, it| &total + &others(*it));
    symbols.sort_by(|left, right| names.by_reading(*left, *right));
    (expected == *sum).then_some(symbols)
}

/// For two members: the factor of `x·y` in `above` modulo `x + y`, found at `x = −y`.
fn remainder(above: &Polynomial, members: &[Symbol]) -> Option<Polynomial> {
    let [first, second] = members else {
        return None;
    };
    let second = Polynomial::symbol(*second);
    let at = above.substitute(*first, &-&second);
    (-at).div_exact(&second.pow(2))
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::network::NetworkBuilder;
    use crate::render::linear::READING;
    use crate::render::names::FrequencyPlace;
    use crate::source::{Sources, Span};

    fn spelled(make: impl Fn(&[Polynomial]) -> (Polynomial, Polynomial)) -> String {
        let source = Sources::new().add("test", "");
        let mut builder = NetworkBuilder::new(Span::new(source, 0, 0));
        let symbols =
            ["R1", "R2", "R3", "C1"].map(|name| Polynomial::symbol(builder.symbols().intern(name)));
        let (above, below) = make(&symbols);
        let names = Names::new(builder.network(), FrequencyPlace::First);
        READING.spell(&quotient(&above, &below, &names))
    }

    #[test]
    fn parallel_combinations_are_found() {
        let product = spelled(|it| (&(&it[0] * &it[1]) * &it[3], &it[0] + &it[1]));
        assert_eq!(product, "(R1 ∥ R2)·C1");
        let three = spelled(|it| {
            let pairs = &(&it[0] * &it[1]) + &(&(&it[0] * &it[2]) + &(&it[1] * &it[2]));
            (&(&it[0] * &it[1]) * &it[2], pairs)
        });
        assert_eq!(three, "R1 ∥ R2 ∥ R3");
        let series = spelled(|it| {
            let pairs = &(&it[0] * &it[1]) + &(&(&it[0] * &it[2]) + &(&it[1] * &it[2]));
            (&pairs * &it[3], &it[0] + &it[1])
        });
        assert_eq!(series, "(R3 + R1 ∥ R2)·C1");
        let divider = spelled(|it| (it[1].clone(), &it[0] + &it[1]));
        assert_eq!(divider, "R2/(R1 + R2)");
    }
}
