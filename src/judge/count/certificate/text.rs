//! The text of a certificate.
//!
//! A graph is written in the format of the d-DNNF compilers: a line `nnf NODES EDGES VARIABLES`, then a line a node,
//! children first: `L LITERAL`, `A CHILDREN PLACES…`, `O VARIABLE CHILDREN PLACES…`; `A 0` always holds, `O 0 0` never.
//! A. Darwiche, "New advances in compiling CNF into decomposable negation normal form", ECAI 2004, and the manual of the
//! compiler described there (from memory). Behind the nodes, where other readers have stopped, one line of ours: `c count
//! NUMBER`. Lines that begin with `c` are comments anywhere. Accepted as decisions are disjunctions of two sides that state
//! the two literals of their variable.
//!
//! A refutation is written as DRAT text: a clause a line that ends with 0, deletions behind `d`. N. Wetzler, M. Heule,
//! W. Hunt, "DRAT-trim: efficient checking and trimming using expressive clausal proofs", SAT 2014 (from memory).

use std::io::{self, Write};

use num_bigint::BigUint;
use thiserror::Error;

use super::graph::{Graph, Node};
use super::{Certificate, Proof};
use crate::problem::BitLit;

/// Nodes that a file may have.
const MAX_NODES: u64 = 1 << 28;

/// What is wrong in the text.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
pub enum Wrong {
    /// The first line is not a header.
    #[error("expected `nnf NODES EDGES VARIABLES`")]
    Header,
    /// The header speaks of another number of variables than the formula.
    #[error("the header says {found} variables, the formula has {expected}")]
    VarCount {
        /// What the header says.
        found: u64,
        /// What the formula has.
        expected: usize,
    },
    /// More nodes than can be read.
    #[error("{0} nodes are too many to be read")]
    TooMany(u64),
    /// No such kind of line.
    #[error("expected a node (`L`, `A` or `O`) or a comment (`c`)")]
    NoNode,
    /// A number is missing or no number.
    #[error("expected {0}")]
    Expected(&'static str),
    /// Something follows a complete line.
    #[error("unexpected `{0}` behind a complete line")]
    Extra(String),
    /// A child that is not before its parent.
    #[error("the child {0} is not a node before this one")]
    Child(u64),
    /// A literal of no variable.
    #[error("{0} is no literal of the formula")]
    Literal(i64),
    /// A disjunction whose sides do not state the two values of its variable.
    #[error("not a decision: its two sides must state the two literals of its variable")]
    NoDecision,
    /// The header's number of nodes or edges is another than that of the lines.
    #[error("the header says {said} {what}, there are {found}")]
    Miscounted {
        /// Nodes or edges.
        what: &'static str,
        /// What the header says.
        said: u64,
        /// What was found.
        found: usize,
    },
    /// There is no node.
    #[error("there is no node")]
    Empty,
}

/// A text that is no certificate, and the line that shows it (from 1).
#[derive(Clone, PartialEq, Eq, Debug, Error)]
#[error("line {line}: {wrong}")]
pub struct Mistake {
    /// The line.
    pub line: usize,
    /// What is wrong in it.
    pub wrong: Wrong,
}

/// Writes a certificate.
pub fn write(certificate: &Certificate, out: &mut dyn Write) -> io::Result<()> {
    match &certificate.proof {
        Proof::Refutation(steps) => {
            for step in steps {
                for lit in step {
                    write!(out, "{lit:?} ")?;
                }
                writeln!(out, "0")?;
            }
            Ok(())
        }
        Proof::Graph { graph, count } => {
            writeln!(out, "nnf {} {} {}", graph.nodes().len(), graph.edge_count(), certificate.var_count)?;
            for node in graph.nodes() {
                write_node(graph, node, out)?;
            }
            count.as_ref().map_or(Ok(()), |count| writeln!(out, "c count {count}"))
        }
    }
}

fn write_node(graph: &Graph, node: &Node, out: &mut dyn Write) -> io::Result<()> {
    match *node {
        Node::Never => writeln!(out, "O 0 0"),
        Node::Lit(lit) => writeln!(out, "L {lit:?}"),
        Node::Either { bit, yes, no } => {
            writeln!(out, "O {} 2 {yes} {no}", BitLit::new(bit, true).to_dimacs())
        }
        Node::All { from, to } => {
            write!(out, "A {}", to - from)?;
            for child in graph.children(node) {
                write!(out, " {child}")?;
            }
            writeln!(out)
        }
    }
}

/// Reads a certificate over so many variables.
pub fn read(text: &str, var_count: usize) -> Result<Certificate, Mistake> {
    let first = text.lines().find(|line| !is_comment(line)).unwrap_or_default();
    let proof = match first.trim_start().starts_with("nnf") {
        true => read_graph(text, var_count)?,
        false => Proof::Refutation(read_refutation(text, var_count)?),
    };
    Ok(Certificate { var_count, proof })
}

fn is_comment(line: &str) -> bool {
    line.trim().is_empty() || line.starts_with('c')
}

fn read_graph(text: &str, var_count: usize) -> Result<Proof, Mistake> {
    let (mut graph, mut header, mut count) = (Graph::default(), None, None);
    for (at, line) in text.lines().enumerate() {
        let mistake = |wrong| Mistake { line: at + 1, wrong };
        let mut words = Words(line.split_ascii_whitespace());
        if is_comment(line) {
            if let (Some("c"), Some("count")) = (words.0.next(), words.0.next()) {
                let number = words.0.next().and_then(|word| word.parse::<BigUint>().ok());
                count = Some(number.ok_or_else(|| mistake(Wrong::Expected("the count")))?);
            }
            continue;
        }
        match header {
            None => header = Some(words.header(var_count).map_err(mistake)?),
            Some(_) => words.node(&mut graph, var_count).map_err(mistake)?,
        }
        words.end().map_err(mistake)?;
    }
    let last = |wrong| Mistake { line: text.lines().count().max(1), wrong };
    let (nodes, edges) = header.ok_or_else(|| last(Wrong::Header))?;
    let found = [("nodes", nodes, graph.nodes().len()), ("edges", edges, graph.edge_count())];
    if let Some((what, said, found)) = found.into_iter().find(|&(_, said, found)| said != found as u64) {
        return Err(last(Wrong::Miscounted { what, said, found }));
    }
    if graph.nodes().is_empty() {
        return Err(last(Wrong::Empty));
    }
    Ok(Proof::Graph { graph, count })
}

struct Words<'a>(std::str::SplitAsciiWhitespace<'a>);

impl Words<'_> {
    fn number(&mut self, what: &'static str) -> Result<u64, Wrong> {
        self.0.next().and_then(|word| word.parse().ok()).ok_or(Wrong::Expected(what))
    }

    fn end(&mut self) -> Result<(), Wrong> {
        self.0.next().map_or(Ok(()), |word| Err(Wrong::Extra(word.to_owned())))
    }

    fn header(&mut self, var_count: usize) -> Result<(u64, u64), Wrong> {
        if self.0.next() != Some("nnf") {
            return Err(Wrong::Header);
        }
        let mut number = || self.number("a number").map_err(|_| Wrong::Header);
        let (nodes, edges, vars) = (number()?, number()?, number()?);
        if nodes > MAX_NODES || edges > 4 * MAX_NODES {
            return Err(Wrong::TooMany(nodes));
        }
        match vars == var_count as u64 {
            true => Ok((nodes, edges)),
            false => Err(Wrong::VarCount { found: vars, expected: var_count }),
        }
    }

    fn node(&mut self, graph: &mut Graph, var_count: usize) -> Result<(), Wrong> {
        match self.0.next() {
            Some("L") => {
                let lit = self.literal(var_count)?.ok_or(Wrong::Literal(0))?;
                graph.push(Node::Lit(lit));
            }
            Some("A") => {
                let children = self.children(graph)?;
                graph.push_all(&children);
            }
            Some("O") => {
                let var = self.literal(var_count)?;
                let children = self.children(graph)?;
                graph.push(decision(graph, var, &children)?);
            }
            _ => return Err(Wrong::NoNode),
        }
        Ok(())
    }

    /// A literal, or 0.
    fn literal(&mut self, var_count: usize) -> Result<Option<BitLit>, Wrong> {
        let word = self.0.next().ok_or(Wrong::Expected("a literal"))?;
        let number: i64 = word.parse().map_err(|_| Wrong::Expected("a literal"))?;
        if number == 0 {
            return Ok(None);
        }
        let lit = BitLit::from_dimacs(number).filter(|_| number.unsigned_abs() <= var_count as u64);
        lit.map(Some).ok_or(Wrong::Literal(number))
    }

    fn children(&mut self, graph: &Graph) -> Result<Vec<u32>, Wrong> {
        let count = self.number("the number of children")?;
        let mut children = Vec::new();
        for _ in 0..count {
            let child = self.number("the place of a child")?;
            if child >= graph.nodes().len() as u64 {
                return Err(Wrong::Child(child));
            }
            children.push(child as u32);
        }
        Ok(children)
    }
}

fn decision(graph: &Graph, var: Option<BitLit>, children: &[u32]) -> Result<Node, Wrong> {
    let node = |lit: BitLit, yes, no| Node::Either { bit: lit.bit(), yes, no };
    match (var, children) {
        (None, []) => Ok(Node::Never),
        (Some(lit), &[a, b]) if graph.states(a, lit) && graph.states(b, !lit) => Ok(node(lit, a, b)),
        (Some(lit), &[a, b]) if graph.states(b, lit) && graph.states(a, !lit) => Ok(node(lit, b, a)),
        _ => Err(Wrong::NoDecision),
    }
}

/// The clauses that a DRAT text adds. Deletions are left out: they can only make a check by propagation harder.
fn read_refutation(text: &str, var_count: usize) -> Result<Vec<Vec<BitLit>>, Mistake> {
    let mut steps = Vec::new();
    for (at, line) in text.lines().enumerate() {
        let mistake = |wrong| Mistake { line: at + 1, wrong };
        if is_comment(line) || line.trim_start().starts_with('d') {
            continue;
        }
        let mut words = Words(line.split_ascii_whitespace());
        let mut clause = Vec::new();
        while let Some(lit) = words.literal(var_count).map_err(mistake)? {
            clause.push(lit);
        }
        words.end().map_err(mistake)?;
        steps.push(clause);
    }
    Ok(steps)
}
