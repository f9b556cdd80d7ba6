//! Indeterminates and their names.

use rustc_hash::FxHashMap;

/// An indeterminate of the polynomials.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Symbol(u32);

impl Symbol {
    /// The complex frequency.
    pub const S: Self = Self(0);
    /// π, kept as a symbol in every algebraic test.
    pub const PI: Self = Self(1);

    /// Position in its table.
    #[must_use]
    pub fn index(self) -> usize {
        self.0 as usize
    }
}

/// Names of symbols; the only source of new ones.
#[derive(Clone, Debug)]
pub struct SymbolTable {
    names: Vec<String>,
    index: FxHashMap<String, Symbol>,
}

impl Default for SymbolTable {
    fn default() -> Self {
        Self::new()
    }
}

impl SymbolTable {
    /// A table with `s` and `pi`.
    #[must_use]
    pub fn new() -> Self {
        let mut table = Self {
            names: Vec::new(),
            index: FxHashMap::default(),
        };
        table.intern("s");
        table.intern("pi");
        table
    }

    /// The symbol of a name, made when it is new.
    pub fn intern(&mut self, name: &str) -> Symbol {
        if let Some(&symbol) = self.index.get(name) {
            return symbol;
        }
        let symbol = Symbol(u32::try_from(self.names.len()).unwrap_or(u32::MAX));
        self.names.push(name.to_owned());
        self.index.insert(name.to_owned(), symbol);
        symbol
    }

    /// The symbol of a name, if there is one.
    #[must_use]
    pub fn find(&self, name: &str) -> Option<Symbol> {
        self.index.get(name).copied()
    }

    /// The name of a symbol of this table.
    #[must_use]
    pub fn name(&self, symbol: Symbol) -> &str {
        self.names.get(symbol.index()).map_or("?", String::as_str)
    }

    /// A new symbol with a name nobody can write: `R1'2`.
    pub fn fresh(&mut self, hint: &str) -> Symbol {
        let name = format!("{hint}'{}", self.names.len());
        self.intern(&name)
    }

    /// Number of symbols.
    #[must_use]
    pub fn len(&self) -> usize {
        self.names.len()
    }

    /// Never: `s` and `pi` are always there.
    #[must_use]
    pub fn is_empty(&self) -> bool {
        self.names.is_empty()
    }
}
