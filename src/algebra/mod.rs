//! Exact algebra: integers, rationals, polynomials, fractions, primes. Imports no other room.
//!
//! Every type has one canonical form, so that equality of values is equality of representations.
#![deny(clippy::float_arithmetic)]

pub(crate) mod choice;
pub mod elimination;
pub mod factor;
pub mod fraction;
pub mod gcd;
pub mod integer;
#[cfg(test)]
mod laws;
pub mod monomial;
mod packed;
pub mod polynomial;
pub mod prime_field;
pub mod rational;
pub mod resultant;
pub mod ring;
pub mod series;
pub mod sign;
pub mod symbol;
pub mod univariate;

pub use fraction::Fraction;
pub use integer::Integer;
pub use monomial::Monomial;
pub use polynomial::Polynomial;
pub use prime_field::PrimeField;
pub use rational::Rational;
pub use ring::{PolynomialRing, Ring, UnivariateRing};
pub use series::{Series, SeriesRing};
pub use symbol::{Symbol, SymbolTable};
pub use univariate::Univariate;
