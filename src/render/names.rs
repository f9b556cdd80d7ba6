//! Names of symbols and the two orders they stand in: by name between terms, as an engineer writes
//! within a product.

use std::cmp::Ordering;
use std::collections::BTreeMap;

use crate::algebra::{Symbol, SymbolTable};
use crate::network::{Dimension, Network, Sign};

/// Where the complex frequency stands in a product.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum FrequencyPlace {
    /// `s·R1·C1`, for reading.
    First,
    /// `R1*C1*s`, for machines.
    Last,
}

/// Place of a symbol within a product.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
enum Rank {
    Pi,
    FrequencyFirst,
    Shared,
    Gain,
    Conductance,
    Resistance,
    Inductance,
    Capacitance,
    Mutual,
    FrequencyLast,
}

/// Names of the symbols of one network, with those of a nested form where there is one.
#[derive(Clone, Debug)]
pub struct Names<'a> {
    network: &'a Network,
    shared: BTreeMap<Symbol, &'a str>,
    frequency: FrequencyPlace,
}

impl<'a> Names<'a> {
    /// The names of a network.
    #[must_use]
    pub fn new(network: &'a Network, frequency: FrequencyPlace) -> Self {
        Self {
            network,
            shared: BTreeMap::new(),
            frequency,
        }
    }

    /// Adds the symbols of shared sub-expressions.
    #[must_use]
    pub fn with_shared(mut self, shared: impl IntoIterator<Item = (Symbol, &'a str)>) -> Self {
        self.shared.extend(shared);
        self
    }

    /// The table of the network's symbols.
    #[must_use]
    pub fn table(&self) -> &SymbolTable {
        self.network.symbols()
    }

    /// The name of a symbol.
    #[must_use]
    pub fn name(&self, symbol: Symbol) -> &str {
        match self.shared.get(&symbol) {
            Some(name) => name,
            None => self.network.symbols().name(symbol),
        }
    }

    /// Whether any symbol of the network bears this name.
    #[must_use]
    pub fn is_taken(&self, name: &str) -> bool {
        self.network.symbols().find(name).is_some()
    }

    /// Whether the symbol is known to be positive by what was stated for it.
    #[must_use]
    pub fn is_positive(&self, symbol: Symbol) -> bool {
        let facts = self.network.facts(symbol);
        symbol == Symbol::PI || facts.is_some_and(|facts| facts.sign == Sign::Positive)
    }

    /// Whether values of the symbol stand in parallel as `x ∥ y`: resistors and inductors.
    #[must_use]
    pub fn stands_in_parallel(&self, symbol: Symbol) -> bool {
        matches!(self.rank(symbol), Rank::Resistance | Rank::Inductance)
    }

    /// Order between symbols that decides the order of terms: by the bytes of their names, for
    /// reading with digits counted as numbers.
    #[must_use]
    pub fn by_name(&self, left: Symbol, right: Symbol) -> Ordering {
        let (left_name, right_name) = (self.name(left), self.name(right));
        match self.frequency {
            FrequencyPlace::First => natural(left_name, right_name),
            FrequencyPlace::Last => left_name.as_bytes().cmp(right_name.as_bytes()),
        }
        .then(left.cmp(&right))
    }

    /// Order of symbols within a product: numbers and gains, conductances, resistors, inductors,
    /// capacitors, mutual inductances; among equals by name, digits counted as numbers.
    #[must_use]
    pub fn by_reading(&self, left: Symbol, right: Symbol) -> Ordering {
        self.rank(left)
            .cmp(&self.rank(right))
            .then_with(|| natural(self.name(left), self.name(right)))
            .then(left.cmp(&right))
    }

    fn rank(&self, symbol: Symbol) -> Rank {
        if symbol == Symbol::S {
            return match self.frequency {
                FrequencyPlace::First => Rank::FrequencyFirst,
                FrequencyPlace::Last => Rank::FrequencyLast,
            };
        }
        if symbol == Symbol::PI {
            return Rank::Pi;
        }
        if self.shared.contains_key(&symbol) {
            return Rank::Shared;
        }
        let dimension = self.network.facts(symbol).and_then(|facts| facts.dimension);
        match dimension {
            Some(Dimension::SIEMENS) => Rank::Conductance,
            Some(Dimension::OHM) => Rank::Resistance,
            Some(Dimension::HENRY) if self.name(symbol).starts_with('M') => Rank::Mutual,
            Some(Dimension::HENRY) => Rank::Inductance,
            Some(Dimension::FARAD) => Rank::Capacitance,
            Some(_) => Rank::Gain,
            None => rank_by_letter(self.name(symbol)),
        }
    }
}

/// The quantity a name suggests where its dimension is not known.
fn rank_by_letter(name: &str) -> Rank {
    let own = name.rsplit('.').next().unwrap_or(name);
    match own.chars().next() {
        Some('G' | 'g') => Rank::Conductance,
        Some('R') => Rank::Resistance,
        Some('L') => Rank::Inductance,
        Some('C') => Rank::Capacitance,
        Some('M') => Rank::Mutual,
        _ => Rank::Gain,
    }
}

/// Compares names with runs of digits counted as numbers: `R2` before `R10`.
#[must_use]
pub fn natural(left: &str, right: &str) -> Ordering {
    let (mut left_rest, mut right_rest) = (left, right);
    loop {
        let (left_run, left_after) = run(left_rest);
        let (right_run, right_after) = run(right_rest);
        let order = compare_runs(left_run, right_run);
        if order != Ordering::Equal {
            return order;
        }
        if left_after.is_empty() && right_after.is_empty() {
            return left.cmp(right);
        }
        (left_rest, right_rest) = (left_after, right_after);
    }
}

/// The first run of digits or of other characters, and what follows.
fn run(text: &str) -> (&str, &str) {
    let digits = text.starts_with(|letter: char| letter.is_ascii_digit());
    let end = text
        .find(|letter: char| letter.is_ascii_digit() != digits)
        .unwrap_or(text.len());
    text.split_at(end)
}

fn compare_runs(left: &str, right: &str) -> Ordering {
    let is_number = |run: &str| run.starts_with(|letter: char| letter.is_ascii_digit());
    if is_number(left) && is_number(right) {
        let (left, right) = (left.trim_start_matches('0'), right.trim_start_matches('0'));
        return left.len().cmp(&right.len()).then(left.cmp(right));
    }
    left.cmp(right)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn digits_count_as_numbers() {
        let mut names = vec!["R10", "R2", "R1", "Ra", "R", "C3", "R2b", "R02"];
        names.sort_by(|left, right| natural(left, right));
        assert_eq!(names, ["C3", "R", "R1", "R02", "R2", "R2b", "R10", "Ra"]);
    }
}
