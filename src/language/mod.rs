//! Text to network: statements are split and parsed, repetition and modules expanded, names
//! resolved, values made exact; every mistake has a place, a sentence and a way out.

mod expand;
mod lower;
mod mistake;
mod nearest;
mod number;
mod parser;
mod path_scan;
mod statement;
pub mod syntax;

pub use expand::Loader;

use crate::diagnostic::Diagnostic;
use crate::network::Network;
use crate::source::{SourceId, Sources};

/// How a text is read.
pub struct ReadOptions<'a> {
    /// `--set` pairs: a nominal or a `let`.
    pub set: &'a [(String, String)],
    /// Reads used files.
    pub load: &'a Loader<'a>,
}

/// What came of a text.
#[derive(Debug)]
pub struct Reading {
    /// The network; `None` exactly when an error is among the messages.
    pub network: Option<Network>,
    /// Errors and warnings.
    pub diagnostics: Vec<Diagnostic>,
}

/// Reads a text of the network language.
///
/// ```
/// use cutloop::language::{ReadOptions, read};
/// use cutloop::source::Sources;
///
/// let mut sources = Sources::new();
/// let text = "in -Vs- ground; in -R1- out -C1- ground; derive H = voltage(out) / Vs";
/// let main = sources.add("divider", text);
/// let load = |_: &str, path: &str| Err(format!("no file {path}"));
/// let reading = read(&mut sources, main, &ReadOptions { set: &[], load: &load });
/// assert_eq!(reading.network.expect("it is right").questions().len(), 1);
/// ```
#[must_use]
pub fn read(sources: &mut Sources, main: SourceId, options: &ReadOptions<'_>) -> Reading {
    let mut expander = expand::Expander::new(sources, options.load, options.set);
    expander.run(main);
    let (flat, mut diagnostics) = (
        std::mem::take(&mut expander.flat),
        std::mem::take(&mut expander.errors),
    );
    let (instances, lets) = (
        std::mem::take(&mut expander.instances),
        std::mem::take(&mut expander.lets),
    );
    if flat.is_empty() && diagnostics.is_empty() {
        let text = "the text holds no statement";
        diagnostics.push(
            Diagnostic::whole(text)
                .help("begin with a path: in -Vs- ground; in -R1- out -C1- ground"),
        );
    }
    let (network, messages) = lower::lower(sources, main, flat, &instances, &lets, options.set);
    let has_error = diagnostics.iter().any(Diagnostic::is_error);
    diagnostics.extend(messages);
    diagnostics.sort_by_key(|message| message.place.map(|place| (place.source, place.start)));
    diagnostics.dedup();
    Reading {
        network: network.filter(|_| !has_error),
        diagnostics,
    }
}
