//! Text to network.

mod mistake;
mod nearest;
mod number;
mod parser;
mod statement;
pub mod syntax;
