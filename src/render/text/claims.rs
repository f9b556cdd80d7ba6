//! The fate of claims, one a line; refuted ones with both formulas and values.

use crate::analysis::report::{ClaimReport, Finding, Verdict};
use crate::render::answer::Answer;
use crate::render::linear::READING;
use crate::render::math::Math;
use crate::render::names::FrequencyPlace;
use crate::render::product;
use crate::render::text::Page;
use crate::render::text::block::{Block, columns};
use crate::render::text::fill;
use crate::render::text::order;
use crate::render::text::paint::Paint;

/// All claims of one file; empty if it has none.
pub(super) fn section(answer: &Answer<'_>, page: &Page) -> String {
    let claims = &answer.report.claims;
    let text_of = |it: &ClaimReport| answer.network.claims()[it.claim].text.as_str();
    let widest = claims.iter().map(|it| columns(text_of(it))).max();
    let widest = widest.unwrap_or(0).min(page.width.saturating_sub(28));
    let mut text = String::new();
    for it in claims {
        text.push_str(&claim(answer, it, widest, page));
    }
    text
}

fn claim(answer: &Answer<'_>, it: &ClaimReport, widest: usize, page: &Page) -> String {
    let paint = Paint(page.colour);
    let claim = &answer.network.claims()[it.claim];
    let (line, _) = answer.sources.position(claim.place);
    let mark = match it.holds {
        Verdict::Yes => paint.good("✓ holds      "),
        Verdict::No => paint.bad("✗ refuted    "),
        Verdict::Undecided => paint.unsure("? not decided"),
    };
    let gap = " ".repeat(widest.saturating_sub(columns(&claim.text)));
    let place = paint.quiet(&format!("line {line}"));
    let mut text = format!("  {mark}  {}{gap}  {place}\n", claim.text);
    text.push_str(&findings(answer, &it.findings, page));
    if !it.relied_on.is_empty() {
        for line in order::relied_on(&it.relied_on, page).lines() {
            text.push_str(&format!("{}{line}\n", " ".repeat(INDENT - 2)));
        }
    }
    text
}

/// Column of the labels under a claim.
const INDENT: usize = 17;

/// Labels up to this length stand in a column of their own.
const LABEL: usize = 18;

fn findings(answer: &Answer<'_>, list: &[Finding], page: &Page) -> String {
    let labels = list.iter().map(|it| columns(&it.label));
    let widest = labels.filter(|it| *it <= LABEL).max().unwrap_or(0);
    list.iter()
        .map(|it| finding(answer, it, widest, page))
        .collect()
}

fn finding(answer: &Answer<'_>, it: &Finding, widest: usize, page: &Page) -> String {
    let room = page.width.saturating_sub(INDENT).max(24);
    if let (None, Some(text)) = (&it.formula, &it.text)
        && columns(&it.label) > widest
    {
        let sentence = format!("{}: {text}", it.label);
        return Block::lines(words(&sentence, room)).indented(INDENT);
    }
    let gap = " ".repeat(widest.saturating_sub(columns(&it.label)) + 2);
    let label = Block::text(format!("{}{gap}", it.label));
    let room = room.saturating_sub(label.width()).max(24);
    let mut blocks = vec![label];
    if let Some(text) = &it.text {
        blocks.push(Block::lines(words(text, room)));
    }
    let names = answer.names(FrequencyPlace::First);
    if let Some(quotient) = product::finding(it, &names) {
        blocks.push(formula(&quotient, room));
    }
    Block::beside(&blocks).indented(INDENT)
}

/// On one line where it fits, else with a bar, else broken.
fn formula(math: &Math, room: usize) -> Block {
    let line = READING.spell(math);
    if columns(&line) <= room {
        return Block::text(line);
    }
    let whole = Block::math(math);
    if whole.width() <= room {
        return whole;
    }
    Block::lines(fill::lines(math, room, 0))
}

fn words(sentence: &str, room: usize) -> Vec<String> {
    let words: Vec<String> = sentence.split(' ').map(str::to_owned).collect();
    fill::words(&words, " ", room)
}
