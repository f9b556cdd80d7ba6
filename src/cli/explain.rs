//! Draws messages with the lines they are about.

use std::ops::Range;

use annotate_snippets::renderer::DecorStyle;
use annotate_snippets::{Annotation, AnnotationKind, Group, Level, Renderer, Snippet};

use crate::diagnostic::{Diagnostic, Severity};
use crate::source::{SourceId, Sources, Span};

/// Of places further apart only the first is shown with its lines.
const WINDOW: usize = 1 << 14;

/// The message with its place, further places and the way out, as it stands on a terminal; a newline
/// at its end.
#[must_use]
pub fn explain(diagnostic: &Diagnostic, sources: &Sources, colour: bool) -> String {
    let level = match diagnostic.severity {
        Severity::Error => Level::ERROR,
        Severity::Warning => Level::WARNING,
    };
    let mut group = Group::with_title(level.primary_title(&diagnostic.message));
    for excerpt in excerpts(diagnostic, sources) {
        group = group.element(excerpt.snippet(sources));
    }
    let renderer = if colour {
        Renderer::styled()
    } else {
        Renderer::plain()
    };
    if diagnostic.place.is_none() && diagnostic.labels.is_empty() {
        return sentences(diagnostic, group, &renderer);
    }
    if let Some(help) = &diagnostic.help {
        group = group.element(Level::HELP.message(help));
    }
    let drawn = renderer.decor_style(DecorStyle::Unicode).render(&[group]);
    format!("{drawn}\n")
}

/// A message about the input as a whole: a line, and one for the way out.
fn sentences(diagnostic: &Diagnostic, title: Group<'_>, renderer: &Renderer) -> String {
    let mut drawn = format!("{}\n", renderer.render(&[title]));
    if let Some(help) = &diagnostic.help {
        let help = Group::with_title(Level::HELP.primary_title(help));
        drawn.push_str(&format!("{}\n", renderer.render(&[help])));
    }
    drawn
}

/// A mark under a piece of a text.
struct Mark<'a> {
    span: Span,
    kind: AnnotationKind,
    label: Option<&'a str>,
}

/// Neighbouring lines of one text with their marks.
struct Excerpt<'a> {
    source: SourceId,
    lines: Range<usize>,
    marks: Vec<Mark<'a>>,
}

fn excerpts<'a>(diagnostic: &'a Diagnostic, sources: &Sources) -> Vec<Excerpt<'a>> {
    let primary = diagnostic.place.map(|span| Mark {
        span,
        kind: AnnotationKind::Primary,
        label: None,
    });
    let others = diagnostic.labels.iter().map(|label| Mark {
        span: label.place,
        kind: AnnotationKind::Context,
        label: Some(label.text.as_str()),
    });
    let mut list: Vec<Excerpt<'a>> = Vec::new();
    for mark in primary.into_iter().chain(others) {
        let lines = lines_around(mark.span, sources);
        let near = list
            .iter_mut()
            .find(|it| it.is_near(mark.span.source, &lines));
        match near {
            Some(excerpt) => excerpt.take(mark, &lines),
            None => list.push(Excerpt {
                source: mark.span.source,
                lines,
                marks: vec![mark],
            }),
        }
    }
    list
}

impl<'a> Excerpt<'a> {
    fn is_near(&self, source: SourceId, lines: &Range<usize>) -> bool {
        let start = self.lines.start.min(lines.start);
        let end = self.lines.end.max(lines.end);
        self.source == source && end - start <= WINDOW
    }

    fn take(&mut self, mark: Mark<'a>, lines: &Range<usize>) {
        self.lines = self.lines.start.min(lines.start)..self.lines.end.max(lines.end);
        self.marks.push(mark);
    }

    fn snippet<'b>(self, sources: &'b Sources) -> Snippet<'b, Annotation<'b>>
    where
        'a: 'b,
    {
        let source = sources.get(self.source);
        let text = &source.text[self.lines.clone()];
        let (line, _) =
            sources.position(Span::new(self.source, self.lines.start, self.lines.start));
        let offset = self.lines.start;
        let marks = self.marks.into_iter().map(|mark| {
            let range = inside(mark.span, &source.text);
            mark.kind
                .span(range.start - offset..range.end - offset)
                .label(mark.label)
        });
        Snippet::source(text)
            .line_start(line)
            .path(source.name.as_str())
            .annotations(marks)
    }
}

/// Whole lines that hold a span.
fn lines_around(span: Span, sources: &Sources) -> Range<usize> {
    let text = &sources.get(span.source).text;
    let range = inside(span, text);
    let start = text[..range.start].rfind('\n').map_or(0, |at| at + 1);
    let end = text[range.end..]
        .find('\n')
        .map_or(text.len(), |at| range.end + at);
    start..end
}

/// The bytes of a span, brought to places where the text can be cut.
fn inside(span: Span, text: &str) -> Range<usize> {
    let cut = |offset: u32| {
        let mut offset = (offset as usize).min(text.len());
        while !text.is_char_boundary(offset) {
            offset -= 1;
        }
        offset
    };
    let start = cut(span.start);
    start..cut(span.end).max(start)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn messages_show_their_lines_and_the_way_out() {
        let mut sources = Sources::new();
        let text = "title \"Ω\"\nin -R1- out\nin -R1- ground\n";
        let id = sources.add("filter.cutloop", text);
        let at = text.rfind("R1").expect("it is there");
        let first = text.find("R1").expect("it is there");
        let message = Diagnostic::error(Span::new(id, at, at + 2), "R1 stands on two paths")
            .label(Span::new(id, first, first + 2), "first placed here")
            .help("give the second one another name");
        insta::assert_snapshot!(explain(&message, &sources, false));
        assert!(explain(&message, &sources, true).contains('\u{1b}'));
    }

    #[test]
    fn messages_without_a_place_are_a_sentence() {
        let message = Diagnostic::whole("nothing asked").help("add a derive line");
        insta::assert_snapshot!(explain(&message, &Sources::new(), false));
    }

    #[test]
    fn places_outside_the_text_do_not_panic() {
        let mut sources = Sources::new();
        let id = sources.add("x", "µ");
        for (start, end) in [(0, 1), (1, 1), (5, 3), (2, 9)] {
            let message = Diagnostic::warning(Span::new(id, start, end), "odd");
            assert!(explain(&message, &sources, false).contains("odd"));
        }
    }

    #[test]
    fn marks_far_apart_are_shown_apart() {
        let mut sources = Sources::new();
        let text = format!("first\n{}last\n", "# filler\n".repeat(10_000));
        let id = sources.add("long", text.as_str());
        let message = Diagnostic::error(Span::new(id, 0, 5), "twice")
            .label(Span::new(id, text.len() - 5, text.len() - 1), "again");
        let drawn = explain(&message, &sources, false);
        assert!(drawn.lines().count() < 20, "{drawn}");
        assert!(drawn.contains("10002"), "{drawn}");
    }
}
