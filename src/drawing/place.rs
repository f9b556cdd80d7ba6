//! Places for symbols, wires, labels: rows by the gaps that lanes cross, then columns by the room
//! that symbols and labels need.

use std::collections::BTreeMap;

use crate::drawing::plan::{Branch, Item, Pin, Plan};
use crate::drawing::shape::{Drawing, Label, Point, Role, Symbol, Wire, width};
use crate::drawing::symbol::Turn;
use crate::network::{Network, NodeId};

/// Room around the drawing.
const MARGIN: i32 = 30;
/// Height of one part in a hanging branch.
const HANG: i32 = 76;
/// Distance between wires that run beside each other.
const PITCH: i32 = 10;

/// An item in its gap and row. Gap g lies left of column g; the last gap right of all columns.
struct Seat<'a> {
    item: &'a Item,
    turned: bool,
    gap: usize,
    first: usize,
    last: usize,
    /// Height of its middle.
    middle: i32,
}

impl Seat<'_> {
    fn pins(&self) -> impl Iterator<Item = Pin> {
        let turned = self.turned;
        self.item.pins.iter().map(move |pin| Pin {
            left: pin.left != turned,
            ..*pin
        })
    }
}

/// Places everything.
pub(super) fn place(network: &Network, plan: &Plan, columns: &[NodeId]) -> Drawing {
    let mut column = vec![None; network.node_count()];
    for (index, node) in columns.iter().enumerate() {
        column[node.index()] = Some(index);
    }
    let seats = seats(plan, &column, columns.len());
    let lowest = seats
        .iter()
        .map(|seat| seat.middle + reach(seat, &column).1);
    let base = lowest.max().unwrap_or(0).max(0) + 16;
    let mut hanging: Vec<Vec<&Branch>> = vec![Vec::new(); columns.len()];
    for branch in &plan.branches {
        if let Some(index) = column[branch.node.index()] {
            hanging[index].push(branch);
        }
    }
    let names: Vec<String> = columns
        .iter()
        .map(|node| name(network, plan, *node))
        .collect();
    let x = positions(&seats, &column, &names, &hanging);
    let mut pen = Pen {
        column: &column,
        x: &x,
        names: &names,
        stops: vec![Vec::new(); columns.len()],
        drawing: Drawing::default(),
    };
    for seat in &seats {
        pen.seat(seat);
    }
    for (index, branches) in hanging.iter().enumerate() {
        pen.branches(index, columns[index], branches, base);
    }
    for (index, node) in columns.iter().enumerate() {
        pen.bus(index, *node, plan);
    }
    let mut drawing = pen.drawing;
    drawing.dots = dots(&drawing);
    drawing.title = network.title().map(str::to_owned);
    frame(&mut drawing);
    drawing
}

/// The text at a bus; empty for nodes without a name.
fn name(network: &Network, plan: &Plan, node: NodeId) -> String {
    let own = &network.node(node).name;
    if own.starts_with('(') {
        return String::new();
    }
    let arrow = |is: bool| if is { "→ " } else { "" };
    let input = plan.inputs.contains(&node);
    let output = plan.outputs.contains(&node) && !input;
    let end = if output { " →" } else { "" };
    format!("{}{own}{end}", arrow(input))
}

fn seats<'a>(plan: &'a Plan, column: &[Option<usize>], columns: usize) -> Vec<Seat<'a>> {
    let mut seats: Vec<Seat<'a>> = plan
        .items
        .iter()
        .map(|item| sit(item, column, columns))
        .collect();
    // Devices keep the lowest row, then short lanes; long ones rise above them.
    let mut turn: Vec<usize> = (0..seats.len()).collect();
    turn.sort_by_key(|&index| {
        let seat = &seats[index];
        (seat.item.is_lane, seat.last - seat.first, index)
    });
    let mut placed: Vec<(usize, usize, i32, i32)> = Vec::new();
    for index in turn {
        let seat = &mut seats[index];
        let (up, down) = reach(seat, column);
        let mut middle = -anchor(seat);
        while let Some(under) = placed.iter().find(|it| {
            it.0 <= seat.last && seat.first <= it.1 && it.2 < middle + down && middle - up < it.3
        }) {
            middle = under.2 - down;
        }
        placed.push((seat.first, seat.last, middle - up, middle + down));
        seat.middle = middle;
    }
    seats
}

/// Chooses the gap: as few wires around the symbol as can be, then close to what it drives.
fn sit<'a>(item: &'a Item, column: &[Option<usize>], columns: usize) -> Seat<'a> {
    let at = |pin: &Pin| column[pin.node.index()];
    let ends: Vec<Option<usize>> = item.pins.iter().map(at).collect();
    let turned = item.is_lane
        && match (ends[0], ends[1]) {
            (Some(first), Some(second)) => first > second,
            _ => false,
        };
    let low = ends.iter().flatten().min().copied().unwrap_or(0);
    let high = ends.iter().flatten().max().copied().unwrap_or(0);
    let around = |gap: usize| {
        let wrong = item
            .pins
            .iter()
            .filter(|pin| at(pin).is_some_and(|column| (column < gap) != (pin.left != turned)));
        // A wire around is better at an input than at an output.
        wrong.map(|pin| if pin.left { 1 } else { 2 }).sum::<usize>()
    };
    let gap = (low..=(high + 1).min(columns))
        .min_by_key(|gap| {
            let far = if item.is_lane { *gap } else { columns - *gap };
            (around(*gap), far)
        })
        .unwrap_or(low);
    let reach = ends.iter().flatten().map(|&column| {
        if column < gap {
            (column + 1, gap)
        } else {
            (gap, column)
        }
    });
    let reach: Vec<(usize, usize)> = reach.collect();
    Seat {
        item,
        turned,
        gap,
        first: reach.iter().map(|it| it.0).min().unwrap_or(gap),
        last: reach.iter().map(|it| it.1).max().unwrap_or(gap),
        middle: 0,
    }
}

/// Height of the pin that stands on the main row.
fn anchor(seat: &Seat<'_>) -> i32 {
    let mut lefts: Vec<Pin> = seat
        .pins()
        .filter(|pin| pin.left && pin.node != NodeId::GROUND)
        .collect();
    lefts.sort_by_key(|pin| -pin.height);
    lefts.first().map_or(0, |pin| pin.height)
}

/// Whether a pin's wire goes around the symbol, and on which side of it.
fn around(seat: &Seat<'_>, column: &[Option<usize>]) -> Vec<(Pin, Option<bool>)> {
    seat.pins()
        .map(|pin| {
            let wrong = column[pin.node.index()].is_some_and(|it| (it < seat.gap) != pin.left);
            (pin, wrong.then_some(pin.height <= 0))
        })
        .collect()
}

/// Room above and below the middle.
fn reach(seat: &Seat<'_>, column: &[Option<usize>]) -> (i32, i32) {
    let half = seat.item.glyph.half_height();
    let list = around(seat, column);
    let count = |up: bool| {
        let number = list.iter().filter(|(_, side)| *side == Some(up)).count();
        i32::try_from(number).unwrap_or(0) * PITCH
    };
    let above = half + 30 + count(true);
    (above, half + 30 + count(false))
}

/// Half of the width that the symbol takes with its labels.
fn half_width(item: &Item) -> i32 {
    let value = item.value.as_deref().map_or(0, width);
    item.glyph
        .half_width()
        .max(width(&item.name).max(value) / 2 + 4)
}

fn positions(
    seats: &[Seat<'_>],
    column: &[Option<usize>],
    names: &[String],
    hanging: &[Vec<&Branch>],
) -> Vec<(i32, i32)> {
    let gaps = names.len() + 1;
    let mut room = vec![0_i32; gaps];
    for seat in seats {
        let count = i32::try_from(seat.item.pins.len()).unwrap_or(0);
        let wraps = around(seat, column).iter().any(|(_, side)| side.is_some());
        let grounded = seat.item.pins.iter().any(|pin| pin.node == NodeId::GROUND);
        let sides = 12
            + if wraps || grounded {
                24 + count * PITCH
            } else {
                0
            };
        room[seat.gap] = room[seat.gap].max(2 * (half_width(seat.item) + sides));
    }
    // Middle of each gap and place of the column after it.
    let mut list = Vec::with_capacity(gaps);
    let mut left = 0;
    let mut hang = i32::MIN;
    for (gap, room) in room.into_iter().enumerate() {
        let half = names.get(gap).map_or(0, |name| width(name) / 2 + 6);
        let next = (left + room + half).max(hang).max(left + 24 + half);
        list.push(((left + next - half) / 2, next));
        let slots: i32 = hanging
            .get(gap)
            .map_or(0, |it| it.iter().map(|it| slot(it)).sum());
        hang = if slots > 0 {
            next + slots + 22
        } else {
            i32::MIN
        };
        left = next + half;
    }
    list
}

/// Width that a hanging branch takes to the right of its wire, with the room left of the next.
fn slot(branch: &Branch) -> i32 {
    let texts = branch
        .parts
        .iter()
        .map(|(item, _)| width(&item.name).max(item.value.as_deref().map_or(0, width)));
    20 + texts.max().unwrap_or(0) + 26
}

struct Pen<'a> {
    column: &'a [Option<usize>],
    x: &'a [(i32, i32)],
    names: &'a [String],
    /// Heights at which wires reach each bus.
    stops: Vec<Vec<i32>>,
    drawing: Drawing,
}

impl Pen<'_> {
    fn wire(&mut self, node: NodeId, points: &[Point]) {
        for pair in points.windows(2).filter(|pair| pair[0] != pair[1]) {
            self.drawing.wires.push(Wire {
                from: pair[0],
                to: pair[1],
                node,
                tint: None,
            });
        }
    }

    fn label(&mut self, text: &str, at: Point, starts: bool, role: Role) {
        self.drawing.labels.push(Label {
            text: text.to_owned(),
            at,
            starts,
            role,
        });
    }

    fn symbol(&mut self, item: &Item, turn: Turn, at: Point, pins: Vec<(Point, NodeId)>) {
        let (wide, high) = (item.glyph.half_width(), item.glyph.half_height());
        let corners = [(-wide, -high), (wide, high)].map(|corner| turn.point(corner, at));
        let [a, b] = corners;
        self.drawing.symbols.push(Symbol {
            name: item.name.clone(),
            title: item.title.clone(),
            strokes: turn.strokes(item.glyph.strokes(), at),
            low: (a.0.min(b.0), a.1.min(b.1)),
            high: (a.0.max(b.0), a.1.max(b.1)),
            elements: item.elements.clone(),
            pins,
            tint: None,
        });
    }

    fn seat(&mut self, seat: &Seat<'_>) {
        let item = seat.item;
        let at = (self.x[seat.gap].0, seat.middle);
        let (wide, high) = (item.glyph.half_width(), item.glyph.half_height());
        let side = |left: bool, by: i32| at.0 + if left { -by } else { by };
        let mut pins = Vec::new();
        let mut used = [0, 0];
        for (pin, wrap) in around(seat, self.column) {
            let y = at.1 + pin.height;
            let start = (side(pin.left, wide), y);
            pins.push((start, pin.node));
            let Some(index) = self.column[pin.node.index()] else {
                let end = (side(pin.left, wide + 12), y + 8);
                self.wire(pin.node, &[start, (end.0, y), end]);
                self.drawing.grounds.push(end);
                continue;
            };
            let target = self.x[index].1;
            let end = match wrap {
                None => y,
                Some(up) => {
                    let level = &mut used[usize::from(up)];
                    *level += 1;
                    let by = high + 14 + PITCH * *level;
                    at.1 + if up { -by } else { by }
                }
            };
            let jog = side(
                pin.left,
                half_width(item) + 20 + PITCH * (used[0] + used[1]),
            );
            let points = [start, (jog, y), (jog, end), (target, end)];
            match wrap {
                None => self.wire(pin.node, &[start, (target, y)]),
                Some(_) => self.wire(pin.node, &points),
            }
            self.stops[index].push(end);
        }
        let turn = if seat.turned { Turn::Left } else { Turn::Right };
        self.symbol(item, turn, at, pins);
        self.label(&item.name, (at.0, at.1 - high - 6), false, Role::Part);
        if let Some(value) = &item.value {
            self.label(value, (at.0, at.1 + high + 15), false, Role::Value);
        }
    }

    fn branches(&mut self, index: usize, node: NodeId, branches: &[&Branch], base: i32) {
        let mut x = self.x[index].1;
        if !branches.is_empty() {
            self.stops[index].push(base);
        }
        for (number, branch) in branches.iter().enumerate() {
            if number > 0 {
                let before = x - slot(branches[number - 1]);
                self.wire(node, &[(before, base), (x, base)]);
            }
            let mut y = base;
            let mut above = node;
            for (number, (item, down)) in branch.parts.iter().enumerate() {
                let (first, second) = item.ends();
                let below = if *down { second } else { first };
                let middle = y + HANG / 2;
                let (top, bottom) = ((x, middle - 30), (x, middle + 30));
                self.wire(above, &[(x, y), top]);
                y += HANG;
                self.wire(below, &[bottom, (x, y)]);
                let pins = vec![(top, above), (bottom, below)];
                let turn = if *down { Turn::Down } else { Turn::Up };
                self.symbol(item, turn, (x, middle), pins);
                let lift = if item.value.is_some() { -3 } else { 4 };
                let left = x + item.glyph.half_height() + 6;
                self.label(&item.name, (left, middle + lift), true, Role::Part);
                if let Some(value) = &item.value {
                    self.label(value, (left, middle + 13), true, Role::Value);
                }
                above = below;
                if number + 1 == branch.parts.len() {
                    self.drawing.grounds.push((x, y));
                }
            }
            x += slot(branch);
        }
    }

    fn bus(&mut self, index: usize, node: NodeId, plan: &Plan) {
        let x = self.x[index].1;
        let mut stops = std::mem::take(&mut self.stops[index]);
        stops.sort_unstable();
        stops.dedup();
        for pair in stops.windows(2) {
            self.wire(node, &[(x, pair[0]), (x, pair[1])]);
        }
        let text = self.names[index].clone();
        if let (Some(top), false) = (stops.first(), text.is_empty()) {
            let port = plan.inputs.contains(&node) || plan.outputs.contains(&node);
            let role = if port { Role::Port } else { Role::Node };
            self.label(&text, (x, top - 8), false, role);
        }
    }
}

/// Points where three or more ends of one node's wires meet.
fn dots(drawing: &Drawing) -> Vec<Point> {
    let mut ends: BTreeMap<(NodeId, Point), usize> = BTreeMap::new();
    for wire in &drawing.wires {
        for end in [wire.from, wire.to] {
            *ends.entry((wire.node, end)).or_default() += 1;
        }
    }
    for ((node, point), count) in &mut ends {
        let through = drawing
            .wires
            .iter()
            .filter(|wire| wire.node == *node && inside(wire, *point));
        *count += 2 * through.count();
    }
    let met = ends.into_iter().filter(|(_, count)| *count > 2);
    met.map(|((_, point), _)| point).collect()
}

/// Whether a point lies on a wire, its ends left out.
fn inside(wire: &Wire, (x, y): Point) -> bool {
    let between = |a: i32, b: i32, it: i32| a.min(b) < it && it < a.max(b);
    (wire.from.1 == wire.to.1 && y == wire.from.1 && between(wire.from.0, wire.to.0, x))
        || (wire.from.0 == wire.to.0 && x == wire.from.0 && between(wire.from.1, wire.to.1, y))
}

/// Moves everything into a frame that begins at the origin.
fn frame(drawing: &mut Drawing) {
    let mut points: Vec<Point> = drawing
        .wires
        .iter()
        .flat_map(|it| [it.from, it.to])
        .collect();
    points.extend(drawing.symbols.iter().flat_map(|it| [it.low, it.high]));
    points.extend(
        drawing
            .grounds
            .iter()
            .flat_map(|it| [(it.0 - 9, it.1), (it.0 + 9, it.1 + 10)]),
    );
    points.extend(
        drawing
            .labels
            .iter()
            .map(Label::space)
            .flat_map(|it| [it.0, it.1]),
    );
    let low = |axis: fn(&Point) -> i32| points.iter().map(axis).min().unwrap_or(0);
    let high = |axis: fn(&Point) -> i32| points.iter().map(axis).max().unwrap_or(0);
    let (left, top) = (low(|it| it.0), low(|it| it.1));
    let (right, bottom) = (high(|it| it.0), high(|it| it.1));
    let head = if drawing.title.is_some() { 34 } else { 0 };
    let by = (MARGIN - left, MARGIN + head - top);
    let shift = |point: &mut Point| *point = (point.0 + by.0, point.1 + by.1);
    for wire in &mut drawing.wires {
        shift(&mut wire.from);
        shift(&mut wire.to);
    }
    drawing.dots.iter_mut().for_each(shift);
    drawing.grounds.iter_mut().for_each(shift);
    drawing.labels.iter_mut().for_each(|it| shift(&mut it.at));
    for symbol in &mut drawing.symbols {
        symbol.strokes = Turn::Right.strokes(std::mem::take(&mut symbol.strokes), by);
        shift(&mut symbol.low);
        shift(&mut symbol.high);
        symbol.pins.iter_mut().for_each(|it| shift(&mut it.0));
    }
    drawing.width = right - left + 2 * MARGIN;
    drawing.height = bottom - top + 2 * MARGIN + head;
    if let Some(title) = drawing.title.clone() {
        drawing.width = drawing.width.max(width(&title) * 5 / 4 + 2 * MARGIN);
        drawing.labels.push(Label {
            text: title,
            at: (MARGIN, MARGIN + 6),
            starts: true,
            role: Role::Title,
        });
    }
}
