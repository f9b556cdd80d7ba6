//! Drawings as SVG. Plain attributes hold the colours of paper; the style sheet inside replaces them
//! by custom properties that follow the reader's colour scheme. The palette is safe for colour-blind
//! readers: tinted things also differ by a halo and by their remark.

use std::fmt::Write as _;

use crate::drawing::shape::{Point, Role, Stroke, Tint};
use crate::drawing::{Drawing, Label, Symbol};

const STYLE: &str = "\
:root{--ink:#18222d;--wire:#3f5a73;--quiet:#5b6875;--port:#0b5fa5;--static:#8a3a00;--loop:#00614a;--static-halo:#ffd9b8;--loop-halo:#bfeadd;--page:#ffffff}\
@media (prefers-color-scheme:dark){:root{--ink:#e8edf2;--wire:#9db4c9;--quiet:#a8b3be;--port:#7cc0ff;--static:#ffb27a;--loop:#6fdcbd;--static-halo:#553016;--loop-halo:#124438;--page:#14191f}}\
.page{fill:var(--page)}.wire{stroke:var(--wire)}.part{stroke:var(--ink)}.solid{fill:var(--ink);stroke:none}.dot{fill:var(--wire)}\
.name{fill:var(--ink)}.quiet{fill:var(--quiet)}.port{fill:var(--port)}.static{stroke:var(--static)}.loop{stroke:var(--loop)}\
.static-text{fill:var(--static)}.loop-text{fill:var(--loop)}.static-halo{fill:var(--static-halo)}.loop-halo{fill:var(--loop-halo)}";

/// A whole SVG document.
#[must_use]
pub fn drawing(drawing: &Drawing) -> String {
    let (width, height) = (drawing.width, drawing.height);
    let mut out = String::new();
    let title = drawing.title.as_deref().unwrap_or("Network");
    let _ = writeln!(
        out,
        "<svg xmlns=\"http://www.w3.org/2000/svg\" viewBox=\"0 0 {width} {height}\" width=\"{width}\" height=\"{height}\" role=\"img\" font-family=\"Helvetica, Arial, 'DejaVu Sans', sans-serif\" font-size=\"12\">"
    );
    let _ = writeln!(out, "<title>{}</title>", escaped(title));
    let _ = writeln!(out, "<style>{STYLE}</style>");
    let _ = writeln!(
        out,
        "<rect class=\"page\" width=\"{width}\" height=\"{height}\" fill=\"#ffffff\"/>"
    );
    for symbol in &drawing.symbols {
        halo(&mut out, symbol);
    }
    wires(&mut out, drawing);
    for symbol in &drawing.symbols {
        part(&mut out, symbol);
    }
    for label in &drawing.labels {
        text(&mut out, label);
    }
    out.push_str("</svg>\n");
    out
}

fn halo(out: &mut String, symbol: &Symbol) {
    let (class, fill) = match symbol.tint {
        Some(Tint::Static) => ("static-halo", "#ffd9b8"),
        Some(Tint::Loop) => ("loop-halo", "#bfeadd"),
        None => return,
    };
    let ((left, top), (right, bottom)) = (symbol.low, symbol.high);
    let _ = writeln!(
        out,
        "<rect class=\"{class}\" x=\"{}\" y=\"{}\" width=\"{}\" height=\"{}\" rx=\"8\" fill=\"{fill}\"/>",
        left - 3,
        top - 3,
        right - left + 6,
        bottom - top + 6
    );
}

fn wires(out: &mut String, drawing: &Drawing) {
    out.push_str("<g fill=\"none\" stroke-width=\"1.4\" stroke-linecap=\"round\">\n");
    for wire in &drawing.wires {
        let (class, colour) = match wire.tint {
            Some(Tint::Static) => ("static", "#8a3a00"),
            Some(Tint::Loop) => ("loop", "#00614a"),
            None => ("wire", "#3f5a73"),
        };
        let ((a, b), (c, d)) = (wire.from, wire.to);
        let _ = writeln!(
            out,
            "<path class=\"{class}\" stroke=\"{colour}\" d=\"M{a} {b}L{c} {d}\"/>"
        );
    }
    for (x, y) in &drawing.grounds {
        let _ = writeln!(
            out,
            "<path class=\"part\" stroke=\"#18222d\" d=\"M{} {y}h18M{} {}h10M{} {}h4\"/>",
            x - 9,
            x - 5,
            y + 4,
            x - 2,
            y + 8
        );
    }
    out.push_str("</g>\n");
    for (x, y) in &drawing.dots {
        let _ = writeln!(
            out,
            "<circle class=\"dot\" cx=\"{x}\" cy=\"{y}\" r=\"3\" fill=\"#3f5a73\"/>"
        );
    }
}

fn part(out: &mut String, symbol: &Symbol) {
    out.push_str("<g class=\"part\" fill=\"none\" stroke=\"#18222d\" stroke-width=\"1.6\" stroke-linejoin=\"round\" stroke-linecap=\"round\">");
    let _ = write!(out, "<title>{}</title>", escaped(&symbol.title));
    for stroke in &symbol.strokes {
        draw(out, stroke);
    }
    out.push_str("</g>\n");
}

fn draw(out: &mut String, stroke: &Stroke) {
    let _ = match stroke {
        Stroke::Line(points) => write!(out, "<path d=\"{}\"/>", path(points)),
        Stroke::Fill(points) => write!(
            out,
            "<path class=\"solid\" fill=\"#18222d\" d=\"{}z\"/>",
            path(points)
        ),
        Stroke::Circle((x, y), radius) => {
            write!(out, "<circle cx=\"{x}\" cy=\"{y}\" r=\"{radius}\"/>")
        }
        Stroke::Disc((x, y), radius) => write!(
            out,
            "<circle class=\"solid\" fill=\"#18222d\" stroke=\"none\" cx=\"{x}\" cy=\"{y}\" r=\"{radius}\"/>"
        ),
        Stroke::Bows(points, radius) => write!(out, "<path d=\"{}\"/>", bows(points, *radius)),
        Stroke::Sign((x, y), sign) => write!(
            out,
            "<text class=\"solid\" fill=\"#18222d\" stroke=\"none\" x=\"{x}\" y=\"{}\" text-anchor=\"middle\">{}</text>",
            y + 4,
            escaped(sign)
        ),
    };
}

fn path(points: &[Point]) -> String {
    let words: Vec<String> = points.iter().map(|(x, y)| format!("{x} {y}")).collect();
    format!("M{}", words.join("L"))
}

fn bows(points: &[Point], radius: i32) -> String {
    let mut out = String::new();
    for (index, (x, y)) in points.iter().enumerate() {
        let _ = match index {
            0 => write!(out, "M{x} {y}"),
            _ => write!(out, "A{radius} {radius} 0 0 1 {x} {y}"),
        };
    }
    out
}

fn text(out: &mut String, label: &Label) {
    let (class, fill, more) = match label.role {
        Role::Title => ("name", "#18222d", " font-size=\"15\" font-weight=\"600\""),
        Role::Part => ("name", "#18222d", " font-weight=\"600\""),
        Role::Value => ("quiet", "#5b6875", ""),
        Role::Node => ("quiet", "#5b6875", " font-style=\"italic\""),
        Role::Port => ("port", "#0b5fa5", " font-weight=\"600\""),
        Role::Note => ("quiet", "#5b6875", ""),
        Role::Tinted(Tint::Static) => ("static-text", "#8a3a00", ""),
        Role::Tinted(Tint::Loop) => ("loop-text", "#00614a", ""),
    };
    let anchor = if label.starts { "start" } else { "middle" };
    let (x, y) = label.at;
    let _ = writeln!(
        out,
        "<text class=\"{class}\" fill=\"{fill}\" x=\"{x}\" y=\"{y}\" text-anchor=\"{anchor}\"{more}>{}</text>",
        escaped(&label.text)
    );
}

fn escaped(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for letter in text.chars() {
        match letter {
            '<' => out.push_str("&lt;"),
            '>' => out.push_str("&gt;"),
            '&' => out.push_str("&amp;"),
            '"' => out.push_str("&quot;"),
            // XML 1.0 has no place for other control characters.
            control if control.is_control() => out.push(' '),
            other => out.push(other),
        }
    }
    out
}
