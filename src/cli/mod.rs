//! The command line: arguments in, calls to the library, results out. One file a command.
//!
//! Results go to standard output, all else to standard error; `--json` prints one object instead of text. Colour and
//! progress appear only on a terminal.

mod audit;
mod compile;
mod count;
mod course;
mod dossier;
mod exit;
mod explain;
mod input;
mod ledger;
mod limits;
mod plan;
mod progress;
mod render;
mod restrict;
mod shots;
mod simulate;
mod texts;
mod turns;

use std::ffi::OsString;
use std::io::{self, Write};
use std::panic::{AssertUnwindSafe, catch_unwind};
use std::process::ExitCode;

use clap::{Args, Parser, Subcommand};

use exit::Exit;
use render::Failure;

const EXIT_CODES: &str = "Exit codes:
  0   done; a count of zero is an answer
  1   the answer is no: a circuit that differs, shots that contradict the plan, a ledger that no longer holds
  2   bad input or usage
  3   a budget ran out, or the verdict is undecided; what was reached is printed and marked partial
  70  a fault of tallymark itself";

/// Turns a constraint problem into a quantum search that can be trusted.
///
/// Counts the solutions of a puzzle (.tally) or of a DIMACS (.cnf), OPB (.opb) or AIGER (.aag, .aig) file, compiles the
/// oracle that marks them, proves that the two agree, and plans the search.
#[derive(Parser)]
#[command(name = "tallymark", version, after_help = EXIT_CODES)]
struct Cli {
    #[command(flatten)]
    global: Global,
    #[command(subcommand)]
    command: Command,
}

/// Options of every command.
#[derive(Args, Clone)]
#[command(next_help_heading = "Options of every command")]
struct Global {
    /// Print one JSON object instead of text
    #[arg(long, global = true)]
    json: bool,
    /// Stop after this many seconds and print what was reached
    #[arg(long, global = true, value_name = "SECONDS", value_parser = seconds)]
    time: Option<f64>,
    /// Seed of everything that is drawn
    #[arg(long, global = true, value_name = "NUMBER", default_value_t = 1)]
    seed: u64,
    /// Threads to use [default: those of the machine]
    #[arg(long, global = true, value_name = "NUMBER")]
    threads: Option<std::num::NonZeroUsize>,
    /// Give a `known` of the problem another value; may be repeated
    #[arg(long, global = true, value_name = "NAME=VALUE", value_parser = setting)]
    set: Vec<(String, String)>,
    /// Search every bit as given, computing none from the others
    #[arg(long, global = true)]
    no_narrowing: bool,
    /// One solution is enough: let a searched state stand for several, where that searches less
    #[arg(long, global = true, conflicts_with = "no_narrowing")]
    any: bool,
    #[command(flatten)]
    restrict: restrict::Options,
}

#[derive(Subcommand)]
enum Command {
    /// The main job: count, compile, audit, plan; writes a folder and prints the summary
    Dossier(dossier::Options),
    /// The tally: how many solutions
    Count(count::Options),
    /// The oracle, or with --whole the search circuit
    Compile(Box<compile::Options>),
    /// Judge an OpenQASM circuit against the problem
    Audit(Box<audit::Options>),
    /// All problems of a folder against the expected tallies and costs
    Ledger(ledger::Options),
    /// Iterations and success probability, for a problem or for numbers alone
    Plan(Box<plan::Options>),
    /// Run a search on this machine: success by iteration, drawn results
    Simulate(simulate::Options),
    /// Measured bit strings back to answers, checked, and compared with the plan
    Shots(shots::Options),
    /// How the problem was read: variables, bits, constraints, ranges
    Explain(explain::Options),
}

/// Runs the command line of this process.
pub fn main() -> ExitCode {
    run(std::env::args_os().collect()).into()
}

fn run(arguments: Vec<OsString>) -> Exit {
    let json = arguments.iter().any(|argument| argument == "--json");
    let cli = match Cli::try_parse_from(&arguments) {
        Ok(cli) => cli,
        Err(error) => return usage(&error, json),
    };
    let outcome = catch_unwind(AssertUnwindSafe(|| dispatch(&cli)));
    match outcome {
        Ok(Ok((exit, text))) => print(&text).map_or(Exit::Input, |()| exit),
        Ok(Err(failure)) => failure.print(json),
        Err(_) => Exit::Fault,
    }
}

/// Each command gives its exit code and what goes to standard output.
type Outcome = Result<(Exit, String), Box<Failure>>;

fn dispatch(cli: &Cli) -> Outcome {
    match &cli.command {
        Command::Dossier(options) => dossier::run(&cli.global, options),
        Command::Count(options) => count::run(&cli.global, options),
        Command::Compile(options) => compile::run(&cli.global, options),
        Command::Audit(options) => audit::run(&cli.global, options),
        Command::Plan(options) => plan::run(&cli.global, options),
        Command::Ledger(options) => ledger::run(&cli.global, options),
        Command::Simulate(options) => simulate::run(&cli.global, options),
        Command::Shots(options) => shots::run(&cli.global, options),
        Command::Explain(options) => explain::run(&cli.global, options),
    }
}

/// Prints a result. A reader that went away is a quiet success.
fn print(text: &str) -> io::Result<()> {
    let mut out = io::stdout().lock();
    match out.write_all(text.as_bytes()).and_then(|()| out.flush()) {
        Err(error) if error.kind() == io::ErrorKind::BrokenPipe => Ok(()),
        other => other,
    }
}

/// Help and version are results; anything else is a mistake of usage.
fn usage(error: &clap::Error, json: bool) -> Exit {
    if !error.use_stderr() {
        return print(&error.to_string()).map_or(Exit::Input, |()| Exit::Done);
    }
    if json {
        let message = error.to_string();
        let first = message.lines().next().unwrap_or_default().trim_start_matches("error: ");
        let diagnostic = crate::diag::Diagnostic::error(crate::diag::Code("U001"), first)
            .expected("a command line as `tallymark --help` shows");
        return Failure::usage(diagnostic).print(true);
    }
    // The rendering of clap has colour where the terminal wants it.
    let _ = error.print();
    Exit::Input
}

fn seconds(text: &str) -> Result<f64, String> {
    match text.parse::<f64>() {
        Ok(seconds) if (0.0..=1e9).contains(&seconds) => Ok(seconds),
        _ => Err("expected a number of seconds, such as 2.5".to_owned()),
    }
}

fn setting(text: &str) -> Result<(String, String), String> {
    match text.split_once('=') {
        Some((name, value)) if !name.trim().is_empty() && !value.trim().is_empty() => {
            Ok((name.trim().to_owned(), value.trim().to_owned()))
        }
        _ => Err("expected NAME=VALUE, such as cells=8".to_owned()),
    }
}

#[cfg(test)]
mod tests {
    use clap::CommandFactory;

    #[test]
    fn the_command_line_is_well_formed() {
        super::Cli::command().debug_assert();
    }
}
