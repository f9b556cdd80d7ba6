//! Plain path lines without the grammar: ASCII names, digits, single parts and joins. Any other line
//! is left to the parser, which reads a plain one to the same tree.

use crate::language::statement::WORDS;
use crate::language::syntax::{Group, Link, Name, NamePart, StatementKind};
use crate::source::{SourceId, Span};

/// Where the scanner stands in a statement.
struct Scanner<'a> {
    source: SourceId,
    base: usize,
    text: &'a str,
    at: usize,
}

/// The path in a statement; `None` for every statement that is not plain.
pub(crate) fn scan(source: SourceId, base: usize, text: &str) -> Option<StatementKind> {
    let mut scanner = Scanner {
        source,
        base,
        text,
        at: 0,
    };
    let mut nodes = vec![scanner.node()?];
    let first = &text[..scanner.at];
    if WORDS.iter().any(|(word, _)| *word == first) {
        return None;
    }
    let mut links = Vec::new();
    scanner.blanks();
    while scanner.at < text.len() {
        scanner.dash()?;
        if scanner.dash().is_some() {
            links.push(Link::Join);
        } else {
            let part = scanner.name()?;
            scanner.dash()?;
            links.push(Link::Part(Group::One(part, None)));
        }
        scanner.blanks();
        nodes.push(scanner.node()?);
        scanner.blanks();
    }
    (!links.is_empty()).then_some(StatementKind::Path(nodes, links))
}

impl Scanner<'_> {
    fn byte(&self) -> Option<u8> {
        self.text.as_bytes().get(self.at).copied()
    }

    fn blanks(&mut self) {
        while matches!(self.byte(), Some(b' ' | b'\t')) {
            self.at += 1;
        }
    }

    fn dash(&mut self) -> Option<()> {
        (self.byte()? == b'-').then(|| self.at += 1)
    }

    /// A name, or a whole number.
    fn node(&mut self) -> Option<Name> {
        if !self.byte()?.is_ascii_digit() {
            return self.name();
        }
        let start = self.at;
        while self.byte().is_some_and(|byte| byte.is_ascii_digit()) {
            self.at += 1;
        }
        self.named(start)
    }

    fn name(&mut self) -> Option<Name> {
        let start = self.at;
        let letter = |byte: u8| byte.is_ascii_alphabetic() || byte == b'_';
        if !letter(self.byte()?) {
            return None;
        }
        while self
            .byte()
            .is_some_and(|byte| letter(byte) || byte.is_ascii_digit())
        {
            self.at += 1;
        }
        self.named(start)
    }

    /// The word from `start` on, where a blank, a dash or the end follows.
    fn named(&self, start: usize) -> Option<Name> {
        if !matches!(self.byte(), None | Some(b' ' | b'\t' | b'-')) {
            return None;
        }
        Some(Name {
            parts: vec![NamePart::Text(self.text[start..self.at].to_owned())],
            place: Span::new(self.source, self.base + start, self.base + self.at),
        })
    }
}
