//! Long results by shared sub-expressions.

use crate::algebra::{PolynomialRing, Symbol, SymbolTable};
use crate::analysis::pairing::Pairing;
use crate::analysis::report::Nested;
use crate::analysis::solve::Setting;
use crate::analysis::symbolic::Symbolic;
use crate::budget::Exceeded;

/// Definitions beyond which nobody reads on.
const MAX_DEFINITIONS: usize = 2000;

/// N and D by definitions; the error of the budget when that is too long too.
pub(crate) fn nested(
    setting: &Setting<'_>,
    pairing: &Pairing,
    common_degree: u32,
) -> Result<Nested, Exceeded> {
    let budget = setting.budget;
    let long = Exceeded::Terms(budget.limits().terms);
    if !setting.couplings.roots().is_empty() {
        return Err(long);
    }
    let symbolic = Symbolic::new(setting.network, setting.rooted, setting.couplings, budget)?;
    let ring = PolynomialRing { budget };
    let mut table: SymbolTable = setting.network.symbols().clone();
    let mut definitions = Vec::new();
    let mut sides = Vec::new();
    for (plus, minus, factor) in pairing.sides() {
        let mut value = crate::algebra::Polynomial::zero();
        for (determinant, negative) in [(plus, false), (minus, true)] {
            let Some(determinant) = determinant else {
                continue;
            };
            let determinant = determinant.diagram(budget)?;
            if determinant.states() > MAX_DEFINITIONS {
                return Err(long);
            }
            let part = determinant.nested(&ring, &symbolic, &mut table, &mut definitions)?;
            value = if negative {
                &value - &part
            } else {
                &value + &part
            };
        }
        sides.push(&value * factor);
    }
    if definitions.len() > MAX_DEFINITIONS {
        return Err(long);
    }
    let (mut denominator, mut numerator) = (sides.pop(), sides.pop());
    let names = names_for(&definitions, setting.network.symbols());
    Ok(Nested {
        definitions,
        names,
        numerator: numerator.take().unwrap_or_default(),
        denominator: denominator.take().unwrap_or_default(),
        terms: pairing.term_counts(),
        common_degree,
    })
}

/// x1, x2, … with a letter that begins no name of the network.
fn names_for(
    definitions: &[(Symbol, crate::algebra::Polynomial)],
    table: &SymbolTable,
) -> Vec<String> {
    let letter = ["x", "t", "u", "w", "q"]
        .into_iter()
        .find(|letter| {
            (1..=definitions.len()).all(|n| table.find(&format!("{letter}{n}")).is_none())
        })
        .unwrap_or("x_");
    (1..=definitions.len())
        .map(|n| format!("{letter}{n}"))
        .collect()
}
