//! The fate of claims as a table.

use crate::analysis::report::{Finding, Verdict};
use crate::render::answer::Answer;
use crate::render::latex::escape::escape;
use crate::render::latex::spell::spell;
use crate::render::names::{FrequencyPlace, Names};
use crate::render::product;

/// One row a claim, its findings below it; empty if there are no claims.
pub(super) fn table(answer: &Answer<'_>) -> String {
    if answer.report.claims.is_empty() {
        return String::new();
    }
    let names = answer.names(FrequencyPlace::First);
    let mut rows = String::new();
    for it in &answer.report.claims {
        let fate = match it.holds {
            Verdict::Yes => "holds",
            Verdict::No => "refuted",
            Verdict::Undecided => "not decided",
        };
        let text = escape(&answer.network.claims()[it.claim].text);
        rows.push_str(&format!("  {text} & {fate} \\\\\n"));
        for finding in &it.findings {
            rows.push_str(&format!(
                "  \\quad {} & {} \\\\\n",
                escape(&finding.label),
                found(finding, &names)
            ));
        }
    }
    format!("\\begin{{tabular}}{{ll}}\n{rows}\\end{{tabular}}\n")
}

fn found(finding: &Finding, names: &Names<'_>) -> String {
    let text = finding.text.as_deref().map(escape);
    let formula = product::finding(finding, names);
    let formula = formula.map(|quotient| format!("$\\displaystyle {}$", spell(&quotient)));
    text.into_iter()
        .chain(formula)
        .collect::<Vec<_>>()
        .join(" ")
}
