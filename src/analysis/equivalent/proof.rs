//! Whether two networks have the same derived functions.

use std::collections::BTreeMap;

use crate::algebra::{Polynomial, Symbol};
use crate::analysis::report::{Formula, FunctionReport, Report, Verdict};
use crate::budget::{Budget, Exceeded};
use crate::network::Network;

/// Compares each function of the first report with that of the same name in the second, as rational
/// functions: N1·D2 = N2·D1. `spelled` gives the name that a symbol of the first network has in the
/// second.
///
/// `Undecided` where a function was not written down or the products pass the budget.
#[must_use]
pub fn same(
    first: (&Network, &Report),
    second: (&Network, &Report),
    spelled: &dyn Fn(&str) -> String,
    budget: &Budget,
) -> Verdict {
    let mut back: BTreeMap<Symbol, Symbol> = [Symbol::S, Symbol::PI]
        .into_iter()
        .map(|it| (it, it))
        .collect();
    let stated = first.0.all_facts().map(|facts| facts.symbol);
    // A mutual inductance stands in formulas without having been stated.
    let shown = first.1.results.iter().flat_map(shown);
    for own in stated.chain(shown) {
        let name = spelled(first.0.symbols().name(own));
        if let Some(symbol) = second.0.symbols().find(&name) {
            back.insert(symbol, own);
        }
    }
    let mut verdict = Verdict::Yes;
    for result in &first.1.results {
        let name = spelled(&result.name);
        let other = second.1.results.iter().find(|it| it.name == name);
        match other.map(|other| equal(result, other, &back, budget)) {
            Some(Ok(Some(true))) => {}
            Some(Ok(Some(false))) => return Verdict::No,
            None | Some(Ok(None) | Err(_)) => verdict = Verdict::Undecided,
        }
    }
    verdict
}

fn shown(result: &FunctionReport) -> Vec<Symbol> {
    let Formula::Expanded(formula) = &result.formula else {
        return Vec::new();
    };
    let all = formula.numerator.iter().chain(&formula.denominator);
    all.flat_map(Polynomial::symbols).collect()
}

fn equal(
    first: &FunctionReport,
    second: &FunctionReport,
    back: &BTreeMap<Symbol, Symbol>,
    budget: &Budget,
) -> Result<Option<bool>, Exceeded> {
    let (Formula::Expanded(first), Formula::Expanded(second)) = (&first.formula, &second.formula)
    else {
        return Ok(None);
    };
    let whole = |list: &[Polynomial]| Polynomial::from_coefficients(Symbol::S, list);
    let (n1, d1) = (whole(&first.numerator), whole(&first.denominator));
    let (n2, d2) = (whole(&second.numerator), whole(&second.denominator));
    let known = |part: &Polynomial| part.symbols().iter().all(|it| back.contains_key(it));
    if !known(&n2) || !known(&d2) {
        return Ok(None);
    }
    let rename = |part: &Polynomial| part.rename(&|it| back.get(&it).copied().unwrap_or(it));
    let (n2, d2) = (rename(&n2), rename(&d2));
    if n1 == n2 && d1 == d2 {
        return Ok(Some(true));
    }
    Ok(Some(n1.product(&d2, budget)? == n2.product(&d1, budget)?))
}
