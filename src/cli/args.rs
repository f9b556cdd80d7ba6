//! The command line.

use std::time::Duration;

use clap::{Args, Parser, Subcommand, ValueEnum};

use crate::budget::Limits;

const EXAMPLE: &str = "\
Example:
  cutloop formula -e 'in -Vs- ground; in -R1- out -C1- ground; derive H = voltage(out)/Vs'

Exit status:
  0  answered; for check: and all claims hold
  1  a claim is refuted
  2  the input cannot be used
  3  a budget was reached, or a claim is not decided
  4  the system failed
  5  the independent check disagreed: our bug, nothing is answered";

/// Exact transfer functions, true order and cancellation proofs of parametric linear networks
#[derive(Debug, Parser)]
#[command(name = "cutloop", version, after_help = EXAMPLE, arg_required_else_help = true, disable_help_subcommand = true)]
pub struct Arguments {
    /// What is to be answered.
    #[command(subcommand)]
    pub command: Command,
}

/// What is to be answered.
#[derive(Debug, Subcommand)]
pub enum Command {
    /// Read, lint, and prove or refute every claim
    #[command(
        after_help = "Example:\n  cutloop check filters/*.cutloop\n\nOne summary line goes to standard error."
    )]
    Check(Check),
    /// Count the order: of the network and of each derived function, with the evidence
    #[command(after_help = "Example:\n  cutloop order filter.cutloop --of H")]
    Order(One),
    /// Write each derived function in closed form, cancelled
    #[command(after_help = "Example:\n  cutloop formula filter.cutloop --format latex --set N=4")]
    Formula(Forms),
    /// Show every pole-zero cancellation: its class, its cause, its proof
    #[command(after_help = "Example:\n  cutloop audit filter.cutloop --format json")]
    Audit(One),
    /// Reduce to the simplest network with the same derived functions, step by step
    #[command(
        after_help = "Example:\n  cutloop reduce -e 'in -Vs- ground; in -R1- a -C1- b -R2- out -C2- ground; derive H = voltage(out)/Vs'\n\nThe reduced network is printed in the language of the input; it is read again, solved and compared\nwith the original. Exit status 3 where that is not decided."
    )]
    Reduce(Reduce),
    /// Write state equations with symbolic matrices: which voltages and currents are the states
    #[command(
        after_help = "Example:\n  cutloop states -e 'in -Vs- ground; in -R1- a -L1- out -C1- ground; derive H = voltage(out)/Vs'\n\nA line `starts voltage(C1) = V0` adds the natural response from that value."
    )]
    States(One),
    /// Draw the network as an SVG picture
    #[command(
        after_help = "Example:\n  cutloop plot filter.cutloop --drawing -o filter.svg\n\nWithout -o the picture goes to standard output."
    )]
    Plot(Plot),
}

/// Arguments of `check`.
#[derive(Debug, Args)]
pub struct Check {
    /// Files to read; - is standard input
    #[arg(id = "file", value_name = "FILE", required_unless_present = "text")]
    pub files: Vec<String>,
    /// Leave out the summary line
    #[arg(long)]
    pub quiet: bool,
    /// What all commands share.
    #[command(flatten)]
    pub options: Options,
}

/// Arguments of commands about one file.
#[derive(Debug, Args)]
pub struct One {
    /// File to read; - is standard input
    #[arg(id = "file", value_name = "FILE", required_unless_present = "text")]
    pub file: Option<String>,
    /// What all commands share.
    #[command(flatten)]
    pub options: Options,
}

/// Arguments of `plot`.
#[derive(Debug, Args)]
pub struct Plot {
    /// File to read; - is standard input
    #[arg(id = "file", value_name = "FILE", required_unless_present = "text")]
    pub file: Option<String>,
    /// The drawing of the network
    #[arg(long)]
    pub drawing: bool,
    /// File to write; - is standard output
    #[arg(short = 'o', long, value_name = "OUT")]
    pub output: Option<String>,
    /// What all commands share.
    #[command(flatten)]
    pub options: Options,
}

/// Arguments of `formula`.
#[derive(Debug, Args)]
pub struct Forms {
    /// What is shown of a function: coefficients, normalised, designer or nested
    #[arg(long, value_enum, default_value_t = FormName::Designer, hide_possible_values = true)]
    pub form: FormName,
    /// Show the denominator coefficients as sums of time constants, with what each part sees
    #[arg(long)]
    pub time_constants: bool,
    /// File and options.
    #[command(flatten)]
    pub one: One,
}

/// Form of a function.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum FormName {
    /// Polynomials in s
    Coefficients,
    /// Constant coefficient one
    Normalised,
    /// Gain, time constants, frequencies and qualities
    Designer,
    /// Common symbols taken out, shared sums named
    Nested,
}

/// Arguments of `reduce`.
#[derive(Debug, Args)]
pub struct Reduce {
    /// Turn stars of three like parts into triangles, too
    #[arg(long)]
    pub star_delta: bool,
    /// The file and what all commands share.
    #[command(flatten)]
    pub one: One,
}

/// Options that all commands share.
#[derive(Debug, Args)]
pub struct Options {
    /// Take the network from the command line
    #[arg(short = 'e', value_name = "TEXT", id = "text", conflicts_with = "file")]
    pub text: Option<String>,
    /// Form of the answer: text, json or latex
    #[arg(long, value_enum, default_value_t = Format::Text, hide_possible_values = true)]
    pub format: Format,
    /// Change a nominal value or a `let`; may be repeated
    #[arg(long, value_name = "NAME=VALUE", value_parser = assignment)]
    pub set: Vec<(String, String)>,
    /// Only this derived function; may be repeated
    #[arg(long, value_name = "NAME")]
    pub of: Vec<String>,
    /// Bound the work: terms=200000,states=2000000,seconds=20
    #[arg(long, value_name = "LIMITS", value_parser = limits)]
    pub budget: Option<Limits>,
}

/// Form of an answer.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum Format {
    /// For reading
    Text,
    /// For programs
    Json,
    /// For a note
    Latex,
}

fn assignment(text: &str) -> Result<(String, String), String> {
    match text.split_once('=') {
        Some((name, value)) if !name.trim().is_empty() && !value.trim().is_empty() => {
            Ok((name.trim().to_owned(), value.trim().to_owned()))
        }
        _ => Err("write NAME=VALUE, for example R1=10k".to_owned()),
    }
}

fn limits(text: &str) -> Result<Limits, String> {
    let mut limits = Limits::default();
    for item in text.split(',') {
        let (key, value) = item.split_once('=').ok_or_else(|| {
            format!("`{item}` is no limit; write terms=1e6, states=1e7 or seconds=60")
        })?;
        match key.trim() {
            "terms" => limits.terms = count(value.trim())?,
            "states" => limits.states = count(value.trim())?,
            "seconds" => limits.time = seconds(value.trim())?,
            other => {
                return Err(format!(
                    "`{other}` is no limit; there are terms, states and seconds"
                ));
            }
        }
    }
    Ok(limits)
}

/// A whole number, `1e6` allowed.
fn count(text: &str) -> Result<usize, String> {
    let wrong = || format!("`{text}` is no whole number");
    let (digits, exponent) = match text.split_once(['e', 'E']) {
        Some((digits, exponent)) => (digits, exponent.parse().map_err(|_| wrong())?),
        None => (text, 0_u32),
    };
    let digits: usize = digits.parse().map_err(|_| wrong())?;
    let scale = 10_usize.checked_pow(exponent);
    scale
        .and_then(|scale| digits.checked_mul(scale))
        .ok_or_else(|| format!("`{text}` is too large"))
}

/// Seconds, with decimals.
fn seconds(text: &str) -> Result<Duration, String> {
    let wrong = || format!("`{text}` is no number of seconds");
    let (whole, decimals) = text.split_once('.').unwrap_or((text, ""));
    if decimals.len() > 9 || (whole.is_empty() && decimals.is_empty()) {
        return Err(wrong());
    }
    let number = |digits: &str| -> Result<u64, String> {
        match digits {
            "" => Ok(0),
            digits if digits.bytes().all(|it| it.is_ascii_digit()) => {
                digits.parse().map_err(|_| wrong())
            }
            _ => Err(wrong()),
        }
    };
    let nanoseconds = number(&format!("{decimals:0<9}"))?;
    let nanoseconds = u32::try_from(nanoseconds).map_err(|_| wrong())?;
    Ok(Duration::new(number(whole)?, nanoseconds))
}

#[cfg(test)]
mod tests {
    use super::*;
    use clap::CommandFactory;

    #[test]
    fn the_command_line_is_consistent() {
        Arguments::command().debug_assert();
    }

    #[test]
    fn limits_are_read() {
        let found = limits("terms=1e6,seconds=0.25").unwrap();
        assert_eq!(found.terms, 1_000_000);
        assert_eq!(found.states, Limits::default().states);
        assert_eq!(found.time, Duration::from_millis(250));
        for wrong in [
            "",
            "terms",
            "terms=x",
            "width=3",
            "terms=1e99",
            "seconds=-1",
            "seconds=.",
        ] {
            assert!(limits(wrong).is_err(), "{wrong}");
        }
    }

    #[test]
    fn assignments_are_read() {
        assert_eq!(
            assignment("R1 = 10k").unwrap(),
            ("R1".to_owned(), "10k".to_owned())
        );
        assert!(assignment("R1").is_err());
        assert!(assignment("=3").is_err());
    }
}
