//! The command `cutloop`.

use std::process::ExitCode;

fn main() -> ExitCode {
    cutloop::cli::main()
}
