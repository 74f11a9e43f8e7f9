//! Clauses, flat: literals of all clauses in one pool, so that a million clauses are two vectors and not a million
//! boxes.

use std::ops::Not;

use crate::id::Id;
use crate::problem::BitId;

/// A bit or its negation: `bit << 1 | negated`.
///
/// ```
/// use tallymark::problem::BitLit;
/// let lit = BitLit::from_dimacs(-3).unwrap();
/// assert_eq!((lit.bit().to_string(), lit.is_negated()), ("b2".to_owned(), true));
/// assert_eq!((!lit).to_dimacs(), 3);
/// ```
#[derive(Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct BitLit(u32);

impl BitLit {
    /// The literal that holds where the bit is `value`.
    pub fn new(bit: BitId, value: bool) -> Self {
        let index = u32::try_from(bit.index()).ok().filter(|&index| index < 1 << 31).expect("bit below 2^31");
        Self(index << 1 | u32::from(!value))
    }

    /// The literal of a DIMACS number: variable *v* is bit *v* - 1. `None` for 0 and beyond 2^31 - 1.
    pub fn from_dimacs(number: i64) -> Option<Self> {
        let var = number.unsigned_abs();
        (1..1 << 31).contains(&var).then(|| Self((var as u32 - 1) << 1 | u32::from(number < 0)))
    }

    /// The DIMACS number of this literal.
    pub fn to_dimacs(self) -> i64 {
        let var = i64::from(self.0 >> 1) + 1;
        if self.is_negated() { -var } else { var }
    }

    /// The bit.
    pub fn bit(self) -> BitId {
        BitId::new((self.0 >> 1) as usize)
    }

    /// Whether the literal holds where the bit is 0.
    pub fn is_negated(self) -> bool {
        self.0 & 1 == 1
    }

    /// `bit << 1 | negated`, for tables with one entry a literal.
    pub fn index(self) -> usize {
        self.0 as usize
    }
}

impl Not for BitLit {
    type Output = Self;
    fn not(self) -> Self {
        Self(self.0 ^ 1)
    }
}

impl std::fmt::Debug for BitLit {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        write!(f, "{}", self.to_dimacs())
    }
}

/// A list of clauses over bits. Order, repetitions and tautologies are kept as they were read.
#[derive(Clone, PartialEq, Eq, Default)]
pub struct Clauses {
    lits: Vec<BitLit>,
    ends: Vec<u32>,
}

impl Clauses {
    /// No clause.
    pub fn new() -> Self {
        Self::default()
    }

    /// Room for this many clauses and literals.
    pub fn with_capacity(clauses: usize, lits: usize) -> Self {
        Self { lits: Vec::with_capacity(lits), ends: Vec::with_capacity(clauses) }
    }

    /// Appends a clause.
    pub fn push(&mut self, clause: &[BitLit]) {
        self.lits.extend_from_slice(clause);
        self.end_clause();
    }

    /// Appends a literal to the clause being built; [`Clauses::end_clause`] ends it.
    pub fn push_lit(&mut self, lit: BitLit) {
        self.lits.push(lit);
    }

    /// Ends the clause being built.
    pub fn end_clause(&mut self) {
        self.ends.push(u32::try_from(self.lits.len()).expect("fewer than 2^32 literals"));
    }

    /// The number of literals pushed so far, those of a clause being built included.
    pub fn lit_count(&self) -> usize {
        self.lits.len()
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
    pub fn get(&self, at: usize) -> &[BitLit] {
        let start = if at == 0 { 0 } else { self.ends[at - 1] as usize };
        &self.lits[start..self.ends[at] as usize]
    }

    /// All clauses in order.
    pub fn iter(&self) -> impl ExactSizeIterator<Item = &[BitLit]> {
        (0..self.len()).map(|at| self.get(at))
    }
}

impl std::fmt::Debug for Clauses {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        f.debug_list().entries(self.iter()).finish()
    }
}
