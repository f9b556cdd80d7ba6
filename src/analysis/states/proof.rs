//! The state equations put into the equations of the network.
//!
//! Where every equation of the network holds identically for `x = X·p + Y(s)·u` under
//! `s·p = A·p + B(s)·u`, then `C(sI − A)⁻¹B + D(s)` solves the network, whose solution is unique: it is
//! each response exactly. Without inputs the solutions of `s·p = A·p` are solutions of the network, two
//! different ones never the same (each state is a voltage, a current, or a derivative sum of them), and
//! there are as many as the determinant has degrees: the natural modes are those of A, with their
//! multiplicities, so that det(sI − A) is the determinant of the network up to a factor free of s.

use crate::algebra::Fraction;
use crate::analysis::states::choice::Chosen;
use crate::analysis::states::row::Row;
use crate::analysis::states::tableau::Tableau;
use crate::budget::{Budget, Exceeded};

/// Whether every equation of the network holds identically.
pub(super) fn holds(tableau: &Tableau, chosen: &Chosen, budget: &Budget) -> Result<bool, Exceeded> {
    for powers in &tableau.equations {
        let mut sum = Row::default();
        for row in powers.iter().rev() {
            sum = sum.times_s(&chosen.rates, budget)?;
            sum.add_scaled(&chosen.put_into(row, budget)?, &Fraction::one(), budget)?;
        }
        if !sum.is_empty() {
            return Ok(false);
        }
    }
    Ok(true)
}
