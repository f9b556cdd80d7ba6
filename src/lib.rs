//! Placeholder documentation of the crate.
