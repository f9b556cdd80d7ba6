//! Unknowns that too few equations speak of.

const NONE: u32 = u32::MAX;

/// The unknowns of the underdetermined part (Dulmage and Mendelsohn 1958), ascending: more of them
/// than there are equations in which any of them stands. Empty when each unknown can be given an
/// equation of its own.
///
/// Cost: that of a maximum matching by phases of augmenting paths.
pub(super) fn undetermined(rows: &[Vec<u32>], unknowns: usize) -> Vec<u32> {
    let mut columns: Vec<Vec<u32>> = vec![Vec::new(); unknowns];
    for (row, list) in (0_u32..).zip(rows) {
        for &column in list {
            columns[column as usize].push(row);
        }
    }
    let mut matching = Matching {
        columns: &columns,
        row_of: vec![NONE; unknowns],
        column_of: vec![NONE; rows.len()],
    };
    matching.complete();
    matching.reach()
}

struct Matching<'a> {
    columns: &'a [Vec<u32>],
    row_of: Vec<u32>,
    column_of: Vec<u32>,
}

impl Matching<'_> {
    fn complete(&mut self) {
        for column in 0..self.columns.len() {
            let free = |row: &&u32| self.column_of[**row as usize] == NONE;
            let same = u32::try_from(column).unwrap_or(NONE);
            let diagonal = self.columns[column]
                .iter()
                .find(|row| **row == same && free(row));
            if let Some(&row) = diagonal.or_else(|| self.columns[column].iter().find(free)) {
                self.pair(same, row);
            }
        }
        loop {
            let mut seen = vec![false; self.column_of.len()];
            let mut grown = false;
            for column in (0_u32..).take(self.columns.len()) {
                if self.row_of[column as usize] == NONE {
                    grown |= self.augment(column, &mut seen);
                }
            }
            if !grown {
                return;
            }
        }
    }

    fn pair(&mut self, column: u32, row: u32) {
        self.row_of[column as usize] = row;
        self.column_of[row as usize] = column;
    }

    /// Looks for a free row along alternating paths, depth first without recursion.
    fn augment(&mut self, start: u32, seen: &mut [bool]) -> bool {
        let mut way: Vec<(u32, usize)> = vec![(start, 0)];
        while let Some((column, next)) = way.last_mut() {
            let Some(&row) = self.columns[*column as usize].get(*next) else {
                way.pop();
                continue;
            };
            *next += 1;
            if std::mem::replace(&mut seen[row as usize], true) {
                continue;
            }
            let holder = self.column_of[row as usize];
            if holder != NONE {
                way.push((holder, 0));
                continue;
            }
            for (column, next) in way.into_iter().rev() {
                let row = self.columns[column as usize][next - 1];
                self.pair(column, row);
            }
            return true;
        }
        false
    }

    /// All unknowns that alternating paths reach from one without an equation.
    fn reach(&self) -> Vec<u32> {
        let mut reached = vec![false; self.columns.len()];
        let mut open: Vec<u32> = (0_u32..)
            .take(self.columns.len())
            .filter(|&column| self.row_of[column as usize] == NONE)
            .collect();
        for &column in &open {
            reached[column as usize] = true;
        }
        while let Some(column) = open.pop() {
            for &row in &self.columns[column as usize] {
                let holder = self.column_of[row as usize];
                if holder != NONE && !reached[holder as usize] {
                    reached[holder as usize] = true;
                    open.push(holder);
                }
            }
        }
        (0_u32..)
            .zip(reached)
            .filter(|(_, reached)| *reached)
            .map(|(column, _)| column)
            .collect()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn three_unknowns_in_two_equations() {
        let rows = [vec![0, 1, 3], vec![2, 3], vec![2, 3], vec![2]];
        assert_eq!(undetermined(&rows, 4), [0, 1]);
        let rows = [vec![0, 1], vec![1, 2], vec![0, 2]];
        assert!(undetermined(&rows, 3).is_empty());
    }

    #[test]
    fn a_long_chain_of_exchanges() {
        let count = 200_000_u32;
        let mut rows: Vec<Vec<u32>> = (0..count).map(|k| vec![k, k + 1]).collect();
        rows.push(vec![0]);
        assert!(undetermined(&rows, count as usize + 1).is_empty());
    }
}
