//! Exact transfer functions, true order and cancellation proofs of parametric linear networks.
//!
//! The rooms, in the order in which they may see each other: [`algebra`], [`network`],
//! [`language`], [`analysis`], [`numeric`], [`drawing`], [`render`], [`cli`]. Text and messages
//! ([`source`], [`diagnostic`]) and [`budget`] are open to all.

pub mod algebra;
pub mod analysis;
pub mod budget;
pub mod cli;
pub mod diagnostic;
pub mod drawing;
pub mod language;
pub mod network;
pub mod numeric;
pub mod render;
pub mod source;
