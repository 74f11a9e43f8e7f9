//! The command `tallymark`; all of it is in [`tallymark::cli`].

use std::process::ExitCode;

fn main() -> ExitCode {
    tallymark::cli::main()
}
