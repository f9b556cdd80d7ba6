//! A text split into statements, and each statement's kind read off its first words.

use crate::diagnostic::Diagnostic;
use crate::source::{SourceId, Span};

/// Bytes a statement may hold.
const MAX_STATEMENT: usize = 1 << 20;
/// Parentheses that may be open at once.
const MAX_DEPTH: usize = 200;

/// The kinds a statement can have by its first words.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash)]
pub(crate) enum Form {
    Title,
    Use,
    Let,
    For,
    End,
    Module,
    Free,
    Drive,
    Assume,
    Derive,
    Claim,
    Starts,
    Is,
    Parts,
    Relation,
    Path,
}

/// Statement words and what they start.
pub(crate) const WORDS: [(&str, Form); 12] = [
    ("title", Form::Title),
    ("use", Form::Use),
    ("let", Form::Let),
    ("for", Form::For),
    ("end", Form::End),
    ("module", Form::Module),
    ("free", Form::Free),
    ("drive", Form::Drive),
    ("assume", Form::Assume),
    ("derive", Form::Derive),
    ("claim", Form::Claim),
    ("starts", Form::Starts),
];

/// A piece of the text that holds one statement.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) struct Piece {
    /// First byte.
    pub(crate) start: usize,
    /// One past the last byte.
    pub(crate) end: usize,
}

/// What the splitter remembers of the statement it is in.
struct Splitter<'a> {
    source: SourceId,
    text: &'a str,
    start: usize,
    depth: usize,
    first_open: usize,
    too_deep: Option<usize>,
    /// Last byte that is neither blank nor comment, and the one that counts for `with`.
    last: Option<(usize, char)>,
    pieces: Vec<Piece>,
    errors: Vec<Diagnostic>,
}

/// Splits a text at line ends and semicolons.
///
/// A line goes on while a parenthesis is open, after a trailing `,` `-` `+` `*` `=`, and after a
/// `with` that follows `)`.
pub(crate) fn split(source: SourceId, text: &str) -> (Vec<Piece>, Vec<Diagnostic>) {
    let mut splitter = Splitter {
        source,
        text,
        start: 0,
        depth: 0,
        first_open: 0,
        too_deep: None,
        last: None,
        pieces: Vec::new(),
        errors: Vec::new(),
    };
    let mut chars = text.char_indices().peekable();
    while let Some((at, c)) = chars.next() {
        match c {
            '"' => {
                splitter.last = Some((at, c));
                // A string ends at its quote or at the end of its line.
                while let Some(&(inside, next)) = chars.peek() {
                    if next == '\n' {
                        break;
                    }
                    chars.next();
                    splitter.last = Some((inside, next));
                    if next == '"' {
                        break;
                    }
                }
            }
            '#' => while chars.next_if(|&(_, next)| next != '\n').is_some() {},
            '(' => splitter.open(at),
            ')' => {
                splitter.depth = splitter.depth.saturating_sub(1);
                splitter.last = Some((at, c));
            }
            '\n' if splitter.goes_on(at) => {}
            ';' if splitter.depth > 0 => splitter.last = Some((at, c)),
            '\n' | ';' => splitter.finish(at, at + 1),
            _ if c.is_whitespace() => {}
            _ => splitter.last = Some((at, c)),
        }
    }
    splitter.close_file();
    (splitter.pieces, splitter.errors)
}

impl Splitter<'_> {
    fn open(&mut self, at: usize) {
        if self.depth == 0 {
            self.first_open = at;
        }
        self.depth += 1;
        if self.depth > MAX_DEPTH && self.too_deep.is_none() {
            self.too_deep = Some(at);
        }
        self.last = Some((at, '('));
    }

    /// Whether the statement goes on behind the line end at `at`.
    fn goes_on(&self, at: usize) -> bool {
        if self.depth > 0 {
            return true;
        }
        let Some((position, last)) = self.last else {
            return false;
        };
        match last {
            ',' | '-' | '−' | '+' | '*' | '·' | '×' | '=' => {
                // A join ends a path only by mistake, an anonymous node never with a dash.
                position < at
            }
            'h' => {
                let before = self.text[self.start..=position].strip_suffix("with");
                before.is_some_and(|text| {
                    text.ends_with(char::is_whitespace) && text.trim_end().ends_with(')')
                })
            }
            _ => false,
        }
    }

    fn finish(&mut self, end: usize, next: usize) {
        self.push(end);
        self.start = next;
        self.depth = 0;
        self.too_deep = None;
        self.last = None;
    }

    fn push(&mut self, end: usize) {
        let Some((last, _)) = self.last else {
            return;
        };
        let raw = &self.text[self.start..end];
        let start = self.start + leading_blank(raw);
        let place = |from, to| Span::new(self.source, from, to);
        if let Some(at) = self.too_deep {
            self.errors.push(
                Diagnostic::error(
                    place(at, at + 1),
                    format!("more than {MAX_DEPTH} parentheses are open here"),
                )
                .help("name a part of the expression by a relation and use the name"),
            );
            return;
        }
        if end - start > MAX_STATEMENT {
            self.errors.push(
                Diagnostic::error(
                    place(start, start + 1),
                    "this statement is longer than 1 MiB",
                )
                .help("split it into several statements"),
            );
            return;
        }
        let last = last + self.text[last..].chars().next().map_or(1, char::len_utf8);
        self.pieces.push(Piece {
            start,
            end: last.max(start),
        });
    }

    fn close_file(&mut self) {
        let end = self.text.len();
        if self.depth > 0 && self.too_deep.is_none() {
            self.errors.push(
                Diagnostic::error(
                    Span::new(self.source, self.first_open, self.first_open + 1),
                    "this parenthesis is never closed",
                )
                .help("close it; a line goes on while a parenthesis is open"),
            );
            return;
        }
        self.push(end);
    }
}

/// Bytes of blanks and comments before the first word.
fn leading_blank(text: &str) -> usize {
    let mut chars = text.char_indices();
    while let Some((at, c)) = chars.next() {
        if c == '#' {
            for (_, next) in chars.by_ref() {
                if next == '\n' {
                    break;
                }
            }
        } else if !c.is_whitespace() && c != '\u{FEFF}' {
            return at;
        }
    }
    text.len()
}

/// Whether a character can stand in a name.
pub(crate) fn is_name_char(c: char) -> bool {
    c.is_alphanumeric() || c == '_'
}

/// The first word of a statement.
pub(crate) fn first_word(text: &str) -> &str {
    let end = text.find(|c| !is_name_char(c)).unwrap_or(text.len());
    &text[..end]
}

/// The kind of a statement.
pub(crate) fn form(text: &str) -> Form {
    let word = first_word(text);
    let rest = text[word.len()..].trim_start();
    // `end -R1- b` is no path: statement words are reserved.
    if let Some((_, form)) = WORDS.iter().find(|(known, _)| *known == word) {
        return *form;
    }
    if has_is(text) {
        return Form::Is;
    }
    let mut depth = 0_usize;
    let mut in_string = false;
    let mut brace = 0_usize;
    for c in rest.chars() {
        match c {
            '"' => in_string = !in_string,
            _ if in_string => {}
            '(' => depth += 1,
            ')' => depth = depth.saturating_sub(1),
            '{' => brace += 1,
            '}' => brace = brace.saturating_sub(1),
            '#' => break,
            _ if depth > 0 || brace > 0 => {}
            ':' => return Form::Parts,
            '=' => return Form::Relation,
            _ => {}
        }
    }
    Form::Path
}

/// `names is kind …`
fn has_is(text: &str) -> bool {
    let mut rest = text;
    let mut names = 0;
    loop {
        let end = rest
            .find(|c: char| !is_name_char(c) && !matches!(c, '.' | '{' | '}'))
            .unwrap_or(rest.len());
        let mut end = end;
        // Braces may hold signs and blanks.
        while rest[..end].matches('{').count() > rest[..end].matches('}').count() {
            match rest[end..].find('}') {
                Some(at) => end += at + 1,
                None => return false,
            }
            while let Some(c) = rest[end..].chars().next() {
                if is_name_char(c) || matches!(c, '.' | '{') {
                    end += c.len_utf8();
                } else {
                    break;
                }
            }
        }
        if end == 0 {
            return false;
        }
        let word = &rest[..end];
        let after = rest[end..].trim_start();
        if word == "is" && names > 0 {
            return after.starts_with(|c: char| c.is_alphabetic() || c == '_' || c == '{');
        }
        names += 1;
        rest = after.strip_prefix(',').map_or(after, str::trim_start);
    }
}

/// Comments out, blanks squeezed to one.
pub(crate) fn squeeze(text: &str) -> String {
    let lines: Vec<&str> = text
        .lines()
        .map(|line| line.split('#').next().unwrap_or(""))
        .collect();
    lines
        .join(" ")
        .split_whitespace()
        .collect::<Vec<_>>()
        .join(" ")
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::source::Sources;

    fn pieces(text: &str) -> Vec<String> {
        let mut sources = Sources::new();
        let id = sources.add("x", text);
        let (pieces, errors) = split(id, text);
        assert!(errors.is_empty(), "{errors:?}");
        pieces
            .iter()
            .map(|piece| text[piece.start..piece.end].to_owned())
            .collect()
    }

    #[test]
    fn lines_and_semicolons_separate() {
        assert_eq!(pieces("a; b # c; d\n\n e "), ["a", "b", "e"]);
        assert_eq!(
            pieces("title \"a; (b # c\"\nx"),
            ["title \"a; (b # c\"", "x"]
        );
    }

    #[test]
    fn a_line_goes_on_where_it_must() {
        assert_eq!(pieces("a -(R1\n+ R2)- b\nc"), ["a -(R1\n+ R2)- b", "c"]);
        assert_eq!(pieces("x = 1 + # more\n 2\ny"), ["x = 1 + # more\n 2", "y"]);
        assert_eq!(pieces("U is k(a) with\n g = 1"), ["U is k(a) with\n g = 1"]);
        assert_eq!(pieces("H with\n g"), ["H with", "g"]);
    }

    #[test]
    fn forms_are_seen_from_the_first_words() {
        assert_eq!(form("in -R1(10 kΩ)- b"), Form::Path);
        assert_eq!(form("R1, R2 : 10k"), Form::Parts);
        assert_eq!(form("R1 = R2 = R"), Form::Relation);
        assert_eq!(form("U{k+1} is opamp(+ a, - b, out)"), Form::Is);
        assert_eq!(form("free A0 : 1e5"), Form::Free);
        assert_eq!(form("is -R1- b"), Form::Path);
        assert_eq!(form("n{k - 1} -R1- b"), Form::Path);
    }

    #[test]
    fn deep_nesting_is_refused_and_reading_goes_on() {
        let mut sources = Sources::new();
        let text = format!("x = {}1{}\ny", "(".repeat(10_000), ")".repeat(10_000));
        let id = sources.add("x", text.as_str());
        let (pieces, errors) = split(id, &text);
        assert_eq!(errors.len(), 1);
        assert_eq!(pieces.len(), 1);
    }
}
