//! Sentences for statements that cannot be read, and ways out of them.

use crate::diagnostic::Diagnostic;
use crate::language::nearest::nearest;
use crate::language::parser::is_expression;
use crate::language::statement::{Form, WORDS, first_word, is_name_char};
use crate::source::{SourceId, Span};

/// A mistake inside one statement, by bytes of its text.
#[derive(Clone, Debug, PartialEq, Eq)]
pub(crate) struct Mistake {
    start: usize,
    end: usize,
    message: String,
    help: Option<String>,
}

impl Mistake {
    fn new(start: usize, end: usize, message: impl Into<String>) -> Self {
        Self {
            start,
            end,
            message: message.into(),
            help: None,
        }
    }

    fn help(mut self, help: impl Into<String>) -> Self {
        self.help = Some(help.into());
        self
    }

    /// As a message of the whole text.
    pub(crate) fn at(self, source: SourceId, base: usize) -> Diagnostic {
        let place = Span::new(source, base + self.start, base + self.end);
        let diagnostic = Diagnostic::error(place, self.message);
        match self.help {
            Some(help) => diagnostic.help(help),
            None => diagnostic,
        }
    }
}

/// Mistakes that are seen before the statement is read.
pub(crate) fn before(text: &str, form: Form) -> Option<Mistake> {
    if matches!(form, Form::Title | Form::Use) {
        return None;
    }
    let bytes = text.as_bytes();
    let comment = text.find('#').unwrap_or(text.len());
    for at in 1..comment.saturating_sub(1) {
        if bytes[at] == b','
            && bytes[at - 1].is_ascii_digit()
            && bytes[at + 1].is_ascii_digit()
            && is_number_before(text, at)
        {
            let start = text[..at]
                .rfind(|c: char| !c.is_ascii_digit())
                .map_or(0, |found| {
                    found + text[found..].chars().next().map_or(1, char::len_utf8)
                });
            let end = text[at + 1..]
                .find(|c: char| !c.is_ascii_digit())
                .map_or(text.len(), |found| at + 1 + found);
            let fixed = text[start..end].replace(',', ".");
            return Some(
                Mistake::new(
                    start,
                    end,
                    "a comma stands between two digits; the decimal sign is the point",
                )
                .help(format!(
                    "write {fixed}, or a blank behind the comma of a list"
                )),
            );
        }
    }
    None
}

/// Whether the digits before a position are no end of a name.
fn is_number_before(text: &str, at: usize) -> bool {
    let head = &text[..at];
    let word = head
        .rfind(|c: char| !is_name_char(c))
        .map_or(head, |found| {
            let width = head[found..].chars().next().map_or(1, char::len_utf8);
            &head[found + width..]
        });
    word.starts_with(|c: char| c.is_ascii_digit())
}

/// Why a statement cannot be read at a byte.
pub(crate) fn after(text: &str, form: Form, at: usize, expected: Vec<&'static str>) -> Mistake {
    value_is_expression(text, form)
        .or_else(|| no_multiplication_sign(text, at, form))
        .or_else(|| bench_name(text, at, form))
        .or_else(|| unknown_word(text, form))
        .or_else(|| unit_of_number(text, at))
        .unwrap_or_else(|| plain(text, form, at, expected))
}

/// `R1 : 2*R2`
fn value_is_expression(text: &str, form: Form) -> Option<Mistake> {
    if form != Form::Parts {
        return None;
    }
    let colon = text.find(':')?;
    let value = text[colon + 1..].split('#').next().unwrap_or("").trim();
    if value.is_empty() || !is_expression(value) {
        return None;
    }
    let start = colon + 1 + text[colon + 1..].find(value)?;
    let names = text[..colon].trim();
    Some(
        Mistake::new(
            start,
            start + value.len(),
            "behind : stands a number, the nominal value",
        )
        .help(format!("an exact relation is written {names} = {value}")),
    )
}

/// `2R1`, `2 (a + b)`, `) (`
fn no_multiplication_sign(text: &str, at: usize, form: Form) -> Option<Mistake> {
    let has_expression = matches!(
        form,
        Form::Relation | Form::Derive | Form::Claim | Form::Assume | Form::Is | Form::Starts
    );
    if !has_expression {
        return None;
    }
    let next = text[at..].chars().next()?;
    let head = text[..at].trim_end();
    let last = head.chars().next_back()?;
    let starts_value = is_name_char(next) || next == '(';
    let ends_value = is_name_char(last) || last == ')' || last == '}';
    if !starts_value || !ends_value {
        return None;
    }
    let start = if last == ')' {
        head.len() - 1
    } else {
        head.rfind(|c: char| !is_name_char(c) && c != '.')
            .map_or(0, |found| {
                found + head[found..].chars().next().map_or(1, char::len_utf8)
            })
    };
    let left = &head[start..];
    // Only a number or a closed parenthesis is clearly a factor; two names may be a missing word.
    if !(left.starts_with(|c: char| c.is_ascii_digit()) || last == ')')
        || form == Form::Is && last == ')'
    {
        return None;
    }
    let right_end = text[at..]
        .find(|c: char| !is_name_char(c))
        .map_or(text.len(), |found| at + found);
    let right = if next == '(' {
        "("
    } else {
        &text[at..right_end]
    };
    Some(
        Mistake::new(
            start,
            right_end.max(at + 1),
            "there is no multiplication without *",
        )
        .help(format!("write {left}*{right}")),
    )
}

/// `V+`, `+5V`, `3V3` where a name must stand.
fn bench_name(text: &str, at: usize, form: Form) -> Option<Mistake> {
    if matches!(form, Form::Claim | Form::Assume) {
        return None;
    }
    let is_bench = |c: char| is_name_char(c) || matches!(c, '+' | '−');
    for (start, word) in words(text, &is_bench) {
        let end = start + word.len();
        let touches = (start..=end).contains(&at);
        if !touches {
            continue;
        }
        if let Some(offer) = bench_offer(word) {
            return Some(
                Mistake::new(start, end, format!("{word} is not a name")).help(format!(
                    "a name begins with a letter and holds letters, digits and _: write {offer}"
                )),
            );
        }
    }
    None
}

fn words<'a>(text: &'a str, is_in: &dyn Fn(char) -> bool) -> Vec<(usize, &'a str)> {
    let mut found = Vec::new();
    let mut start = None;
    for (at, c) in text.char_indices().chain([(text.len(), ' ')]) {
        match (is_in(c), start) {
            (true, None) => start = Some(at),
            (false, Some(from)) => {
                found.push((from, &text[from..at]));
                start = None;
            }
            _ => {}
        }
    }
    found
}

fn bench_offer(word: &str) -> Option<String> {
    let letters = |text: &str| text.chars().any(char::is_alphabetic);
    if let Some(name) = word.strip_suffix('+')
        && !name.is_empty()
        && letters(name)
        && name.chars().all(is_name_char)
    {
        return Some(format!("{}_p", name.to_lowercase()));
    }
    if let Some(name) = word.strip_suffix(['-', '−'])
        && !name.is_empty()
        && letters(name)
        && name.chars().all(is_name_char)
    {
        return Some(format!("{}_n", name.to_lowercase()));
    }
    let unsigned = word.strip_prefix('+').unwrap_or(word);
    if unsigned.starts_with(|c: char| c.is_ascii_digit())
        && letters(unsigned)
        && unsigned.chars().all(is_name_char)
    {
        let at = unsigned.find(|c: char| !c.is_ascii_digit())?;
        let (digits, rest) = unsigned.split_at(at);
        let rest = rest.to_lowercase();
        return match rest.strip_prefix('v') {
            Some("") => Some(format!("v{digits}")),
            Some(more) => Some(format!("v{digits}v{more}")),
            None => Some(format!("n{digits}{rest}")),
        };
    }
    None
}

/// A first word that is nearly a statement word.
fn unknown_word(text: &str, form: Form) -> Option<Mistake> {
    let word = first_word(text);
    let rest = text[word.len()..].trim_start();
    if !matches!(form, Form::Path | Form::Relation | Form::Parts)
        || word.is_empty()
        || !rest.starts_with(|c: char| is_name_char(c) || c == '"')
    {
        return None;
    }
    let known = nearest(word, WORDS.iter().map(|(word, _)| *word))?;
    Some(
        Mistake::new(0, word.len(), format!("{word} begins no statement"))
            .help(format!("did you mean {known}?")),
    )
}

/// Letters behind a number that are no unit.
fn unit_of_number(text: &str, at: usize) -> Option<Mistake> {
    let is_word = |c: char| is_name_char(c) || c == '.' || c == 'Ω';
    for (start, word) in words(text, &is_word) {
        let end = start + word.len();
        if !(start..=end).contains(&at) || !word.starts_with(|c: char| c.is_ascii_digit()) {
            continue;
        }
        let letters = word.find(char::is_alphabetic)?;
        return Some(
            Mistake::new(
                start,
                end,
                format!("{} is no unit or prefix", &word[letters..]),
            )
            .help("prefixes are f p n u m k M G T, units Ω F H S V A Hz s; codes look like 4k7"),
        );
    }
    None
}

fn plain(text: &str, form: Form, at: usize, mut expected: Vec<&'static str>) -> Mistake {
    let what = match form {
        Form::Title => "a title is written title \"…\"",
        Form::Use => "another file is used by use \"file.cutloop\"",
        Form::Let => "a whole number is set by let N = 5",
        Form::For => "repetition begins with for k = 1 .. N",
        Form::End => "end stands alone",
        Form::Module => "a module begins with module name(port, port) with parameter, parameter",
        Form::Free => "free symbols are declared by free a, b or free A0 : 1e5 or free x in 0 .. 1",
        Form::Drive => "drives are declared by drive Vd, Vc",
        Form::Assume => "an assumption is written assume A0 > 1",
        Form::Derive => "a question is written derive H = voltage(out) / Vs",
        Form::Claim => "a claim is written claim H = …, claim order(H) = 2 or claim dc(H) = 1",
        Form::Starts => "an initial value is written starts voltage(C1) = V0",
        Form::Is => "a device is written U1 is opamp(+ a, - b, out) with gain = A0",
        Form::Parts => "a nominal value is written R1, R2 : 10 kΩ ± 1 %",
        Form::Relation => "a relation is written C2 = C1/2",
        Form::Path => "a path is written node -part- node -part- node",
    };
    expected.sort_unstable();
    expected.dedup();
    expected.truncate(4);
    let end = text[at.min(text.len())..]
        .chars()
        .next()
        .map_or(at, |c| at + c.len_utf8());
    let (start, end) = if at >= text.len() {
        let width = text.chars().next_back().map_or(0, char::len_utf8);
        (text.len() - width, text.len())
    } else {
        (at, end)
    };
    let found = text[at.min(text.len())..].trim_start();
    let mut message = if found.is_empty() {
        "the statement ends too early".to_owned()
    } else {
        "this cannot be read".to_owned()
    };
    if !expected.is_empty() {
        message.push_str(": expected ");
        message.push_str(&or_list(&expected));
    }
    Mistake::new(start, end, message).help(what)
}

fn or_list(words: &[&str]) -> String {
    match words {
        [] => String::new(),
        [one] => (*one).to_owned(),
        [rest @ .., last] => format!("{} or {last}", rest.join(", ")),
    }
}

/// Both ways to read `||` beside another sign: `2*R1 || R2`.
pub(crate) fn both_readings(text: &str) -> (String, String) {
    let trimmed = text.trim();
    let Some(bar) = trimmed.find("||") else {
        return (format!("({trimmed})"), trimmed.to_owned());
    };
    let (left, right) = (trimmed[..bar].trim(), trimmed[bar + 2..].trim());
    let split = left
        .char_indices()
        .rev()
        .find(|(_, c)| matches!(c, '*' | '/' | '·' | '×' | '-' | '−' | '^'));
    if let Some((at, sign)) = split {
        if sign == '^' {
            return (
                format!("({left}) || {right}"),
                format!("({} || {right}){}", left[..at].trim(), &left[at..]),
            );
        }
        let next = at + sign.len_utf8();
        return (
            format!("{}({} || {right})", &left[..next], left[next..].trim()),
            format!("({left}) || {right}"),
        );
    }
    let split = right
        .char_indices()
        .find(|(_, c)| matches!(c, '*' | '/' | '·' | '×' | '^'));
    if let Some((at, _)) = split {
        return (
            format!("({left} || {}){}", right[..at].trim(), &right[at..]),
            format!("{left} || ({right})"),
        );
    }
    (format!("({trimmed})"), trimmed.to_owned())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn both_readings_are_offered() {
        assert_eq!(
            both_readings("2*R1 || R2"),
            ("2*(R1 || R2)".to_owned(), "(2*R1) || R2".to_owned())
        );
        assert_eq!(
            both_readings("R1 || R2*3"),
            ("(R1 || R2)*3".to_owned(), "R1 || (R2*3)".to_owned())
        );
    }

    #[test]
    fn bench_names_are_offered_as_names() {
        assert_eq!(bench_offer("V+"), Some("v_p".to_owned()));
        assert_eq!(bench_offer("+5V"), Some("v5".to_owned()));
        assert_eq!(bench_offer("3V3"), Some("v3v3".to_owned()));
        assert_eq!(bench_offer("R1"), None);
    }
}
