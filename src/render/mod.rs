//! Reports as text, JSON and LaTeX. Expressions become one tree in [`math`]; writers only spell it.
//!
//! The input is an [`Answer`]: a network, its report and what was asked. Nothing is decided here that
//! the analysis has not decided: a result that was not written down whole is never shown in part.

pub mod answer;
pub mod character;
pub mod coefficients;
pub mod designer;
pub mod engineering;
#[cfg(test)]
mod exactness;
pub mod figures;
pub mod form;
pub mod json;
pub mod latex;
pub mod ledger;
pub mod linear;
pub mod math;
pub mod names;
pub mod nest;
pub mod netlist;
pub mod product;
pub mod reduction;
pub mod sentence;
pub mod share;
pub mod states;
pub mod svg;
pub mod text;

pub use answer::{Answer, Detail, FormStyle};
