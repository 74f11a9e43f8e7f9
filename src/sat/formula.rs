//! Clauses of the engines, flat: literals of all clauses in one pool.

use std::io::{self, Write};

use super::Lit;

/// A list of clauses over variables numbered from 0.
#[derive(Clone, PartialEq, Eq, Default, Debug)]
pub struct Formula {
    lits: Vec<Lit>,
    ends: Vec<u32>,
    var_count: usize,
}

impl Formula {
    /// No clause over so many variables.
    pub fn new(var_count: usize) -> Self {
        Self { lits: Vec::new(), ends: Vec::new(), var_count }
    }

    /// How many variables: those declared, and all that a clause mentions.
    pub fn var_count(&self) -> usize {
        self.var_count
    }

    /// Declares one more variable.
    pub fn new_var(&mut self) -> usize {
        self.var_count += 1;
        self.var_count - 1
    }

    /// Appends a clause.
    pub fn push(&mut self, clause: impl IntoIterator<Item = Lit>) {
        let from = self.lits.len();
        self.lits.extend(clause);
        let highest = self.lits[from..].iter().map(|lit| lit.var() + 1).max().unwrap_or(0);
        self.var_count = self.var_count.max(highest);
        self.ends.push(u32::try_from(self.lits.len()).expect("fewer than 2^32 literals"));
    }

    /// How many clauses.
    pub fn len(&self) -> usize {
        self.ends.len()
    }

    /// Whether there is no clause.
    pub fn is_empty(&self) -> bool {
        self.ends.is_empty()
    }

    /// A clause by its place.
    pub fn clause(&self, at: usize) -> &[Lit] {
        let start = if at == 0 { 0 } else { self.ends[at - 1] };
        &self.lits[start as usize..self.ends[at] as usize]
    }

    /// The clauses in order.
    pub fn iter(&self) -> impl ExactSizeIterator<Item = &[Lit]> {
        (0..self.len()).map(|at| self.clause(at))
    }

    /// Writes the clauses as DIMACS CNF, after comment lines.
    pub fn write_dimacs(&self, comments: &[String], out: &mut dyn Write) -> io::Result<()> {
        for comment in comments {
            writeln!(out, "c {comment}")?;
        }
        writeln!(out, "p cnf {} {}", self.var_count, self.len())?;
        for clause in self.iter() {
            for lit in clause {
                write!(out, "{} ", lit.to_dimacs())?;
            }
            writeln!(out, "0")?;
        }
        Ok(())
    }
}
