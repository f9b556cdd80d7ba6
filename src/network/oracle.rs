//! A slow, independent way to the determinant for tests: full nodal equations modulo a prime,
//! Gaussian elimination at many values of s, interpolation.

use std::collections::BTreeMap;

use crate::network::element::{Element, Kind, Port, Quantity, Sense, Source, Strength};
use crate::network::graph::Network;
use crate::network::id::ElementId;
use crate::network::value::Value;

const P: u64 = (1 << 61) - 1;

/// Degree and lowest power of s of the determinant at random values; `None` where it is zero.
pub(crate) fn degrees(network: &Network, without: &[ElementId], seed: u64) -> Option<(u32, u32)> {
    let reactive = network
        .elements()
        .filter(|(_, element)| element.is_reactive())
        .count();
    let points: Vec<u64> = (1..=2 * reactive as u64 + 3).collect();
    let values: Vec<u64> = points
        .iter()
        .map(|&s| Equations::new(network, without, seed, s).determinant())
        .collect();
    let coefficients = interpolate(&points, &values);
    let high = coefficients.iter().rposition(|&c| c != 0)?;
    let low = coefficients.iter().position(|&c| c != 0)?;
    Some((high as u32, low as u32))
}

/// A random number that belongs to a name.
pub(crate) fn value_of(name: &str, seed: u64) -> u64 {
    let mut state = seed ^ 0x9e37_79b9_7f4a_7c15;
    for byte in name.bytes() {
        state = mix(state ^ u64::from(byte));
    }
    1 + mix(state) % (P - 1)
}

pub(crate) fn mix(mut z: u64) -> u64 {
    z = z.wrapping_add(0x9e37_79b9_7f4a_7c15);
    z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
    z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
    z ^ (z >> 31)
}

fn add(a: u64, b: u64) -> u64 {
    (a + b) % P
}

fn neg(a: u64) -> u64 {
    (P - a) % P
}

fn mul(a: u64, b: u64) -> u64 {
    (u128::from(a) * u128::from(b) % u128::from(P)) as u64
}

fn inv(mut a: u64) -> u64 {
    let (mut power, mut result) = (P - 2, 1);
    while power > 0 {
        if power & 1 == 1 {
            result = mul(result, a);
        }
        a = mul(a, a);
        power >>= 1;
    }
    result
}

/// Unknowns: node voltages, then the currents of all parts.
struct Equations<'a> {
    network: &'a Network,
    seed: u64,
    s: u64,
    rows: Vec<BTreeMap<usize, u64>>,
    current: BTreeMap<(ElementId, usize), usize>,
    unknowns: usize,
}

impl<'a> Equations<'a> {
    fn new(network: &'a Network, without: &[ElementId], seed: u64, s: u64) -> Self {
        let nodes = network.node_count();
        let mut equations = Self {
            network,
            seed,
            s,
            rows: vec![BTreeMap::new(); nodes],
            current: BTreeMap::new(),
            unknowns: nodes,
        };
        equations.put(0, 0, 1);
        let parts: Vec<(ElementId, &Element)> = network
            .elements()
            .filter(|(id, _)| !without.contains(id))
            .collect();
        for (id, element) in &parts {
            for (branch, port) in element.conducting().iter().enumerate() {
                let unknown = equations.unknowns;
                equations.unknowns += 1;
                equations.current.insert((*id, branch), unknown);
                equations.flow(port.from.index(), unknown, 1);
                equations.flow(port.to.index(), unknown, neg(1));
            }
        }
        for (id, element) in parts {
            equations.law(id, element);
        }
        equations
    }

    fn put(&mut self, row: usize, column: usize, value: u64) {
        let slot = self.rows[row].entry(column).or_insert(0);
        *slot = add(*slot, value);
    }

    fn flow(&mut self, node: usize, unknown: usize, value: u64) {
        if node != 0 {
            self.put(node, unknown, value);
        }
    }

    fn row(&mut self) -> usize {
        self.rows.push(BTreeMap::new());
        self.rows.len() - 1
    }

    fn voltage(&mut self, row: usize, port: Port, factor: u64) {
        self.put(row, port.from.index(), factor);
        self.put(row, port.to.index(), neg(factor));
    }

    fn amount(&self, value: &Value) -> u64 {
        match value {
            Value::Symbol(symbol) => value_of(self.network.symbols().name(*symbol), self.seed),
            Value::Number(number) if number.is_zero() => 0,
            Value::Number(_) => 1,
        }
    }

    /// Inductances are squares, so that k = 1 has an exact mutual inductance.
    fn root(&self, coil: ElementId) -> u64 {
        value_of(&self.network.element(coil).name, self.seed)
    }

    fn law(&mut self, id: ElementId, element: &Element) {
        let i = self.current[&(id, 0)];
        let row = self.row();
        match &element.kind {
            Kind::Resistor(port, value) | Kind::Impedance(port, value) => {
                self.voltage(row, *port, 1);
                self.put(row, i, neg(self.amount(value)));
            }
            Kind::Conductance(port, value) | Kind::Admittance(port, value) => {
                self.voltage(row, *port, neg(self.amount(value)));
                self.put(row, i, 1);
            }
            Kind::Capacitor(port, value) => {
                self.voltage(row, *port, neg(mul(self.s, self.amount(value))));
                self.put(row, i, 1);
            }
            Kind::Inductor(port, _) => {
                self.voltage(row, *port, 1);
                self.put(row, i, neg(mul(self.s, mul(self.root(id), self.root(id)))));
                self.mutual(row, id);
            }
            Kind::Meter(port) => self.voltage(row, *port, 1),
            Kind::Source(source) => self.source(row, i, source),
            Kind::Amplifier { input, .. } | Kind::Nullor { input, .. } => {
                self.voltage(row, *input, 1);
            }
            Kind::Transformer {
                primary,
                secondary,
                ratio,
            } => {
                let n = self.amount(ratio);
                self.voltage(row, *primary, 1);
                self.voltage(row, *secondary, neg(n));
                let row = self.row();
                self.put(row, self.current[&(id, 1)], 1);
                self.put(row, i, n);
            }
            Kind::Conveyor { x, y, polarity, .. } => {
                self.voltage(row, Port { from: *x, to: *y }, 1);
                let row = self.row();
                self.put(row, self.current[&(id, 1)], 1);
                self.put(row, i, neg(self.amount(polarity)));
            }
            Kind::Gyrator {
                primary,
                secondary,
                g,
            } => {
                let g = self.amount(g);
                self.put(row, i, 1);
                self.voltage(row, *secondary, neg(g));
                let row = self.row();
                self.put(row, self.current[&(id, 1)], 1);
                self.voltage(row, *primary, g);
            }
        }
    }

    fn mutual(&mut self, row: usize, coil: ElementId) {
        for coupling in self.network.couplings() {
            let other = if coupling.first == coil {
                coupling.second
            } else if coupling.second == coil {
                coupling.first
            } else {
                continue;
            };
            let (Strength::Factor(k) | Strength::Mutual(k)) = &coupling.strength;
            let mutual = mul(self.amount(k), mul(self.root(coil), self.root(other)));
            if let Some(&unknown) = self.current.get(&(other, 0)) {
                self.put(row, unknown, neg(mul(self.s, mutual)));
            }
        }
    }

    fn source(&mut self, row: usize, i: usize, source: &Source) {
        match source.quantity {
            Quantity::Voltage => self.voltage(row, source.port, 1),
            Quantity::Current => self.put(row, i, 1),
        }
        for control in &source.controls {
            let factor = neg(self.amount(&control.value));
            match control.sense {
                Sense::Voltage(port) => self.voltage(row, port, factor),
                Sense::Current(part) => {
                    if let Some(&unknown) = self.current.get(&(part, 0)) {
                        self.put(row, unknown, factor);
                    }
                }
            }
        }
    }

    fn determinant(mut self) -> u64 {
        let size = self.unknowns;
        assert_eq!(self.rows.len(), size);
        let mut matrix: Vec<Vec<u64>> = self
            .rows
            .drain(..)
            .map(|row| {
                (0..size)
                    .map(|k| row.get(&k).copied().unwrap_or(0))
                    .collect()
            })
            .collect();
        let mut result = 1;
        for column in 0..size {
            let Some(pivot) = (column..size).find(|&row| matrix[row][column] != 0) else {
                return 0;
            };
            if pivot != column {
                matrix.swap(pivot, column);
                result = neg(result);
            }
            result = mul(result, matrix[column][column]);
            let inverse = inv(matrix[column][column]);
            let (above, below) = matrix.split_at_mut(column + 1);
            let head = &above[column];
            for row in below.iter_mut().filter(|row| row[column] != 0) {
                let factor = neg(mul(row[column], inverse));
                for k in column..size {
                    row[k] = add(row[k], mul(factor, head[k]));
                }
            }
        }
        result
    }
}

/// Coefficients of the polynomial through the points (Newton).
fn interpolate(points: &[u64], values: &[u64]) -> Vec<u64> {
    let count = points.len();
    let mut divided = values.to_vec();
    for level in 1..count {
        for k in (level..count).rev() {
            let rise = add(divided[k], neg(divided[k - 1]));
            let run = add(points[k], neg(points[k - level]));
            divided[k] = mul(rise, inv(run));
        }
    }
    let mut result = vec![0; count];
    for k in (0..count).rev() {
        for j in (1..count).rev() {
            result[j] = add(result[j - 1], neg(mul(points[k], result[j])));
        }
        result[0] = add(neg(mul(points[k], result[0])), divided[k]);
    }
    result
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::network::sketch::Sketch;

    #[test]
    fn interpolation_gives_the_polynomial_back() {
        let points: Vec<u64> = (1..6).collect();
        let values: Vec<u64> = points.iter().map(|x| 7 + 3 * x * x).collect();
        assert_eq!(interpolate(&points, &values), [7, 0, 3, 0, 0]);
    }

    #[test]
    fn degrees_of_small_networks() {
        let of = |parts: &str| degrees(&Sketch::of(parts).finish(), &[], 1);
        assert_eq!(of("Vs in ground; R1 in a; C1 a ground"), Some((1, 0)));
        assert_eq!(of("Vs in ground; L1 in a; C1 a ground"), Some((2, 0)));
        assert_eq!(of("Vs in ground; C1 in a; C2 a ground"), Some((1, 1)));
        assert_eq!(of("Vs in ground; C1 in ground"), Some((0, 0)));
        assert_eq!(of("Vs in ground; Vt in ground"), None);
    }
}
