//! Exact answers about a network.

pub mod report;
