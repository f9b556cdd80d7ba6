//! Exact answers about a network.

pub mod normal;
pub mod order;
pub mod report;
pub mod singular;
