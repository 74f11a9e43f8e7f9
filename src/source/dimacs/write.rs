//! Printing: a problem of clauses as DIMACS text, which reads back as the same problem.

use std::fmt::{self, Write};

use crate::id::Id;
use crate::problem::{BitLit, Problem};

/// Writes a problem of clauses over yes/no variables: the header, the show line where there is one, a clause a line.
/// Expression constraints and objectives have no place in the format and must not be there.
pub fn write(problem: &Problem, out: &mut impl Write) -> fmt::Result {
    assert!(problem.constraints.is_empty(), "a problem of clauses only");
    writeln!(out, "p cnf {} {}", problem.bit_count(), problem.clauses.len())?;
    if let Some(shown) = &problem.shown {
        write!(out, "c p show")?;
        for bit in shown {
            write!(out, " {}", bit.index() + 1)?;
        }
        writeln!(out, " 0")?;
    }
    for clause in problem.clauses.iter() {
        for lit in clause.iter().copied().map(BitLit::to_dimacs) {
            write!(out, "{lit} ")?;
        }
        writeln!(out, "0")?;
    }
    Ok(())
}
