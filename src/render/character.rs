//! What a function of first or second order does, in words and in closed form.

use crate::analysis::form::{Character, Form, Forms, Inequality, Kind, Shape};
use crate::render::form;
use crate::render::linear::READING;
use crate::render::math::Math;
use crate::render::names::Names;

/// A sentence with an inequality in it.
#[derive(Clone, Debug)]
pub struct Remark {
    /// Words in front.
    pub words: String,
    /// What is said where the inequality is too long.
    pub short: String,
    /// left > right, where the words need it.
    pub inequality: Option<(Math, Math)>,
}

/// What the response is, and where its poles are conjugate.
#[must_use]
pub fn remarks(character: &Character, names: &Names<'_>) -> Vec<Remark> {
    let order = if character.order == 1 {
        "first"
    } else {
        "second"
    };
    let mut list = Vec::new();
    let mut say = |words: String, inequality: Option<&Inequality>| {
        let inequality =
            inequality.map(|it| (form::math(&it.left, names), form::math(&it.right, names)));
        let short = words
            .replace(" (Q > 1/2) where", " where Q > 1/2")
            .replace("; a low-pass notch where", "");
        list.push(Remark {
            words,
            short,
            inequality,
        });
    };
    match &character.kind {
        Some(Kind::UnevenNotch(above)) => match above.always {
            Some(true) => say(format!("low-pass notch of {order} order"), None),
            Some(false) => say(format!("high-pass notch of {order} order"), None),
            None => say(
                format!("notch of {order} order; a low-pass notch where"),
                Some(above),
            ),
        },
        Some(kind) => say(format!("{} of {order} order", word(kind)), None),
        None => {}
    }
    if !character.all_pass_where.is_empty() {
        let equations = character.all_pass_where.iter().map(|(left, right)| {
            let spelled = |it: &Form| READING.spell(&form::math(it, names));
            format!("{} = {}", spelled(left), spelled(right))
        });
        let equations: Vec<String> = equations.collect();
        let words = format!("all-pass where {}", equations.join(" and "));
        say(words, None);
    }
    match &character.conjugate {
        Some(it) if it.always == Some(true) => say("conjugate poles for all values".into(), None),
        Some(it) if it.always == Some(false) => say("real poles for all values".into(), None),
        Some(it) => say("conjugate poles (Q > 1/2) where".into(), Some(it)),
        None => {}
    }
    list
}

/// The name of a kind.
#[must_use]
pub fn word(kind: &Kind) -> &'static str {
    match kind {
        Kind::LowPass => "low-pass",
        Kind::HighPass => "high-pass",
        Kind::BandPass => "band-pass",
        Kind::Notch | Kind::UnevenNotch(_) => "notch",
        Kind::AllPass => "all-pass",
    }
}

/// The answer to a unit step over the names τ, or ω0 and Q, and the function's limits: it jumps to
/// the limit for s towards infinity and settles at the value at s = 0.
#[derive(Clone, Debug)]
pub struct StepResponse {
    /// For reading.
    pub text: String,
    /// The same in TeX.
    pub latex: String,
    /// Whether σ = ω0/(2·Q) and ωd = ω0·√(1 − 1/(4·Q²)) stand in it.
    pub oscillates: bool,
}

/// What σ and ωd are, where they stand in a step response.
pub const OSCILLATION: &str = "σ = ω0/(2·Q), ωd = ω0·√(1 − 1/(4·Q²)), ζ = 1/(2·Q)";

/// The answer to a unit step; `None` where there is no short one.
#[must_use]
pub fn step(
    name: &str,
    latex_name: &str,
    forms: &Forms,
    names: &Names<'_>,
) -> Option<StepResponse> {
    let character = forms.character.as_ref()?;
    let (Some(step), Some(designer)) = (&character.step, &forms.designer) else {
        return None;
    };
    let own = match designer.below.as_slice() {
        [only] if only.power == 1 => &only.shape,
        _ => return None,
    };
    if ["τ", "ω0", "Q", "σ", "ωd", "t", "e"]
        .iter()
        .any(|it| names.is_taken(it))
    {
        return None;
    }
    let (first, last) = (format!("hf({name})"), format!("dc({name})"));
    let tex = |word: &str| format!("\\mathrm{{{word}}}({latex_name})");
    let (tex_first, tex_last) = (tex("hf"), tex("dc"));
    let fall = "e^{-\\sigma t}";
    let (text, latex) = match (own, &character.kind) {
        (Shape::First { .. }, _) => {
            let decay = "e^{-t/\\tau}";
            match (step.first.is_zero(), step.last.is_zero()) {
                (true, _) => (
                    format!("{last}·(1 − e^(−t/τ))"),
                    format!("{tex_last}\\left(1 - {decay}\\right)"),
                ),
                (_, true) => (
                    format!("{first}·e^(−t/τ)"),
                    format!("{tex_first}\\,{decay}"),
                ),
                _ => (
                    format!("{last} + ({first} − {last})·e^(−t/τ)"),
                    format!("{tex_last} + \\left({tex_first} - {tex_last}\\right){decay}"),
                ),
            }
        }
        (
            Shape::Second {
                quality: Some(_), ..
            },
            Some(Kind::LowPass),
        ) => (
            format!("{last}·(1 − e^(−σ·t)·(cos(ωd·t) + (σ/ωd)·sin(ωd·t)))"),
            format!(
                "{tex_last}\\left(1 - {fall}\\left(\\cos\\omega_d t + \\frac{{\\sigma}}{{\\omega_d}}\\sin\\omega_d t\\right)\\right)"
            ),
        ),
        (
            Shape::Second {
                quality: Some(_), ..
            },
            Some(Kind::HighPass),
        ) => (
            format!("{first}·e^(−σ·t)·(cos(ωd·t) − (σ/ωd)·sin(ωd·t))"),
            format!(
                "{tex_first}\\,{fall}\\left(\\cos\\omega_d t - \\frac{{\\sigma}}{{\\omega_d}}\\sin\\omega_d t\\right)"
            ),
        ),
        (
            Shape::Second {
                quality: Some(_), ..
            },
            Some(Kind::BandPass),
        ) => (
            format!("{name}(jω0)·(2·σ/ωd)·e^(−σ·t)·sin(ωd·t)"),
            format!(
                "{latex_name}(j\\omega_0)\\,\\frac{{2\\sigma}}{{\\omega_d}}{fall}\\sin\\omega_d t"
            ),
        ),
        _ => return None,
    };
    Some(StepResponse {
        text,
        latex,
        oscillates: character.order == 2,
    })
}
