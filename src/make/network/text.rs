//! The text form of a network, printed by `Display` and read back by `FromStr`.
//!
//! ```text
//! search b0 b1
//! n3 = and n1 !n2
//! n4 = xor n1 n3
//! conjunct c0 !n4
//! conjunct domain n3
//! root n3
//! ```

use std::fmt;
use std::str::FromStr;

use thiserror::Error;

use super::{Conjunct, Lit, Network, Node, NodeId};
use crate::id::{ConstraintId, Id, IdVec};
use crate::problem::BitId;

/// A line that is not part of a network.
#[derive(Clone, PartialEq, Eq, Debug, Error)]
#[error("line {line} of the network: {what}")]
pub struct TextError {
    /// The line, from 1.
    pub line: usize,
    /// What is wrong with it.
    pub what: &'static str,
}

impl fmt::Display for Network {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "search")?;
        self.searched.iter().try_for_each(|bit| write!(f, " {bit}"))?;
        writeln!(f)?;
        for (id, node) in self.nodes.iter() {
            match node {
                Node::Const | Node::Input(_) => {}
                Node::And(a, b) => writeln!(f, "{id} = and {a} {b}")?,
                Node::Xor(a, b) => writeln!(f, "{id} = xor {a} {b}")?,
            }
        }
        for conjunct in &self.conjuncts {
            match conjunct.constraint {
                Some(constraint) => writeln!(f, "conjunct {constraint} {}", conjunct.lit)?,
                None => writeln!(f, "conjunct domain {}", conjunct.lit)?,
            }
        }
        writeln!(f, "root {}", self.root)
    }
}

impl FromStr for Network {
    type Err = TextError;

    fn from_str(text: &str) -> Result<Self, TextError> {
        let mut reader = Reader::default();
        let mut line = 0;
        for content in text.lines() {
            line += 1;
            reader.line(content).map_err(|what| TextError { line, what })?;
        }
        let root = reader.root.ok_or(TextError { line: line + 1, what: "no root" })?;
        Ok(Network { nodes: reader.nodes, searched: reader.searched, conjuncts: reader.conjuncts, root })
    }
}

#[derive(Default)]
struct Reader {
    nodes: IdVec<NodeId, Node>,
    searched: Vec<BitId>,
    conjuncts: Vec<Conjunct>,
    root: Option<Lit>,
}

impl Reader {
    fn line(&mut self, line: &str) -> Result<(), &'static str> {
        let words: Vec<&str> = line.split_whitespace().collect();
        if self.root.is_some() {
            return Err("nothing follows the root");
        }
        if self.nodes.is_empty() != (words.first() == Some(&"search")) {
            return Err("the first line, and no other, is the search register");
        }
        match *words.as_slice() {
            ["search", ref bits @ ..] => {
                self.searched = bits.iter().map(|bit| number(bit, "b").map(BitId::new)).collect::<Result<_, _>>()?;
                self.nodes.push(Node::Const);
                self.searched.iter().for_each(|&bit| _ = self.nodes.push(Node::Input(bit)));
            }
            [id, "=", op, a, b] => {
                let (a, b) = (self.lit(a)?, self.lit(b)?);
                if number(id, "n")? != self.nodes.len() {
                    return Err("nodes are numbered without gaps");
                }
                let node = match op {
                    "and" => Node::And(a, b),
                    "xor" if !a.is_complemented() && !b.is_complemented() => Node::Xor(a, b),
                    _ => return Err("a node is an `and`, or a `xor` of nodes that are not complemented"),
                };
                self.nodes.push(node);
            }
            ["conjunct", "domain", lit] => self.conjuncts.push(Conjunct { lit: self.lit(lit)?, constraint: None }),
            ["conjunct", id, lit] => {
                let constraint = Some(ConstraintId::new(number(id, "c")?));
                self.conjuncts.push(Conjunct { lit: self.lit(lit)?, constraint });
            }
            ["root", lit] => self.root = Some(self.lit(lit)?),
            _ => return Err("expected a node, a conjunct or the root"),
        }
        Ok(())
    }

    fn lit(&self, text: &str) -> Result<Lit, &'static str> {
        let (name, complemented) = text.strip_prefix('!').map_or((text, false), |name| (name, true));
        let index = number(name, "n")?;
        if index >= self.nodes.len() {
            return Err("operands come before their users");
        }
        Ok(Lit::new(NodeId::new(index), complemented))
    }
}

fn number(text: &str, prefix: &str) -> Result<usize, &'static str> {
    let digits = text.strip_prefix(prefix).ok_or("a name has another letter than expected")?;
    let number: u32 = digits.parse().map_err(|_| "a name lacks its number")?;
    if number < 1 << 31 { Ok(number as usize) } else { Err("a number is beyond 2^31") }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn reads_back_what_it_prints_and_refuses_what_is_not_a_network() {
        let text = "search b1 b0\nn3 = and n1 !n2\nn4 = xor n1 n3\nconjunct c0 !n4\nconjunct domain n3\nroot n3\n";
        let network: Network = text.parse().unwrap();
        assert_eq!(network.to_string(), text);
        for (bad, line) in [
            ("", 1),
            ("search b0\n", 2),
            ("root n0\n", 1),
            ("search b0\nn2 = and n1 n2\nroot n2\n", 2),
            ("search b0\nn3 = and n1 n1\nroot n1\n", 2),
            ("search b0\nn2 = xor n1 !n0\nroot n2\n", 2),
            ("search b0\nroot n1\nroot n1\n", 3),
            ("search b0\nroot n9\n", 2),
        ] {
            assert_eq!(bad.parse::<Network>().unwrap_err().line, line, "{bad}");
        }
    }
}
