//! Gaussian elimination on sparse rows, pivots by least fill (Markowitz 1957, row counts alone).

use std::collections::{BTreeMap, BTreeSet};

use crate::analysis::equations::Rows;
use crate::analysis::equations::residue::Residue;

/// Determinant and solutions.
#[derive(Clone, Debug)]
pub(crate) struct Solution {
    /// Determinant of the matrix.
    pub(crate) determinant: Residue,
    /// One solution for each right side; empty when the determinant is zero.
    pub(crate) solutions: Vec<Vec<Residue>>,
}

/// Solves `rows · x = right` for several right sides.
pub(crate) fn solve(rows: &Rows, rights: &[Vec<Residue>]) -> Solution {
    let size = rows.len();
    let mut rows: Vec<BTreeMap<usize, Residue>> = rows.clone();
    let mut rights: Vec<Vec<Residue>> = (0..size)
        .map(|row| rights.iter().map(|right| right[row]).collect())
        .collect();
    let mut columns: Vec<BTreeSet<usize>> = vec![BTreeSet::new(); size];
    for (row, entries) in rows.iter().enumerate() {
        for &column in entries.keys() {
            columns[column].insert(row);
        }
    }
    // Rows that wait, shortest first.
    let mut waiting: BTreeSet<(usize, usize)> = rows
        .iter()
        .enumerate()
        .map(|(row, entries)| (entries.len(), row))
        .collect();
    let mut open = vec![true; size];
    let mut pivots: Vec<(usize, usize)> = Vec::with_capacity(size);
    let mut determinant = Residue::ONE;
    let singular = Solution {
        determinant: Residue::ZERO,
        solutions: Vec::new(),
    };
    while let Some((_, row)) = waiting.pop_first() {
        open[row] = false;
        let column = rows[row]
            .keys()
            .copied()
            .min_by_key(|&column| (columns[column].len(), column));
        let Some(column) = column else {
            return singular;
        };
        let pivot = rows[row][&column];
        let Some(inverse) = pivot.inverse() else {
            return singular;
        };
        determinant = determinant.mul(pivot);
        pivots.push((row, column));
        let entries = rows[row].clone();
        let right = rights[row].clone();
        for &target in columns[column]
            .clone()
            .iter()
            .filter(|&&target| target != row)
        {
            if !open[target] {
                continue;
            }
            let Some(value) = rows[target].get(&column).copied() else {
                continue;
            };
            let factor = value.mul(inverse);
            waiting.remove(&(rows[target].len(), target));
            for (&at, &entry) in &entries {
                let sum = rows[target]
                    .get(&at)
                    .copied()
                    .unwrap_or(Residue::ZERO)
                    .sub(factor.mul(entry));
                if sum.is_zero() {
                    rows[target].remove(&at);
                    columns[at].remove(&target);
                } else {
                    rows[target].insert(at, sum);
                    columns[at].insert(target);
                }
            }
            waiting.insert((rows[target].len(), target));
            for (own, &other) in rights[target].iter_mut().zip(&right) {
                *own = own.sub(factor.mul(other));
            }
        }
        for &at in entries.keys() {
            columns[at].remove(&row);
        }
    }
    if is_odd(&pivots) {
        determinant = determinant.neg();
    }
    let count = rights.first().map_or(0, Vec::len);
    let mut solutions = vec![vec![Residue::ZERO; size]; count];
    for &(row, column) in pivots.iter().rev() {
        let inverse = rows[row][&column].inverse().unwrap_or(Residue::ZERO);
        for (index, solution) in solutions.iter_mut().enumerate() {
            let mut value = rights[row][index];
            for (&at, &entry) in &rows[row] {
                if at != column {
                    value = value.sub(entry.mul(solution[at]));
                }
            }
            solution[column] = value.mul(inverse);
        }
    }
    Solution {
        determinant,
        solutions,
    }
}

/// Parity of the permutation that takes rows to their pivot columns.
fn is_odd(pivots: &[(usize, usize)]) -> bool {
    let mut image = vec![0; pivots.len()];
    for &(row, column) in pivots {
        image[row] = column;
    }
    let mut seen = vec![false; image.len()];
    let mut odd = false;
    for start in 0..image.len() {
        let (mut at, mut length) = (start, 0_usize);
        while !seen[at] {
            seen[at] = true;
            at = image[at];
            length += 1;
        }
        odd ^= length > 0 && length % 2 == 0;
    }
    odd
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_small_system_is_solved_with_its_sign() {
        let entry = |value: u64| Residue::new(value);
        // [0 2; 3 4]
        let rows = vec![
            BTreeMap::from([(1, entry(2))]),
            BTreeMap::from([(0, entry(3)), (1, entry(4))]),
        ];
        let solution = solve(&rows, &[vec![entry(4), entry(14)]]);
        assert_eq!(solution.determinant, entry(6).neg());
        assert_eq!(solution.solutions, vec![vec![entry(2), entry(2)]]);
    }

    #[test]
    fn a_singular_system_has_determinant_zero() {
        let entry = |value: u64| Residue::new(value);
        let rows = vec![
            BTreeMap::from([(0, entry(1)), (1, entry(2))]),
            BTreeMap::from([(0, entry(2)), (1, entry(4))]),
        ];
        assert!(solve(&rows, &[]).determinant.is_zero());
    }
}
