//! Shapes with their places.

use crate::network::{ElementId, NodeId};

/// A point, x to the right, y downwards.
pub type Point = (i32, i32);

/// A stroke of a symbol.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Stroke {
    /// A line through points.
    Line(Vec<Point>),
    /// A filled polygon.
    Fill(Vec<Point>),
    /// A circle by centre and radius.
    Circle(Point, i32),
    /// A filled circle.
    Disc(Point, i32),
    /// Half circles of equal radius from point to point, all to the same side.
    Bows(Vec<Point>, i32),
    /// A sign inside the symbol, by its centre.
    Sign(Point, &'static str),
}

/// A symbol with the parts it stands for.
#[derive(Clone, Debug)]
pub struct Symbol {
    /// Name of the part or device.
    pub name: String,
    /// Name, value and inner parts in one line.
    pub title: String,
    /// Its strokes in the drawing's coordinates.
    pub strokes: Vec<Stroke>,
    /// Upper left corner of the space it takes.
    pub low: Point,
    /// Lower right corner.
    pub high: Point,
    /// The parts.
    pub elements: Vec<ElementId>,
    /// Where its wires end, with their nodes.
    pub pins: Vec<(Point, NodeId)>,
    /// Emphasis.
    pub tint: Option<Tint>,
}

/// Emphasis from the order ledger.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Tint {
    /// Keeps its charge or flux for ever.
    Static,
    /// In a loop of capacitors and sources.
    Loop,
}

/// A straight wire of a node, horizontal or vertical.
#[derive(Clone, Debug)]
pub struct Wire {
    /// One end.
    pub from: Point,
    /// The other end.
    pub to: Point,
    /// Its node.
    pub node: NodeId,
    /// Emphasis.
    pub tint: Option<Tint>,
}

/// What a label names.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Role {
    /// The title of the drawing.
    Title,
    /// A part.
    Part,
    /// A nominal value.
    Value,
    /// A node.
    Node,
    /// A node at which a source drives or a question is asked.
    Port,
    /// A remark below the drawing.
    Note,
    /// A remark in the colour of an emphasis.
    Tinted(Tint),
}

/// A line of text.
#[derive(Clone, Debug)]
pub struct Label {
    /// The text.
    pub text: String,
    /// Middle of its base line, or the left end where `starts`.
    pub at: Point,
    /// Whether the text starts there.
    pub starts: bool,
    /// What it names.
    pub role: Role,
}

impl Label {
    /// Corners of the space the text takes, estimated for a sans-serif face of 12 units.
    #[must_use]
    pub fn space(&self) -> (Point, Point) {
        let width = width(&self.text);
        let left = if self.starts {
            self.at.0
        } else {
            self.at.0 - width / 2
        };
        ((left, self.at.1 - 10), (left + width, self.at.1 + 3))
    }
}

/// Estimated width of a text.
#[must_use]
pub fn width(text: &str) -> i32 {
    i32::try_from(text.chars().count()).map_or(i32::MAX / 8, |count| count.min(10_000) * 7)
}

/// A drawn network.
#[derive(Clone, Debug, Default)]
pub struct Drawing {
    /// Title of the network.
    pub title: Option<String>,
    /// Width.
    pub width: i32,
    /// Height.
    pub height: i32,
    /// Wires, straight pieces.
    pub wires: Vec<Wire>,
    /// Junctions.
    pub dots: Vec<Point>,
    /// Symbols.
    pub symbols: Vec<Symbol>,
    /// Ground marks, by their upper ends.
    pub grounds: Vec<Point>,
    /// Texts.
    pub labels: Vec<Label>,
}
