//! Exit codes.

use std::process::ExitCode;

/// How a command ended. `--help` documents the numbers.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Exit {
    /// Done; a count of zero is an answer.
    Done = 0,
    /// The answer is no.
    No = 1,
    /// Bad input or usage.
    Input = 2,
    /// A budget ran out, or the verdict is undecided.
    Unfinished = 3,
    /// A fault of tallymark itself.
    Fault = 70,
}

impl From<Exit> for ExitCode {
    fn from(exit: Exit) -> Self {
        ExitCode::from(exit as u8)
    }
}
