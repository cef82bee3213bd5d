//! The `interstice` binary: arguments in, exit code out.

use std::process::ExitCode;

mod cli;

fn main() -> ExitCode {
    cli::main()
}
