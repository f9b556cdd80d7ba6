//! Accounts and cancellations as tables.

use crate::analysis::report::FunctionReport;
use crate::numeric::FunctionFigures;
use crate::render::answer::Answer;
use crate::render::figures;
use crate::render::latex::escape::{escape, name};
use crate::render::latex::spell::spell;
use crate::render::ledger::{self, Between, Evidence, Line};
use crate::render::math;
use crate::render::names::FrequencyPlace;
use crate::render::sentence;

/// An account in columns: sign, number, label, evidence.
pub(super) fn account(lines: &[Line]) -> String {
    let rows: String = lines.iter().map(row).collect();
    format!("\\begin{{tabular}}{{rrll}}\n{rows}\\end{{tabular}}\n")
}

fn row(line: &Line) -> String {
    match line {
        Line::Rule => "  \\cline{1-2}\n".to_owned(),
        Line::Entry {
            taken,
            number,
            label,
            evidence,
        } => {
            let sign = if *taken { "$-$" } else { "" };
            with_evidence(
                &format!("  {sign} & {number} & {}", escape(label)),
                evidence,
            )
        }
        Line::Note { label, evidence } => {
            with_evidence(&format!("  & & {}", escape(label)), evidence)
        }
    }
}

/// The first piece of evidence beside the label, each further one in a row of its own.
fn with_evidence(front: &str, evidence: &[Evidence]) -> String {
    let mut cells = evidence.iter().map(spell_evidence);
    let mut rows = format!("{front} & {} \\\\\n", cells.next().unwrap_or_default());
    for cell in cells {
        rows.push_str(&format!("  & & & {cell} \\\\\n"));
    }
    rows
}

fn spell_evidence(evidence: &Evidence) -> String {
    match evidence {
        Evidence::Items(items, between) => {
            let items: Vec<String> = items.iter().map(|it| escape(it)).collect();
            items.join(match between {
                Between::Blank | Between::Comma => ", ",
                Between::Dash => " -- ",
                Between::Bar => " $|$ ",
            })
        }
        Evidence::Clause(text) => escape(text),
        Evidence::Formula(math) => format!("${}$", spell(math)),
        Evidence::Equation(before, left, right) => {
            let equation = format!("${} = {}$", spell(left), spell(right));
            format!("{} {equation}", escape(before))
                .trim_start()
                .to_owned()
        }
    }
}

/// What cancels in one function; empty for functions of functions.
pub(super) fn cancellations(answer: &Answer<'_>, result: &FunctionReport) -> String {
    let cut_short = sentence::cut_short(result)
        .map_or_else(String::new, |words| format!("{}.\n", escape(&words)));
    let figures = answer.figures_of(result);
    let list = match &result.cancellations {
        None => return cut_short,
        Some(list) if list.is_empty() && result.unaudited.is_some() => return cut_short,
        Some(list) if list.is_empty() => {
            let words = format!("Nothing cancels in ${}$.\n", name(&result.name));
            return words + &near(figures);
        }
        Some(list) => list,
    };
    let names = answer.names(FrequencyPlace::First);
    let mut rows = String::new();
    let mut drifts = String::new();
    for (index, it) in list.iter().enumerate() {
        let numbers = figures.and_then(|figures| figures.cancelled.get(index));
        let factor = math::by_powers_of_s(&it.factor, &names).power(it.multiplicity);
        let hides = it.hides.map(sentence::hides).unwrap_or_default();
        let front = format!(
            "  {} & ${}$ & {hides}",
            sentence::class(it.class),
            spell(&factor)
        );
        let mut evidence = ledger::cause(answer, it);
        evidence.extend(numbers.and_then(figures::modes).map(Evidence::Clause));
        rows.push_str(&with_evidence(&front, &evidence));
        if let Some(numbers) = numbers {
            let lists = numbers.drifts.iter();
            drifts.extend(
                lists
                    .filter_map(|list| figures::drifts(list))
                    .map(drift_table),
            );
        }
    }
    let near = near(figures);
    format!("\\begin{{tabular}}{{llll}}\n{rows}\\end{{tabular}}\n{cut_short}{drifts}{near}")
}

/// What one per cent of a part does to a cancelled pair.
fn drift_table(rows: Vec<[String; 4]>) -> String {
    let row = |cells: &[String; 4]| {
        let cells: Vec<String> = cells.iter().map(|cell| escape(cell)).collect();
        format!("  {} \\\\\n", cells.join(" & "))
    };
    let rows: String = rows.iter().map(row).collect();
    format!("\n\\begin{{tabular}}{{llll}}\n{rows}\\end{{tabular}}\n")
}

/// Pairs that almost cancel, a paragraph each.
fn near(figures: Option<&FunctionFigures>) -> String {
    let pairs = figures.map_or(&[][..], |figures| &figures.near);
    let upper = pairs.iter().filter(|it| it.pole.im >= 0.0);
    upper
        .map(|it| format!("\nNear: {}.\n", escape(&figures::near(it).join("; "))))
        .collect()
}
