//! Parses the command line, calls, prints, and says how it went.

use std::process::ExitCode;

fn main() -> ExitCode {
    stillwarm::cli::run(std::env::args_os())
}
