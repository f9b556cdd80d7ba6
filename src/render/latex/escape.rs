//! Text and names for LaTeX.

/// Text with the characters LaTeX takes for commands made harmless.
pub(super) fn escape(text: &str) -> String {
    let mut escaped = String::new();
    for letter in text.replace("->", "→").chars() {
        match letter {
            '\\' => escaped.push_str("\\textbackslash{}"),
            '{' | '}' | '$' | '&' | '#' | '_' | '%' => {
                escaped.push('\\');
                escaped.push(letter);
            }
            '\u{a0}' => escaped.push('~'),
            '~' => escaped.push_str("\\textasciitilde{}"),
            '^' => escaped.push_str("\\textasciicircum{}"),
            '→' => escaped.push_str("$\\to$"),
            '<' => escaped.push_str("$<$"),
            '>' => escaped.push_str("$>$"),
            '−' => escaped.push_str("$-$"),
            '·' => escaped.push_str("$\\cdot$"),
            '∥' => escaped.push_str("$\\parallel$"),
            '…' => escaped.push_str("\\dots{}"),
            '±' => escaped.push_str("$\\pm$"),
            '–' => escaped.push_str("--"),
            other => match greek_letter(other) {
                Some(command) => escaped.push_str(&format!("$\\{command}$")),
                None => escaped.push(other),
            },
        }
    }
    escaped
}

/// A name as quantity and index: `R1` is `R_{1}`, `gm_Q1` is `g_{\mathrm{m},\mathrm{Q1}}`.
pub(super) fn name(name: &str) -> String {
    let (path, own) = match name.rsplit_once('.') {
        Some((path, own)) => (path.split('.').collect(), own),
        None => (Vec::new(), name),
    };
    let (base, rest) = base_and_rest(own);
    let mut indices: Vec<String> = path.into_iter().map(index).collect();
    indices.extend(rest.split('_').filter(|part| !part.is_empty()).map(index));
    if indices.is_empty() {
        base
    } else {
        format!("{base}_{{{}}}", indices.join(","))
    }
}

fn base_and_rest(own: &str) -> (String, &str) {
    if own == "eps" {
        return ("\\varepsilon".to_owned(), "");
    }
    if let Some((word, rest)) = greek_word(own) {
        return (format!("\\{word}"), rest);
    }
    if is_word(own) {
        return (format!("\\mathrm{{{own}}}"), "");
    }
    let first = own.chars().next().unwrap_or('_');
    let rest = &own[first.len_utf8().min(own.len())..];
    match greek_letter(first) {
        Some(command) => (format!("\\{command}"), rest),
        None if first == '_' => ("\\_".to_owned(), rest),
        None => (first.to_string(), rest),
    }
}

/// Whether a name is a word or an abbreviation, not a quantity with an index.
fn is_word(own: &str) -> bool {
    let letters = own.chars().count();
    let all = |test: fn(char) -> bool| own.chars().all(test);
    (letters > 2 && all(|letter| letter.is_ascii_uppercase()))
        || (letters > 3 && all(|letter| letter.is_ascii_lowercase()))
}

fn index(part: &str) -> String {
    if part.bytes().all(|byte| byte.is_ascii_digit()) {
        return part.to_owned();
    }
    match greek_word(part) {
        Some((word, "")) => format!("\\{word}"),
        _ => format!("\\mathrm{{{}}}", letters(part)),
    }
}

/// Letters for an upright index; Greek ones by their commands.
fn letters(part: &str) -> String {
    part.chars()
        .map(|letter| match greek_letter(letter) {
            Some(command) => format!("\\{command}{{}}"),
            None => letter.to_string(),
        })
        .collect()
}

/// A Greek letter by its English name, alone or before a number or an underscore.
fn greek_word(own: &str) -> Option<(&'static str, &str)> {
    WORDS.iter().find_map(|(word, _)| {
        let rest = own.strip_prefix(word)?;
        let ends = rest.is_empty() || rest.starts_with(|it: char| it == '_' || it.is_ascii_digit());
        ends.then_some((*word, rest))
    })
}

fn greek_letter(letter: char) -> Option<&'static str> {
    let small = WORDS.iter().find(|(_, it)| *it == letter);
    let capital = CAPITALS.iter().find(|(_, it)| *it == letter);
    small.or(capital).map(|(word, _)| *word)
}

const WORDS: [(&str, char); 22] = [
    ("alpha", 'α'),
    ("beta", 'β'),
    ("gamma", 'γ'),
    ("delta", 'δ'),
    ("epsilon", 'ε'),
    ("zeta", 'ζ'),
    ("eta", 'η'),
    ("theta", 'θ'),
    ("kappa", 'κ'),
    ("lambda", 'λ'),
    ("mu", 'μ'),
    ("nu", 'ν'),
    ("xi", 'ξ'),
    ("pi", 'π'),
    ("rho", 'ρ'),
    ("sigma", 'σ'),
    ("tau", 'τ'),
    ("upsilon", 'υ'),
    ("phi", 'φ'),
    ("chi", 'χ'),
    ("psi", 'ψ'),
    ("omega", 'ω'),
];

const CAPITALS: [(&str, char); 10] = [
    ("Gamma", 'Γ'),
    ("Delta", 'Δ'),
    ("Theta", 'Θ'),
    ("Lambda", 'Λ'),
    ("Xi", 'Ξ'),
    ("Pi", 'Π'),
    ("Sigma", 'Σ'),
    ("Phi", 'Φ'),
    ("Psi", 'Ψ'),
    ("Omega", 'Ω'),
];

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn names_become_quantities_with_indices() {
        let cases = [
            ("R1", "R_{1}"),
            ("C", "C"),
            ("gm_Q1", "g_{\\mathrm{m},\\mathrm{Q1}}"),
            ("rpi_Q1", "r_{\\pi,\\mathrm{Q1}}"),
            ("A1.R2", "R_{\\mathrm{A1},2}"),
            ("CMRR", "\\mathrm{CMRR}"),
            ("gain", "\\mathrm{gain}"),
            ("CD", "C_{\\mathrm{D}}"),
            ("eps", "\\varepsilon"),
            ("omega0", "\\omega_{0}"),
            ("τ2", "\\tau_{2}"),
            ("Zload", "Z_{\\mathrm{load}}"),
        ];
        for (given, expected) in cases {
            assert_eq!(name(given), expected);
        }
    }

    #[test]
    fn text_holds_no_commands() {
        assert_eq!(escape("50 % of R_1 {x}"), "50 \\% of R\\_1 \\{x\\}");
    }
}
