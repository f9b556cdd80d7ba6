//! Words and short sentences that all writers share.

use crate::analysis::report::{FunctionReport, Hides, Stored, Verdict};
use crate::budget::Exceeded;
use crate::network::CancellationClass;
use crate::render::names::natural;

/// `no`, `yes`, `not decided`.
#[must_use]
pub fn verdict(verdict: Verdict) -> &'static str {
    match verdict {
        Verdict::Yes => "yes",
        Verdict::No => "no",
        Verdict::Undecided => "not decided",
    }
}

/// What an audit that was cut short leaves open, with the way on; `None` where it was not.
#[must_use]
pub fn cut_short(result: &FunctionReport) -> Option<String> {
    let exceeded = result.unaudited?;
    let reached = match &result.cancellations {
        None => "what cancels was counted, its factors were not found",
        Some(list) if list.is_empty() => {
            "nothing cancels for all values; coincidences at the nominals were not looked for"
        }
        Some(_) => "what cancels is one product, not split; coincidences were not looked for",
    };
    Some(format!(
        "audit cut short: {reached}; {exceeded}; allow more: {}",
        exceeded.further()
    ))
}

/// The class of a cancellation.
#[must_use]
pub fn class(class: CancellationClass) -> &'static str {
    match class {
        CancellationClass::Structural => "structural",
        CancellationClass::Matched => "matched",
        CancellationClass::Coincidental => "coincidental",
    }
}

/// Which side hides a mode.
#[must_use]
pub fn hides(hides: Hides) -> &'static str {
    match hides {
        Hides::NotDriven => "not driven",
        Hides::NotSeen => "not seen",
        Hides::Both => "both",
    }
}

/// What a static set keeps.
#[must_use]
pub fn stored(stored: Stored) -> &'static str {
    match stored {
        Stored::Charge => "charge",
        Stored::Flux => "flux",
    }
}

/// Why a formula is missing.
#[must_use]
pub fn over_budget(exceeded: &Exceeded) -> String {
    format!("not written down: {exceeded}")
}

/// A number with its noun: `1 claim`, `3 claims`.
#[must_use]
pub fn counted(number: usize, singular: &str, plural: &str) -> String {
    let noun = if number == 1 { singular } else { plural };
    format!("{number} {noun}")
}

/// A list in words: `R1`, `R1 and R2`, `R1, R2 and R3`.
#[must_use]
pub fn listed<S: AsRef<str>>(items: &[S]) -> String {
    match items {
        [] => String::new(),
        [only] => only.as_ref().to_owned(),
        [first @ .., last] => {
            let first: Vec<&str> = first.iter().map(AsRef::as_ref).collect();
            format!("{} and {}", first.join(", "), last.as_ref())
        }
    }
}

/// Names with long runs of numbers drawn together: `C1 … C40`, `L1`.
#[must_use]
pub fn runs<S: AsRef<str>>(names: &[S]) -> Vec<String> {
    const SHORTEST: usize = 5;
    let mut list = Vec::new();
    let mut start = 0;
    while start < names.len() {
        let mut end = start + 1;
        while end < names.len() && follows(names[end - 1].as_ref(), names[end].as_ref()) {
            end += 1;
        }
        if end - start >= SHORTEST {
            let (first, last) = (names[start].as_ref(), names[end - 1].as_ref());
            list.push(format!("{first} … {last}"));
        } else {
            list.extend(
                names[start..end]
                    .iter()
                    .map(|name| name.as_ref().to_owned()),
            );
        }
        start = end;
    }
    list
}

/// Whether a name is the one before it with its number raised by one.
fn follows(before: &str, name: &str) -> bool {
    let ((stem, number), (next_stem, next)) = (stem_and_number(before), stem_and_number(name));
    stem == next_stem && number.is_some() && number.and_then(|it| it.checked_add(1)) == next
}

fn stem_and_number(name: &str) -> (&str, Option<u64>) {
    let stem = name.trim_end_matches(|letter: char| letter.is_ascii_digit());
    (stem, name[stem.len()..].parse().ok())
}

/// Conditions in few words: `C1, R1 … R8 > 0; A0 > 1`.
#[must_use]
pub fn conditions(list: &[String]) -> String {
    let (positive, others): (Vec<&str>, Vec<&str>) = list
        .iter()
        .map(String::as_str)
        .partition(|it| it.strip_suffix(" > 0").is_some_and(is_name));
    let mut names: Vec<&str> = positive
        .iter()
        .map(|it| it.trim_end_matches(" > 0"))
        .collect();
    names.sort_by(|left, right| natural(left, right));
    let mut parts = Vec::new();
    if !names.is_empty() {
        parts.push(format!("{} > 0", runs(&names).join(", ")));
    }
    parts.extend(others.into_iter().map(str::to_owned));
    parts.join("; ")
}

fn is_name(text: &str) -> bool {
    let mut letters = text.chars();
    letters.all(|letter| letter.is_alphanumeric() || letter == '_' || letter == '.')
}

/// Digits in groups of three with blanks: `12 345`.
#[must_use]
pub fn grouped(digits: &str) -> String {
    let mut text = String::new();
    for (index, digit) in digits.chars().enumerate() {
        if index > 0 && (digits.len() - index).is_multiple_of(3) {
            text.push(' ');
        }
        text.push(digit);
    }
    text
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn lists_read_as_sentences() {
        assert_eq!(listed(&["R1"]), "R1");
        assert_eq!(listed(&["R1", "R2", "C1"]), "R1, R2 and C1");
    }

    #[test]
    fn runs_of_numbers_are_drawn_together() {
        let names = ["C1", "C2", "C3", "C4", "C5", "C7", "L1", "L2"];
        assert_eq!(runs(&names), ["C1 … C5", "C7", "L1", "L2"]);
        assert_eq!(runs(&["a", "a"]), ["a", "a"]);
    }

    #[test]
    fn positive_values_stand_together() {
        let list = ["R10 > 0", "A0 > 1", "R2 > 0", "a + b > 0"].map(str::to_owned);
        assert_eq!(conditions(&list), "R2, R10 > 0; A0 > 1; a + b > 0");
        assert_eq!(conditions(&[]), "");
    }

    #[test]
    fn long_numbers_stand_in_groups() {
        assert_eq!(grouped("1234567"), "1 234 567");
        assert_eq!(grouped("123"), "123");
    }
}
