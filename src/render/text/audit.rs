//! What cancels between numerator and denominator, and why.

use crate::analysis::report::{Cancellation, FunctionReport, Hides};
use crate::render::answer::Answer;
use crate::render::math;
use crate::render::names::FrequencyPlace;
use crate::render::sentence;
use crate::render::text::Page;
use crate::render::text::fill;
use crate::render::text::order::cause;
use crate::render::text::paint::Paint;

/// The cancellations of one function; empty for functions of functions.
pub(super) fn section(answer: &Answer<'_>, result: &FunctionReport, page: &Page) -> String {
    let Some(list) = &result.cancellations else {
        return String::new();
    };
    let paint = Paint(page.colour);
    let mut text = String::new();
    if list.is_empty() && !result.zero {
        text.push_str("  Nothing cancels.\n");
    }
    for it in list {
        text.push_str(&cancellation(answer, it, page));
    }
    if !result.nominals_missing.is_empty() {
        let mut items = result.nominals_missing.clone();
        items[0] = format!(
            "coincidences were not looked for: no nominal value for {}",
            items[0]
        );
        for line in fill::words(&items, ", ", page.width - 2) {
            text.push_str(&format!("  {}\n", paint.quiet(&line)));
        }
    }
    text
}

fn cancellation(answer: &Answer<'_>, it: &Cancellation, page: &Page) -> String {
    let names = answer.names(FrequencyPlace::First);
    let factor = math::by_powers_of_s(&it.factor, &names).power(it.multiplicity);
    let mut text = format!(
        "  {}\n",
        Paint(page.colour).strong(sentence::class(it.class))
    );
    for (index, line) in fill::lines(&factor, page.width - 4, 2).iter().enumerate() {
        let blank = if index == 0 { "    " } else { "  " };
        text.push_str(&format!("{blank}{line}\n"));
    }
    let mut clauses = vec![cause(answer, it)];
    if let Some(hides) = it.hides {
        clauses.push(hidden_side(hides, it.degree * it.multiplicity));
    }
    if !it.factored {
        clauses.push("a product that was not split into its factors".to_owned());
    }
    for clause in clauses {
        let words: Vec<String> = clause.split(' ').map(str::to_owned).collect();
        for line in fill::words(&words, " ", page.width - 4) {
            text.push_str(&format!("    {}\n", Paint(page.colour).quiet(&line)));
        }
    }
    text
}

fn hidden_side(hides: Hides, modes: u32) -> String {
    let modes = if modes == 1 {
        "a mode that is".to_owned()
    } else {
        format!("{modes} modes that are")
    };
    match hides {
        Hides::NotDriven => format!("{modes} not driven by the source"),
        Hides::NotSeen => format!("{modes} not seen at the output"),
        Hides::Both => format!("{modes} neither driven nor seen"),
    }
}
