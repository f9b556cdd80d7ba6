//! Determinants of sparse matrices modulo a prime, many with one pattern at a time.
//!
//! The first matrix decides the pivots (fewest entries in the row, then in the column; Markowitz
//! 1957) and with them where entries fill in. The others follow the same steps without any search.

use std::collections::BTreeSet;

use crate::algebra::prime_field::PrimeField;

/// Matrices that are worked on at once.
pub const LANES: usize = 16;

/// One entry of as many matrices.
pub type Lane = [u64; LANES];

/// Elimination below one pivot.
#[derive(Clone, Debug)]
struct Step {
    /// The entry of the pivot.
    pivot: u32,
    /// Entries of the pivot's row to its right: a range of `sources`.
    row: (usize, usize),
    /// Rows below: a range of `targets`.
    below: (usize, usize),
}

/// The order of elimination for all matrices of one pattern.
#[derive(Clone, Debug)]
pub struct Plan {
    /// Entries, those that fill in included.
    entries: usize,
    steps: Vec<Step>,
    sources: Vec<u32>,
    /// For each row below a pivot: its entry under the pivot and where its entries under the pivot's
    /// row begin in `places`.
    targets: Vec<(u32, usize)>,
    places: Vec<u32>,
    negative: bool,
}

/// Rows while pivots are looked for.
struct Search<'a> {
    field: &'a PrimeField,
    /// Column and entry, by column.
    rows: Vec<Vec<(u32, u32)>>,
    columns: Vec<BTreeSet<u32>>,
    values: Vec<u64>,
    plan: Plan,
}

impl Plan {
    /// The plan for matrices with entries at `places` (row, column), each place once; `values` are
    /// those of the first. `None` when that one is singular.
    ///
    /// Cost: of one elimination, with the searches for pivots.
    #[must_use]
    pub fn new(
        field: &PrimeField,
        size: usize,
        places: &[(u32, u32)],
        values: &[u64],
    ) -> Option<Self> {
        let mut rows = vec![Vec::new(); size];
        let mut columns = vec![BTreeSet::new(); size];
        for (&(row, column), index) in places.iter().zip(0_u32..) {
            rows[row as usize].push((column, index));
            columns[column as usize].insert(row);
        }
        for row in &mut rows {
            row.sort_unstable();
        }
        let search = Search {
            field,
            rows,
            columns,
            values: values.to_vec(),
            plan: Self {
                entries: 0,
                steps: Vec::with_capacity(size),
                sources: Vec::new(),
                targets: Vec::new(),
                places: Vec::new(),
                negative: false,
            },
        };
        search.run()
    }

    /// Multiplications for one determinant.
    #[must_use]
    pub fn cost(&self) -> usize {
        self.places.len() + self.targets.len() + self.steps.len()
    }

    /// Entries with those that fill in.
    #[must_use]
    pub fn entries(&self) -> usize {
        self.entries
    }

    /// The determinants of as many matrices as there are lanes; `None` where a pivot is zero.
    ///
    /// `values` holds the entries in the order of the places, then room for those that fill in, zero.
    #[must_use]
    pub fn determinants(&self, field: &PrimeField, values: &mut [Lane]) -> [Option<u64>; LANES] {
        let mut product: Lane = [1; LANES];
        let mut sound = [true; LANES];
        for step in &self.steps {
            let pivot = values[step.pivot as usize];
            for lane in 0..LANES {
                product[lane] = field.mul(product[lane], pivot[lane]);
                sound[lane] &= pivot[lane] != 0;
            }
            if step.below.0 == step.below.1 {
                continue;
            }
            let divisors = pivot.map(|entry| entry.max(1));
            let Some(inverse) = field.inverses(&divisors) else {
                return [None; LANES];
            };
            let sources = &self.sources[step.row.0..step.row.1];
            for &(under, start) in &self.targets[step.below.0..step.below.1] {
                let mut factor = values[under as usize];
                for lane in 0..LANES {
                    factor[lane] = field.mul(factor[lane], inverse[lane]);
                }
                let places = &self.places[start..start + sources.len()];
                for (&source, &place) in sources.iter().zip(places) {
                    let from = values[source as usize];
                    let entry = &mut values[place as usize];
                    for lane in 0..LANES {
                        let by = field.mul(factor[lane], from[lane]);
                        entry[lane] = field.sub(entry[lane], by);
                    }
                }
            }
        }
        let mut found = [None; LANES];
        for lane in 0..LANES {
            if sound[lane] {
                found[lane] = Some(if self.negative {
                    field.neg(product[lane])
                } else {
                    product[lane]
                });
            }
        }
        found
    }
}

impl Search<'_> {
    fn run(mut self) -> Option<Plan> {
        let size = self.rows.len();
        let mut waiting: BTreeSet<(usize, u32)> = (0_u32..)
            .zip(&self.rows)
            .map(|(row, entries)| (entries.len(), row))
            .collect();
        let mut column_of = vec![0_usize; size];
        while let Some((_, row)) = waiting.pop_first() {
            let entries = std::mem::take(&mut self.rows[row as usize]);
            let values = &self.values;
            let &(column, pivot) = entries
                .iter()
                .filter(|(_, entry)| values[*entry as usize] != 0)
                .min_by_key(|(column, _)| (self.columns[*column as usize].len(), *column))?;
            column_of[row as usize] = column as usize;
            for &(column, _) in &entries {
                self.columns[column as usize].remove(&row);
            }
            let below = std::mem::take(&mut self.columns[column as usize]);
            let right: Vec<(u32, u32)> = entries
                .iter()
                .copied()
                .filter(|(at, _)| *at != column)
                .collect();
            let first = (self.plan.sources.len(), self.plan.targets.len());
            self.plan
                .sources
                .extend(right.iter().map(|(_, entry)| entry));
            for target in below {
                waiting.remove(&(self.rows[target as usize].len(), target));
                self.eliminate(target, column, pivot, &right);
                waiting.insert((self.rows[target as usize].len(), target));
            }
            self.plan.steps.push(Step {
                pivot,
                row: (first.0, self.plan.sources.len()),
                below: (first.1, self.plan.targets.len()),
            });
        }
        self.plan.entries = self.values.len();
        self.plan.negative = is_odd(&column_of);
        Some(self.plan)
    }

    /// Subtracts a multiple of the pivot's row; what fills in gets the next number.
    fn eliminate(&mut self, target: u32, column: u32, pivot: u32, right: &[(u32, u32)]) {
        let field = self.field;
        let old = std::mem::take(&mut self.rows[target as usize]);
        let mut row = Vec::with_capacity(old.len() + right.len());
        let start = self.plan.places.len();
        let mut under = 0;
        let mut left = old.into_iter().peekable();
        let mut right = right.iter().peekable();
        while left.peek().is_some() || right.peek().is_some() {
            let next = left.peek().map_or(u32::MAX, |(at, _)| *at);
            let wanted = right.peek().map_or(u32::MAX, |(at, _)| *at);
            if next == column {
                under = left.next().map_or(0, |(_, entry)| entry);
            } else if next < wanted {
                row.extend(left.next());
            } else if next == wanted {
                row.extend(left.next());
                right.next();
                self.plan.places.push(row[row.len() - 1].1);
            } else {
                let entry = u32::try_from(self.values.len()).unwrap_or(u32::MAX);
                self.values.push(0);
                self.columns[wanted as usize].insert(target);
                right.next();
                row.push((wanted, entry));
                self.plan.places.push(entry);
            }
        }
        self.plan.targets.push((under, start));
        self.rows[target as usize] = row;
        let inverse = field.inv(self.values[pivot as usize]).unwrap_or(0);
        let factor = field.mul(self.values[under as usize], inverse);
        let sources = self.plan.sources.len();
        let count = self.plan.places.len() - start;
        for index in 0..count {
            let source = self.plan.sources[sources - count + index] as usize;
            let place = self.plan.places[start + index] as usize;
            let by = field.mul(factor, self.values[source]);
            self.values[place] = field.sub(self.values[place], by);
        }
    }
}

/// Parity of a permutation.
fn is_odd(image: &[usize]) -> bool {
    let mut seen = vec![false; image.len()];
    let mut odd = false;
    for start in 0..image.len() {
        let (mut at, mut length) = (start, 0_usize);
        while !seen[at] {
            seen[at] = true;
            at = image[at];
            length += 1;
        }
        odd ^= length > 0 && length.is_multiple_of(2);
    }
    odd
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Determinant by expansion along the first row.
    fn expanded(field: &PrimeField, rows: &[Vec<u64>]) -> u64 {
        if rows.is_empty() {
            return 1;
        }
        let mut sum = 0;
        for column in 0..rows.len() {
            let minor: Vec<Vec<u64>> = rows[1..]
                .iter()
                .map(|row| [&row[..column], &row[column + 1..]].concat())
                .collect();
            let term = field.mul(rows[0][column], expanded(field, &minor));
            sum = if column % 2 == 0 {
                field.add(sum, term)
            } else {
                field.sub(sum, term)
            };
        }
        sum
    }

    #[test]
    fn determinants_are_those_of_the_expansion() {
        let field = PrimeField::default_prime();
        let mut seed = 7_u64;
        let mut random = |below: u64| {
            seed = seed
                .wrapping_mul(6_364_136_223_846_793_005)
                .wrapping_add(1_442_695_040_888_963_407);
            (seed >> 33) % below
        };
        let (mut regular, mut singular) = (0, 0);
        for round in 0..200 {
            let size = 1 + round % 6;
            let mut places = Vec::new();
            for row in 0..size as u32 {
                for column in 0..size as u32 {
                    if random(10) < 5 {
                        places.push((row, column));
                    }
                }
            }
            let lanes: Vec<Lane> = places
                .iter()
                .map(|_| std::array::from_fn(|_| 1 + random(1000)))
                .collect();
            let dense = |lane: usize| {
                let mut rows = vec![vec![0; size]; size];
                for (&(row, column), values) in places.iter().zip(&lanes) {
                    rows[row as usize][column as usize] = values[lane];
                }
                expanded(&field, &rows)
            };
            let first: Vec<u64> = lanes.iter().map(|values| values[0]).collect();
            let Some(plan) = Plan::new(&field, size, &places, &first) else {
                assert_eq!(dense(0), 0, "round {round}");
                singular += 1;
                continue;
            };
            regular += 1;
            let mut values = lanes.clone();
            values.resize(plan.entries(), [0; LANES]);
            for (lane, found) in plan
                .determinants(&field, &mut values)
                .into_iter()
                .enumerate()
            {
                if let Some(found) = found {
                    assert_eq!(found, dense(lane), "round {round}, lane {lane}");
                }
            }
        }
        assert!(regular > 50 && singular > 20, "{regular} {singular}");
    }
}
