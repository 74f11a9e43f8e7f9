//! Options for the text of a circuit: the version of the language, and how much a reader is helped.

use std::io::{self, Write};

use clap::Args;

use crate::circuit::{Product, qasm};
use crate::cli::render::Failure;
use crate::diag::{Code, Diagnostic};
use crate::make::lower::gadgets;
use crate::report::readable::note;
use crate::source::Loaded;
use crate::span::Sources;

#[derive(Args)]
#[group(skip)]
#[command(next_help_heading = "The text")]
pub(super) struct Options {
    /// The version of OpenQASM: 3 or 2
    #[arg(long, value_name = "VERSION", default_value = "3", value_parser = ["2", "3"])]
    dialect: String,
    /// Write gadgets as gates with names, and what serves one constraint as a subroutine beside what the source says
    #[arg(long)]
    readable: bool,
}

impl Options {
    /// Refuses what the language cannot say.
    pub(super) fn check(&self, product: &Product) -> Result<(), Box<Failure>> {
        if self.dialect == "3" {
            return Ok(());
        }
        if self.readable {
            return Err(Failure::usage(readable_needs_three()));
        }
        qasm::write_two::can_say(&product.circuit).map_err(|what| {
            let help = "use a level below wide, or OpenQASM 3";
            Failure::usage(Diagnostic::error(Code("C008"), what.to_string()).found("--dialect 2").help(help))
        })
    }

    /// Writes the text.
    pub(super) fn write(
        &self,
        product: &Product,
        header: &[String],
        (loaded, sources): (&Loaded, &Sources),
        mut out: &mut dyn Write,
    ) -> io::Result<()> {
        let circuit = &product.circuit;
        if self.dialect == "2" {
            qasm::write_two::write(circuit, header, &mut out)
        } else if self.readable {
            let note = |id| note(&loaded.problem, sources, id);
            let readable = qasm::write::Readable { gadgets: &gadgets(), note: &note, subroutines: true };
            qasm::write::write_readable(circuit, header, &readable, &mut out)
        } else {
            qasm::write::write(circuit, header, &mut out)
        }
    }
}

fn readable_needs_three() -> Diagnostic {
    Diagnostic::error(Code("U013"), "readable text is written in OpenQASM 3")
        .found("--readable --dialect 2")
        .expected("--readable without --dialect 2")
}
