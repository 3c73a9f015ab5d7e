//! The `braidwise` command: arguments in, exit status out.

use std::process::ExitCode;

fn main() -> ExitCode {
    braidwise::cli::run()
}
