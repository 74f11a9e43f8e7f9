//! Structure: what clauses say, read back from them.
//!
//! Input: [`Clauses`] over so many bits. Output: a [`Structure`], a list of [`Finding`]s: a [`Fact`] about the bits and the
//! clauses that show it. After: every fact is implied by the clauses that it names, by these alone; nothing is guessed.
//! Reading is near linear: clauses are compared with clauses by hashing, and what could grow faster is cut off by the
//! limits named in each file.
//!
//! - [`units`]: literals that hold, literals that are equal (strongly connected binary clauses).
//! - [`gates`]: conjunctions (disjunctions are their duals), if-then-else, majorities.
//! - [`parity`]: exclusive ors of any width that a clause can spell, and adders, which are a parity and a carry.
//! - [`groups`]: exactly one, at most k, spelt out as clauses.
//! - [`linear`]: elimination over the parities.
//!
//! Recognising gates by their clauses: R. Ostrowski, E. Grégoire, B. Mazure, L. Saïs, "Recovering and exploiting
//! structural knowledge from CNF formulas", CP 2002 (from memory).

mod gates;
mod groups;
pub mod linear;
mod parity;
mod table;
mod tidy;
mod units;

use crate::problem::{BitId, BitLit, Bits, Clauses};

pub use tidy::Tidy;

/// Something that some clauses say.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Fact {
    /// The literal holds.
    Holds(BitLit),
    /// The two literals have the same value.
    Equal(BitLit, BitLit),
    /// The output holds where all inputs do.
    And {
        /// What is defined.
        output: BitLit,
        /// Two at least.
        inputs: Vec<BitLit>,
    },
    /// An odd number of the bits is 1, or an even one.
    Parity {
        /// In increasing order, two at least.
        bits: Vec<BitId>,
        /// Whether the number is odd.
        odd: bool,
    },
    /// The output is `yes` where the condition holds, else `no`.
    Choose {
        /// What is defined.
        output: BitLit,
        /// Which of the two.
        condition: BitLit,
        /// The value where the condition holds.
        yes: BitLit,
        /// The value where it does not.
        no: BitLit,
    },
    /// The output holds where at least two of three inputs do.
    Majority {
        /// What is defined.
        output: BitLit,
        /// The inputs.
        inputs: [BitLit; 3],
    },
    /// `sum + 2 carry` is the number of inputs that hold: a half adder of two, a full adder of three.
    Adder {
        /// The odd one.
        sum: BitLit,
        /// The two of them.
        carry: BitLit,
        /// Two or three.
        inputs: Vec<BitLit>,
    },
    /// One of them holds, and no other.
    ExactlyOne(Vec<BitLit>),
    /// At most so many of them hold.
    AtMost(u32, Vec<BitLit>),
}

impl Fact {
    /// Whether the fact is true of these bits.
    pub fn holds(&self, bits: &Bits) -> bool {
        let value = |lit: BitLit| bits.get(lit.bit()) != lit.is_negated();
        let count = |lits: &[BitLit]| lits.iter().filter(|&&lit| value(lit)).count();
        match self {
            Self::Holds(lit) => value(*lit),
            Self::Equal(a, b) => value(*a) == value(*b),
            Self::And { output, inputs } => value(*output) == inputs.iter().all(|&input| value(input)),
            Self::Parity { bits: list, odd } => {
                list.iter().filter(|&&bit| bits.get(bit)).count() % 2 == usize::from(*odd)
            }
            Self::Choose { output, condition, yes, no } => {
                value(*output) == value(if value(*condition) { *yes } else { *no })
            }
            Self::Majority { output, inputs } => value(*output) == (count(inputs) >= 2),
            Self::Adder { sum, carry, inputs } => {
                usize::from(value(*sum)) + 2 * usize::from(value(*carry)) == count(inputs)
            }
            Self::ExactlyOne(lits) => count(lits) == 1,
            Self::AtMost(most, lits) => count(lits) <= *most as usize,
        }
    }
}

/// A fact, and the clauses that imply it, by their places in the list that was read.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Finding {
    /// What they say.
    pub fact: Fact,
    /// In increasing order, each once.
    pub clauses: Vec<u32>,
}

impl Finding {
    fn new(fact: Fact, mut clauses: Vec<u32>) -> Self {
        clauses.sort_unstable();
        clauses.dedup();
        Self { fact, clauses }
    }
}

/// What was read: findings of a kind stand together, in the order of their first clauses or outputs.
#[derive(Clone, PartialEq, Eq, Default, Debug)]
pub struct Structure {
    /// The findings.
    pub findings: Vec<Finding>,
}

impl Structure {
    /// How many facts of each kind, in words: `12 parities, 3 adders`; empty where there is none.
    pub fn in_words(&self) -> String {
        type Kind = (&'static str, &'static str, fn(&Fact) -> bool);
        const KINDS: [Kind; 8] = [
            ("fixed literal", "fixed literals", |fact| matches!(fact, Fact::Holds(_))),
            ("equality", "equalities", |fact| matches!(fact, Fact::Equal(..))),
            ("conjunction", "conjunctions", |fact| matches!(fact, Fact::And { .. })),
            ("choice", "choices", |fact| matches!(fact, Fact::Choose { .. })),
            ("majority", "majorities", |fact| matches!(fact, Fact::Majority { .. })),
            ("parity", "parities", |fact| matches!(fact, Fact::Parity { .. })),
            ("adder", "adders", |fact| matches!(fact, Fact::Adder { .. })),
            ("group", "groups", |fact| matches!(fact, Fact::ExactlyOne(_) | Fact::AtMost(..))),
        ];
        let parts = KINDS.iter().filter_map(|(one, many, is)| {
            let count = self.findings.iter().filter(|finding| is(&finding.fact)).count();
            (count > 0).then(|| format!("{count} {}", if count == 1 { one } else { many }))
        });
        parts.collect::<Vec<_>>().join(", ")
    }
}

/// Reads clauses.
pub fn read(clauses: &Clauses, bit_count: usize) -> Structure {
    let tidy = Tidy::new(clauses, bit_count);
    let table = table::Table::new(&tidy);
    let mut findings = units::find(&tidy);
    findings.extend(gates::find(&tidy, &table));
    let parities = parity::find(&tidy);
    findings.extend(parity::adders(&parities, &findings));
    findings.extend(parities);
    findings.extend(groups::find(&tidy, &table));
    Structure { findings }
}

/// The parities alone.
pub fn parities(tidy: &Tidy) -> Vec<Finding> {
    parity::find(tidy)
}
