//! Parses, runs, prints the error, sets the exit code. Everything else is in the library.

use std::process::ExitCode;

fn main() -> ExitCode {
    handsfull::commands::main()
}
