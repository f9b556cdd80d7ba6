//! Exact answers about a network.

mod assembly;
mod block;
pub mod contraction;
mod couplings;
pub mod determinant;
mod diagram;
pub mod normal;
pub mod order;
mod ordering;
mod pairing;
mod point;
mod relations;
pub mod report;
pub mod setup;
pub mod singular;
mod symbolic;
