//! Exact answers about a network.

pub mod normal;
pub mod report;
