//! Where the order of a function is lower: the zeros of its leading coefficient.

use std::collections::BTreeSet;

use crate::algebra::factor::factor;
use crate::algebra::{Polynomial, SymbolTable};
use crate::analysis::knowledge::Knowledge;
use crate::analysis::normal::with_positive_lead;
use crate::analysis::report::{Drop, Verdict};
use crate::budget::{Budget, Exceeded};

/// Conditions at which `leading` is zero, and what the proofs rest on.
///
/// One entry with the whole coefficient when it is proven never to be zero; otherwise one for each
/// irreducible factor that is not proven so.
pub(crate) fn drops(
    leading: &Polynomial,
    knowledge: &Knowledge<'_>,
    names: &SymbolTable,
    budget: &Budget,
) -> Result<(Vec<Drop>, BTreeSet<String>), Exceeded> {
    if leading.is_constant() {
        return Ok((Vec::new(), BTreeSet::new()));
    }
    if let Some(judgement) = knowledge.judge(leading)
        && judgement.sign.is_never_zero()
    {
        return Ok((vec![never(leading, names)], judgement.relied_on));
    }
    let mut open = Vec::new();
    let mut relied_on = BTreeSet::new();
    for (condition, _) in factor(leading, budget)?.factors {
        let judgement = knowledge.judge(&condition);
        if let Some(judgement) = judgement
            && judgement.sign.is_never_zero()
        {
            relied_on.extend(judgement.relied_on);
            continue;
        }
        let example = knowledge.zero_of(&condition);
        open.push(Drop {
            possible: if example.is_some() {
                Verdict::Yes
            } else {
                Verdict::Undecided
            },
            condition: with_positive_lead(&condition, names),
            example: example.unwrap_or_default(),
        });
    }
    if open.is_empty() {
        open.push(never(leading, names));
    }
    Ok((open, relied_on))
}

fn never(leading: &Polynomial, names: &SymbolTable) -> Drop {
    Drop {
        condition: with_positive_lead(leading, names),
        possible: Verdict::No,
        example: Vec::new(),
    }
}

/// A condition that was not looked at within the budget.
pub(crate) fn undecided(leading: &Polynomial, names: &SymbolTable) -> Drop {
    Drop {
        possible: Verdict::Undecided,
        ..never(leading, names)
    }
}
