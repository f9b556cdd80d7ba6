//! Random networks for tests.

use crate::network::oracle::mix;
use crate::network::sketch::Sketch;

/// A small generator with a seed that tests print.
pub(crate) struct Dice(pub(crate) u64);

impl Dice {
    pub(crate) fn roll(&mut self, sides: usize) -> usize {
        self.0 = self.0.wrapping_add(1);
        (mix(self.0) % sides as u64) as usize
    }

    fn node(&mut self, nodes: usize) -> String {
        match self.roll(nodes) {
            0 => "ground".to_owned(),
            node => format!("n{node}"),
        }
    }

    fn parts(&mut self, nodes: usize, letters: &[char], count: usize) -> String {
        let part = |at: usize| {
            let letter = letters[self.roll(letters.len())];
            let (from, to) = (self.node(nodes), self.node(nodes));
            format!("{letter}{at} {from} {to};")
        };
        (0..count).map(part).collect()
    }
}

/// Resistors, capacitors, inductors, sources and meters between a few nodes.
pub(crate) fn passive(dice: &mut Dice) -> Sketch {
    let nodes = 2 + dice.roll(5);
    let count = 1 + nodes + dice.roll(6);
    let letters = ['R', 'C', 'L', 'C', 'L', 'G', 'V', 'I', 'M'];
    Sketch::of(&dice.parts(nodes, &letters, count))
}

/// The same with controlled sources, amplifiers, transformers and couplings.
pub(crate) fn active(dice: &mut Dice) -> Sketch {
    let nodes = 3 + dice.roll(5);
    let count = nodes + dice.roll(5);
    let letters = ['R', 'R', 'C', 'L', 'C', 'V', 'I', 'M'];
    let mut sketch = Sketch::of(&dice.parts(nodes, &letters, count));
    for at in 0..1 + dice.roll(3) {
        let [a, b, c, d] = [(); 4].map(|()| dice.node(nodes));
        let sensed = sketch.any(dice.roll(count));
        let out = if a == "ground" { "n1" } else { &a };
        sketch = match dice.roll(9) {
            0 => sketch.by_voltage(&format!("V_{at}"), [&a, &b], [&c, &d]),
            1 => sketch.by_voltage(&format!("I_{at}"), [&a, &b], [&c, &d]),
            2 => sketch.by_current(&format!("V_{at}"), [&a, &b], &sensed),
            3 => sketch.by_current(&format!("I_{at}"), [&a, &b], &sensed),
            4 | 5 => sketch.opamp(&format!("U_{at}"), &b, &c, out),
            6 => sketch.follower(&format!("V_{at}"), &b, out),
            7 => sketch.transformer(&format!("T_{at}"), [&a, &b], [&c, &d]),
            _ => sketch.conveyor(&format!("X_{at}"), [&a, &b, &c, "ground"]),
        };
    }
    if let [first, second, ..] = &sketch.coils()[..]
        && dice.roll(2) == 0
    {
        let tight = dice.roll(2) == 0;
        sketch = sketch.coupling("K", [first, second], tight);
    }
    sketch
}
