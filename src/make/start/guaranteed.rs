//! What a start state already guarantees, so that the oracle leaves it out.
//!
//! A string of the start meets every part of it; a requirement that every such string meets need not be checked. Clauses
//! and comparisons of counts are looked at part by part, which is enough for what the parts were made from.

use super::groups::counted;
use crate::id::Id;
use crate::places::{Part, Places};
use crate::problem::{BitId, BitLit, Compare, Expr, ExprId, Problem, VarId};

/// What the start of some places guarantees.
#[derive(Debug)]
pub struct Guaranteed<'a> {
    problem: &'a Problem,
    parts: &'a [Part],
    /// For each bit of the problem, the part it is in.
    part_of: Vec<Option<usize>>,
    searched: &'a [BitId],
}

impl<'a> Guaranteed<'a> {
    /// What these places guarantee; they passed [`Places::check`].
    pub fn of(problem: &'a Problem, places: &'a Places) -> Self {
        let mut part_of = vec![None; problem.bit_count()];
        for (at, part) in places.start.parts().iter().enumerate() {
            for &qubit in part.qubits() {
                part_of[places.searched[qubit as usize].index()] = Some(at);
            }
        }
        Self { problem, parts: places.start.parts(), part_of, searched: &places.searched }
    }

    /// Whether the code of a variable always lies in its domain.
    pub fn domain(&self, var: VarId) -> bool {
        let var = &self.problem.vars()[var];
        let bits = (var.first_bit.index()..).take(usize::from(var.width)).map(BitId::new);
        self.parts.iter().any(|part| match part {
            Part::Below { qubits, size } => {
                let same = qubits.iter().map(|&qubit| self.searched[qubit as usize]).eq(bits.clone());
                same && *size <= self.problem.size(var.domain).saturating_add(1)
            }
            Part::Weight { .. } => false,
        })
    }

    /// Whether a clause always holds: it fails only where its positive literals are 0 and its negative ones 1.
    pub fn clause(&self, clause: &[BitLit]) -> bool {
        self.parts.iter().enumerate().any(|(at, part)| {
            let Part::Weight { qubits, ones } = part else { return false };
            let mut inside: Vec<BitLit> = clause.iter().copied().filter(|lit| self.is_in(lit.bit(), at)).collect();
            inside.sort_unstable();
            inside.dedup();
            let ones_wanted = inside.iter().filter(|lit| lit.is_negated()).count();
            let zeros_wanted = inside.len() - ones_wanted;
            ones_wanted > *ones as usize || zeros_wanted > qubits.len() - *ones as usize
        })
    }

    /// Whether a constraint always holds: a comparison of a count of bits of one group with a constant.
    pub fn constraint(&self, expr: ExprId) -> bool {
        let Expr::Compare(compare, a, b) = self.problem.exprs.get(expr) else { return false };
        let constant = |id: ExprId| match self.problem.exprs.get(id) {
            Expr::Number(number) => Some((number, number)),
            _ => None,
        };
        let ends = |id: ExprId| constant(id).or_else(|| self.count(id));
        let (Some((a_low, a_high)), Some((b_low, b_high))) = (ends(a), ends(b)) else { return false };
        match compare {
            Compare::Eq => a_low == a_high && b_low == b_high && a_low == b_low,
            Compare::Ne => a_high < b_low || b_high < a_low,
            Compare::Lt => a_high < b_low,
            Compare::Le => a_high <= b_low,
        }
    }

    /// The least and the largest that a count of bits of one group can be.
    fn count(&self, id: ExprId) -> Option<(i64, i64)> {
        let bits = counted(self.problem, id)?;
        let part = self.part_of[bits[0].index()]?;
        let Part::Weight { qubits, ones } = &self.parts[part] else { return None };
        let all_inside = bits.iter().all(|&bit| self.is_in(bit, part));
        let (ones, zeros) = (i64::from(*ones), qubits.len() as i64 - i64::from(*ones));
        let len = bits.len() as i64;
        all_inside.then(|| ((len - zeros).max(0), ones.min(len)))
    }

    fn is_in(&self, bit: BitId, part: usize) -> bool {
        self.part_of[bit.index()] == Some(part)
    }
}
