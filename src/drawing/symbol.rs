//! Symbols after IEC 60617 around the origin: two ends lie at (−30, 0) and (30, 0).

use crate::drawing::shape::{Point, Stroke};

/// Kinds of symbols.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Glyph {
    /// A rectangle.
    Resistor,
    /// A rectangle with a letter.
    Letter(&'static str),
    /// Two plates.
    Capacitor,
    /// Half circles; with a dot at its first end where it is coupled.
    Inductor { coupled: bool },
    /// A circle with a letter.
    Meter,
    /// A circle, a rhombus where it is controlled; a line along (voltage) or across (current).
    Source { voltage: bool, controlled: bool },
    /// A triangle; its first input is marked +, its second −.
    Amplifier { inputs: usize },
    /// Bipolar transistor.
    Bipolar,
    /// Field-effect transistor.
    FieldEffect,
    /// Triode.
    Triode,
    /// Two rows of half circles.
    Transformer,
    /// A box with this half height and a sign.
    Box(i32, &'static str),
}

impl Glyph {
    /// Half of its width, up to where its wires begin.
    pub(super) fn half_width(self) -> i32 {
        match self {
            Self::Amplifier { .. } | Self::Box(..) | Self::Transformer => 40,
            _ => 30,
        }
    }

    /// Half of its height.
    pub(super) fn half_height(self) -> i32 {
        match self {
            Self::Resistor | Self::Letter(_) => 9,
            Self::Capacitor => 12,
            Self::Inductor { .. } => 12,
            Self::Meter | Self::Source { .. } => 15,
            Self::Amplifier { .. } => 42,
            Self::Bipolar | Self::FieldEffect | Self::Triode => 26,
            Self::Transformer => 28,
            Self::Box(half, _) => half,
        }
    }

    /// Its strokes.
    pub(super) fn strokes(self) -> Vec<Stroke> {
        let line = |points: &[Point]| Stroke::Line(points.to_vec());
        match self {
            Self::Resistor => vec![
                line(&[(-30, 0), (-20, 0)]),
                rectangle(20, 8),
                line(&[(20, 0), (30, 0)]),
            ],
            Self::Letter(sign) => {
                let mut list = Self::Resistor.strokes();
                list.push(Stroke::Sign((0, 0), sign));
                list
            }
            Self::Capacitor => vec![
                line(&[(-30, 0), (-4, 0)]),
                line(&[(-4, -12), (-4, 12)]),
                line(&[(4, -12), (4, 12)]),
                line(&[(4, 0), (30, 0)]),
            ],
            Self::Inductor { coupled } => {
                let mut list = vec![
                    line(&[(-30, 0), (-24, 0)]),
                    Stroke::Bows(vec![(-24, 0), (-12, 0), (0, 0), (12, 0), (24, 0)], 6),
                    line(&[(24, 0), (30, 0)]),
                ];
                if coupled {
                    list.push(Stroke::Disc((-26, 8), 3));
                }
                list
            }
            Self::Meter => {
                let mut list = round();
                list.push(Stroke::Sign((0, 0), "A"));
                list
            }
            Self::Source {
                voltage,
                controlled,
            } => {
                let mut list = if controlled { rhombus() } else { round() };
                if voltage {
                    list.push(line(&[(-15, 0), (15, 0)]));
                    list.push(line(&[(-26, -11), (-18, -11)]));
                    list.push(line(&[(-22, -15), (-22, -7)]));
                } else {
                    list.push(line(&[(0, -15), (0, 15)]));
                    list.push(Stroke::Fill(vec![(29, 0), (21, -4), (21, 4)]));
                }
                list
            }
            Self::Amplifier { inputs } => {
                let mut list = vec![
                    line(&[(-28, -42), (-28, 42), (32, 0), (-28, -42)]),
                    line(&[(32, 0), (40, 0)]),
                ];
                if inputs == 1 {
                    list.push(line(&[(-40, 0), (-28, 0)]));
                    list.push(Stroke::Sign((-8, 0), "1"));
                } else {
                    list.push(line(&[(-40, -20), (-28, -20)]));
                    list.push(line(&[(-40, 20), (-28, 20)]));
                    list.push(line(&[(-23, -20), (-15, -20)]));
                    list.push(line(&[(-23, 20), (-15, 20)]));
                    list.push(line(&[(-19, 16), (-19, 24)]));
                }
                list
            }
            Self::Bipolar => vec![
                line(&[(-30, 0), (-6, 0)]),
                line(&[(-6, -16), (-6, 16)]),
                line(&[(-6, -6), (14, -20), (30, -20)]),
                line(&[(-6, 6), (14, 20), (30, 20)]),
                Stroke::Fill(vec![(12, 18), (3, 17), (8, 11)]),
            ],
            Self::FieldEffect => vec![
                line(&[(-30, 0), (-12, 0)]),
                line(&[(-12, -14), (-12, 14)]),
                line(&[(-5, -24), (-5, 24)]),
                line(&[(-5, -20), (30, -20)]),
                line(&[(-5, 20), (30, 20)]),
                Stroke::Fill(vec![(10, 20), (2, 16), (2, 24)]),
            ],
            Self::Triode => vec![
                Stroke::Circle((0, 0), 24),
                line(&[(-30, 0), (-14, 0)]),
                line(&[(-12, 0), (-6, 0)]),
                line(&[(-2, 0), (4, 0)]),
                line(&[(8, 0), (14, 0)]),
                line(&[(-10, -12), (10, -12)]),
                line(&[(0, -12), (0, -20), (30, -20)]),
                line(&[(-10, 16), (-10, 12), (10, 12)]),
                line(&[(10, 12), (10, 20), (30, 20)]),
            ],
            Self::Transformer => vec![
                line(&[(-40, -20), (-10, -20)]),
                line(&[(-40, 20), (-10, 20)]),
                line(&[(40, -20), (10, -20)]),
                line(&[(40, 20), (10, 20)]),
                Stroke::Bows(
                    vec![(-10, -20), (-10, -10), (-10, 0), (-10, 10), (-10, 20)],
                    5,
                ),
                Stroke::Bows(vec![(10, 20), (10, 10), (10, 0), (10, -10), (10, -20)], 5),
                Stroke::Disc((-18, -12), 3),
                Stroke::Disc((18, -12), 3),
            ],
            Self::Box(half, sign) => vec![rectangle(40, half), Stroke::Sign((0, 0), sign)],
        }
    }
}

fn rectangle(x: i32, y: i32) -> Stroke {
    Stroke::Line(vec![(-x, -y), (x, -y), (x, y), (-x, y), (-x, -y)])
}

fn round() -> Vec<Stroke> {
    vec![
        Stroke::Line(vec![(-30, 0), (-15, 0)]),
        Stroke::Circle((0, 0), 15),
        Stroke::Line(vec![(15, 0), (30, 0)]),
    ]
}

fn rhombus() -> Vec<Stroke> {
    vec![
        Stroke::Line(vec![(-30, 0), (-15, 0)]),
        Stroke::Line(vec![(-15, 0), (0, -15), (15, 0), (0, 15), (-15, 0)]),
        Stroke::Line(vec![(15, 0), (30, 0)]),
    ]
}

/// How a symbol is turned; turns keep the side to which half circles bend.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Turn {
    /// First end left.
    Right,
    /// First end right.
    Left,
    /// First end up.
    Down,
    /// First end down.
    Up,
}

impl Turn {
    /// A point around `centre`.
    pub(super) fn point(self, (x, y): Point, centre: Point) -> Point {
        let (x, y) = match self {
            Self::Right => (x, y),
            Self::Left => (-x, -y),
            Self::Down => (-y, x),
            Self::Up => (y, -x),
        };
        (x + centre.0, y + centre.1)
    }

    /// Strokes around `centre`.
    pub(super) fn strokes(self, strokes: Vec<Stroke>, centre: Point) -> Vec<Stroke> {
        let at = |point| self.point(point, centre);
        let all = |points: Vec<Point>| points.into_iter().map(at).collect();
        strokes
            .into_iter()
            .map(|stroke| match stroke {
                Stroke::Line(points) => Stroke::Line(all(points)),
                Stroke::Fill(points) => Stroke::Fill(all(points)),
                Stroke::Circle(point, radius) => Stroke::Circle(at(point), radius),
                Stroke::Disc(point, radius) => Stroke::Disc(at(point), radius),
                Stroke::Bows(points, radius) => Stroke::Bows(all(points), radius),
                Stroke::Sign(point, sign) => Stroke::Sign(at(point), sign),
            })
            .collect()
    }
}
