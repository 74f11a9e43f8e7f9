//! The AIGER reader: and-inverter graphs, ASCII (`aag`) and binary (`aig`), with one output and no latches.
//!
//! Input:  bytes. Output: a [`Problem`]: a yes/no variable for each input, in order, and that the output is 1; or
//! messages with places. Holds: the invariants of [`check`](crate::problem::check).
//!
//! A literal is twice a variable, plus 1 where it is negated; 0 is false and 1 is true. The header is
//! `aag M I L O A` or `aig M I L O A`: the largest variable, then how many inputs, latches, outputs and ANDs. In ASCII
//! each input, output and AND has a line, ANDs in any order without a cycle. In binary inputs are 1 to I, ANDs follow
//! in order, and each is stored as two differences, seven bits a byte, the lowest first, the high bit set where more
//! follow. Symbols (`i0 name`) name the inputs; without one, input k is `x{k + 1}`. A comment begins with the line `c`.
//!
//! # References
//! - A. Biere: "The AIGER And-Inverter Graph (AIG) format version 20071012" (text of the format read); where its prose
//!   and its examples differ on symbols, the examples are followed. The header fields of version 1.9 from memory.

mod ascii;
mod binary;
mod build;
mod fault;
mod lines;
mod symbols;

use crate::diag::Diagnostic;
use crate::problem::Problem;
use crate::span::Sources;
use fault::{Fault, Kind};
use lines::Lines;

/// Inputs a file may have.
pub const MAX_INPUTS: u64 = 1 << 20;
/// ANDs a file may have.
pub const MAX_ANDS: u64 = 1 << 24;

/// An AND: its literal and those of its operands.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
struct And {
    out: u64,
    left: u64,
    right: u64,
}

/// A graph with one output, as read.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
struct Graph {
    /// The literals of the inputs, in order.
    inputs: Vec<u64>,
    /// Their names, where there are any.
    names: Vec<Option<String>>,
    output: u64,
    /// Operands before their users.
    ands: Vec<And>,
}

/// The numbers of the header.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
struct Header {
    binary: bool,
    /// M.
    largest: u64,
    inputs: u64,
    ands: u64,
}

/// Reads an AIGER file.
pub fn read(bytes: &[u8], name: &str, sources: &mut Sources) -> Result<(Problem, Vec<Diagnostic>), Vec<Diagnostic>> {
    let mut warnings = Vec::new();
    match graph(bytes, &mut warnings) {
        Ok(graph) => {
            let problem = build::build(&graph);
            let warnings = warnings.into_iter().map(|warning| warning.diagnostic(bytes, name, sources, true)).collect();
            Ok((problem, warnings))
        }
        Err(fault) => Err(vec![fault.diagnostic(bytes, name, sources, false)]),
    }
}

fn graph(bytes: &[u8], warnings: &mut Vec<Fault>) -> Result<Graph, Fault> {
    let mut lines = Lines::new(bytes);
    let header = header(&mut lines)?;
    let mut graph = if header.binary { binary::graph(&mut lines, header)? } else { ascii::graph(&mut lines, header)? };
    graph.names = symbols::names(&mut lines, graph.inputs.len(), warnings)?;
    Ok(graph)
}

/// `aag M I L O A`, where later fields of version 1.9 must be 0.
fn header(lines: &mut Lines<'_>) -> Result<Header, Fault> {
    let line = lines.line("a header 'aag M I L O A' or 'aig M I L O A'")?;
    let mut words = line.words();
    let kind = words.next().ok_or(line.fault(Kind::Header))?;
    let binary = match kind.text {
        b"aag" => false,
        b"aig" => true,
        _ => return Err(kind.fault(Kind::Header)),
    };
    let mut numbers = Vec::new();
    for word in words {
        numbers.push((word.number().ok_or(word.fault(Kind::Header))?, word));
    }
    let [(largest, _), (inputs, i), (latches, l), (outputs, o), (ands, a), rest @ ..] = &numbers[..] else {
        return Err(line.fault(Kind::Header));
    };
    let refuse = |word: &lines::Word<'_>, kind| Err(word.fault(kind));
    match () {
        () if *latches > 0 => refuse(l, Kind::Latches),
        () if *outputs != 1 => refuse(o, Kind::Outputs(*outputs)),
        () if *inputs > MAX_INPUTS => refuse(i, Kind::Limit("inputs", MAX_INPUTS)),
        () if *ands > MAX_ANDS => refuse(a, Kind::Limit("ANDs", MAX_ANDS)),
        () if rest.len() > 4 => refuse(&rest[4].1, Kind::Header),
        () if rest.iter().any(|field| field.0 > 0) => Err(line.fault(Kind::Properties)),
        () if binary && *largest != inputs + ands || *largest < inputs + ands => Err(line.fault(Kind::Largest)),
        () if *largest > u64::MAX / 4 => Err(line.fault(Kind::Largest)),
        () => Ok(Header { binary, largest: *largest, inputs: *inputs, ands: *ands }),
    }
}
