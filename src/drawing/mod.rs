//! The picture of a network as placed shapes, without a format.
//!
//! The scheme always works: a node is a vertical bus in a column of its own, a part between two
//! nodes a horizontal lane in the gap between two columns, parts to ground hang below. Lanes that
//! share a gap share no height; symbols stand in gaps only, so no wire meets a symbol or a label.
//! All coordinates are whole units, y grows downwards.

mod columns;
mod nominal;
mod place;
mod plan;
pub mod shape;
mod symbol;
mod tint;

use crate::analysis::report::NetworkOrder;
use crate::network::Network;
pub use shape::{Drawing, Label, Role, Stroke, Symbol, Tint, Wire};

/// Parts that one picture can hold legibly.
pub const MOST_PARTS: usize = 40;

/// Draws a network, tinted by its order ledger.
///
/// # Errors
/// The number of parts, where there are more than [`MOST_PARTS`].
pub fn draw(network: &Network, order: &NetworkOrder) -> Result<Drawing, usize> {
    let plan = plan::Plan::new(network);
    if plan.count() > MOST_PARTS {
        return Err(plan.count());
    }
    let columns = columns::order(&plan, network.node_count());
    let mut drawing = place::place(network, &plan, &columns);
    tint::tint(&mut drawing, network, order);
    Ok(drawing)
}
