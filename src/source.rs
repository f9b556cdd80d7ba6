//! Texts that are read, and places in them.

use std::sync::Arc;

/// Index of a text in [`Sources`].
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct SourceId(u32);

/// A half-open range of bytes in one source text.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub struct Span {
    /// The text.
    pub source: SourceId,
    /// First byte.
    pub start: u32,
    /// One past the last byte.
    pub end: u32,
}

impl Span {
    /// The range `start..end` of `source`.
    #[must_use]
    pub fn new(source: SourceId, start: usize, end: usize) -> Self {
        let clip = |offset: usize| u32::try_from(offset).unwrap_or(u32::MAX);
        Self {
            source,
            start: clip(start),
            end: clip(end),
        }
    }

    /// The smallest range that holds both; `other` must lie in the same text.
    #[must_use]
    pub fn to(self, other: Self) -> Self {
        Self {
            source: self.source,
            start: self.start.min(other.start),
            end: self.end.max(other.end),
        }
    }
}

/// One text with the name it is reported under.
#[derive(Clone, Debug)]
pub struct Source {
    /// File name as the user gave it, `standard input` or `command line`.
    pub name: String,
    /// The whole text.
    pub text: Arc<str>,
}

/// All texts of one run: the file itself and what it uses.
#[derive(Clone, Debug, Default)]
pub struct Sources {
    list: Vec<Source>,
}

impl Sources {
    /// No text yet.
    #[must_use]
    pub fn new() -> Self {
        Self::default()
    }

    /// Keeps a text and gives its id.
    pub fn add(&mut self, name: impl Into<String>, text: impl Into<Arc<str>>) -> SourceId {
        let id = SourceId(u32::try_from(self.list.len()).unwrap_or(u32::MAX));
        self.list.push(Source {
            name: name.into(),
            text: text.into(),
        });
        id
    }

    /// The text behind an id.
    #[must_use]
    pub fn get(&self, id: SourceId) -> &Source {
        &self.list[id.0 as usize]
    }

    /// The characters a span covers.
    #[must_use]
    pub fn slice(&self, span: Span) -> &str {
        let text = &self.get(span.source).text;
        text.get(span.start as usize..span.end as usize)
            .unwrap_or("")
    }

    /// Line and column of the start of a span, both counted from one, columns in characters.
    ///
    /// Cost: linear in the offset.
    #[must_use]
    pub fn position(&self, span: Span) -> (usize, usize) {
        let text = &self.get(span.source).text;
        let mut end = (span.start as usize).min(text.len());
        while !text.is_char_boundary(end) {
            end -= 1;
        }
        let before = &text[..end];
        let line_start = before.rfind('\n').map_or(0, |at| at + 1);
        let line = before.bytes().filter(|&byte| byte == b'\n').count() + 1;
        (line, before[line_start..].chars().count() + 1)
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn columns_count_characters_not_bytes() {
        let mut sources = Sources::new();
        let id = sources.add("x", "a\nΩµ b");
        assert_eq!(sources.position(Span::new(id, 7, 8)), (2, 4));
        assert_eq!(sources.slice(Span::new(id, 2, 4)), "Ω");
    }
}
