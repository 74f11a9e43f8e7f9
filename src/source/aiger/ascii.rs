//! The ASCII form: a line for each input, the output and each AND, which are put in order here.

use super::fault::{Fault, Kind};
use super::lines::{Line, Lines};
use super::{And, Graph, Header};

pub(super) fn graph(lines: &mut Lines<'_>, header: Header) -> Result<Graph, Fault> {
    let mut reader = Reader { header, defined: std::collections::HashSet::new() };
    let mut graph = Graph::default();
    for _ in 0..header.inputs {
        let line = lines.line("an input literal")?;
        let [literal] = line.numbers("an input literal: an even number from 2")?;
        reader.define(&line, literal)?;
        graph.inputs.push(literal);
    }
    let output_line = lines.line("the output literal")?;
    [graph.output] = output_line.numbers("the output literal")?;
    reader.in_range(&output_line, graph.output)?;
    let mut rows = Vec::new();
    for _ in 0..header.ands {
        let line = lines.line("an AND: three literals")?;
        let [out, left, right] = line.numbers("an AND: three literals")?;
        reader.define(&line, out)?;
        reader.in_range(&line, left)?;
        reader.in_range(&line, right)?;
        rows.push((And { out, left, right }, line));
    }
    for (and, line) in &rows {
        reader.is_defined(line, and.left)?;
        reader.is_defined(line, and.right)?;
    }
    reader.is_defined(&output_line, graph.output)?;
    graph.ands = ordered(&rows)?;
    Ok(graph)
}

struct Reader {
    header: Header,
    /// Variables that are an input or an AND; asked, never walked through.
    defined: std::collections::HashSet<u64>,
}

impl Reader {
    fn in_range(&self, line: &Line<'_>, literal: u64) -> Result<(), Fault> {
        let largest = self.header.largest;
        if literal / 2 <= largest { Ok(()) } else { Err(line.fault(Kind::OutOfRange(largest))) }
    }

    fn define(&mut self, line: &Line<'_>, literal: u64) -> Result<(), Fault> {
        if literal < 2 || literal % 2 == 1 {
            return Err(line.fault(Kind::Expected("an even literal from 2, which names a variable")));
        }
        self.in_range(line, literal)?;
        if self.defined.insert(literal / 2) { Ok(()) } else { Err(line.fault(Kind::Twice(literal))) }
    }

    fn is_defined(&self, line: &Line<'_>, literal: u64) -> Result<(), Fault> {
        let known = literal < 2 || self.defined.contains(&(literal / 2));
        if known { Ok(()) } else { Err(line.fault(Kind::Undefined(literal))) }
    }
}

/// The ANDs with operands before their users: those that are ready, in the order of the file, then those that they
/// made ready (Kahn 1962, from memory).
fn ordered(rows: &[(And, Line<'_>)]) -> Result<Vec<And>, Fault> {
    let place: std::collections::HashMap<u64, usize> =
        rows.iter().enumerate().map(|(at, (and, _))| (and.out / 2, at)).collect();
    let operands = |and: &And| [and.left, and.right].map(|literal| place.get(&(literal / 2)).copied());
    let mut users = vec![Vec::new(); rows.len()];
    let mut missing = vec![0u8; rows.len()];
    for (at, (and, _)) in rows.iter().enumerate() {
        for operand in operands(and).into_iter().flatten() {
            users[operand].push(at);
            missing[at] += 1;
        }
    }
    let mut ready: Vec<usize> = (0..rows.len()).filter(|&at| missing[at] == 0).collect();
    let mut next = 0;
    while let Some(&at) = ready.get(next) {
        next += 1;
        for &user in &users[at] {
            missing[user] -= 1;
            if missing[user] == 0 {
                ready.push(user);
            }
        }
    }
    match missing.iter().position(|&missing| missing > 0) {
        Some(at) => Err(rows[at].1.fault(Kind::Cycle)),
        None => Ok(ready.into_iter().map(|at| rows[at].0).collect()),
    }
}
