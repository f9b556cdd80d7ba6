//! Figures at the nominal values: the only floats of the crate.
//!
//! Every figure starts from exact coefficients. Roots come with discs that are proven to hold them;
//! nothing here goes back into an exact answer.

pub mod big;
pub mod roots;
