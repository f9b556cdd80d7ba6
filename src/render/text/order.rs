//! The order ledger drawn in columns.

use crate::analysis::report::FunctionReport;
use crate::render::answer::Answer;
use crate::render::ledger;
use crate::render::sentence;
use crate::render::text::Page;
use crate::render::text::columns;
use crate::render::text::fill;
use crate::render::text::paint::Paint;

/// The account of the network.
pub(super) fn network(answer: &Answer<'_>, page: &Page) -> String {
    let heading = Paint(page.colour).strong("Order of the network");
    format!(
        "{heading}\n{}",
        columns::draw(&ledger::network(answer), page)
    )
}

/// The account of one function.
pub(super) fn function(answer: &Answer<'_>, result: &FunctionReport, page: &Page) -> String {
    let mut text = heading(answer, result, page);
    text.push_str(&columns::draw(&ledger::function(answer, result), page));
    if result.order > 0 {
        text.push_str(&relied_on(&result.relied_on, page));
    }
    text
}

/// `H = voltage(out) / Vs`.
pub(super) fn heading(answer: &Answer<'_>, result: &FunctionReport, page: &Page) -> String {
    let heading = format!("{} = {}", result.name, answer.question(result).text);
    format!("{}\n", Paint(page.colour).strong(&heading))
}

/// Signs and assumptions an answer rests on; empty if there are none.
pub(super) fn relied_on(list: &[String], page: &Page) -> String {
    if list.is_empty() {
        return String::new();
    }
    let sentence = format!("relies on {}", sentence::conditions(list));
    let words: Vec<String> = sentence.split(' ').map(str::to_owned).collect();
    let lines = fill::words(&words, " ", page.width - 2);
    let lines = lines.iter().map(|line| Paint(page.colour).quiet(line));
    lines.map(|line| format!("  {line}\n")).collect()
}
