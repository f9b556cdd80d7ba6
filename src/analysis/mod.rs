//! Exact answers about a network.

mod answer;
mod assembly;
mod block;
mod built;
mod cancellation;
mod claim;
pub mod contraction;
pub(crate) mod couplings;
pub mod determinant;
mod diagram;
mod drops;
mod effect;
mod equations;
pub mod equivalent;
pub mod form;
mod functions;
mod hidden;
mod knowledge;
mod line;
mod meaning;
mod nest;
pub mod normal;
pub mod order;
mod ordering;
pub(crate) mod pairing;
mod point;
pub(crate) mod relations;
pub mod report;
mod sampled;
pub mod setup;
pub mod singular;
mod solve;
mod stability;
mod symbolic;
mod witness;

pub use answer::answer;
