//! What all runs of a narrowing share: the clauses, the parities, and which bits may be computed how.

use crate::id::Id;
use crate::problem::{BitId, Problem};
use crate::structure::linear::{Row, reduce};
use crate::structure::{Fact, Tidy, parities};

/// The ground on which bits become known.
pub(super) struct Ground {
    /// The clauses.
    pub(super) tidy: Tidy,
    /// Parities that follow from the clauses: those that were read, then those that elimination adds.
    pub(super) rows: Vec<Row>,
    /// The rows of each bit.
    rows_of: Vec<Vec<u32>>,
    /// Bits of which any value will do that keeps a solution a solution.
    may_witness: Vec<bool>,
    /// Bits that a solution is projected on.
    shown: Vec<bool>,
    /// Bits that only expressions speak of, or expressions too.
    in_expressions: Vec<bool>,
}

impl Ground {
    pub(super) fn new(problem: &Problem, one_for_many: bool) -> Self {
        let bits = problem.bit_count();
        let mut shown = vec![problem.shown.is_none(); bits];
        problem.shown.iter().flatten().for_each(|bit| shown[bit.index()] = true);
        let in_expressions = in_expressions(problem);
        let may_witness = (0..bits).map(|bit| (one_for_many || !shown[bit]) && !in_expressions[bit]).collect();
        let tidy = Tidy::new(&problem.clauses, bits);
        let rows = read_parities(&tidy).into_iter().map(|(row, _)| row).collect();
        let mut ground = Self { tidy, rows, rows_of: Vec::new(), may_witness, shown, in_expressions };
        let order = ground.index_order();
        let mut rank = vec![0; bits];
        order.iter().enumerate().for_each(|(at, &bit)| rank[bit as usize] = at as u32);
        let known: rustc_hash::FxHashSet<Row> = ground.rows.iter().cloned().collect();
        ground.rows.extend(reduce(&ground.rows, &rank).into_iter().filter(|row| !known.contains(row)));
        ground.rows_of = vec![Vec::new(); bits];
        for (at, row) in ground.rows.iter().enumerate() {
            row.bits.iter().for_each(|bit| ground.rows_of[bit.index()].push(at as u32));
        }
        ground
    }

    pub(super) fn bit_count(&self) -> usize {
        self.shown.len()
    }

    pub(super) fn rows_of(&self, bit: u32) -> &[u32] {
        &self.rows_of[bit as usize]
    }

    /// Whether the bit need not have the only possible value.
    pub(super) fn may_witness(&self, bit: u32) -> bool {
        self.may_witness[bit as usize]
    }

    pub(super) fn is_shown(&self, bit: u32) -> bool {
        self.shown[bit as usize]
    }

    /// Whether any bit may have another value than the only possible one.
    pub(super) fn has_witnesses(&self) -> bool {
        self.may_witness.contains(&true)
    }

    /// Guesses are made where they cost least: bits of expressions, which are searched in any case unless clauses
    /// determine them, then shown bits, then hidden ones, each by index.
    pub(super) fn index_order(&self) -> Vec<u32> {
        let mut order: Vec<u32> = (0..self.bit_count() as u32).collect();
        order.sort_by_key(|&bit| self.class(bit));
        order
    }

    /// Bits of a lower class are guessed first.
    pub(super) fn class(&self, bit: u32) -> u8 {
        match (self.in_expressions[bit as usize], self.shown[bit as usize]) {
            (true, _) => 0,
            (false, true) => 1,
            (false, false) => 2,
        }
    }
}

/// The parities that clauses spell, with the places of these clauses in the problem.
pub(super) fn read_parities(tidy: &Tidy) -> Vec<(Row, Vec<u32>)> {
    let as_row = |finding: crate::structure::Finding| match finding.fact {
        Fact::Parity { bits, odd } => Some((Row { bits, odd }, finding.clauses)),
        _ => None,
    };
    parities(tidy).into_iter().filter_map(as_row).collect()
}

/// The bits of variables that stand in a constraint that is an expression, or whose codes do not fill their bits.
fn in_expressions(problem: &Problem) -> Vec<bool> {
    let mut used = vec![false; problem.exprs.len()];
    problem.constraints.iter().for_each(|constraint| used[constraint.expr.index()] = true);
    let exprs: Vec<_> = problem.exprs.iter().collect();
    let mut bits = vec![false; problem.bit_count()];
    let mut mark = |var: crate::problem::VarId| {
        let var = &problem.vars()[var];
        let first = var.first_bit.index();
        (first..first + usize::from(var.width)).for_each(|bit| bits[bit] = true);
    };
    for &(id, &expr) in exprs.iter().rev() {
        if used[id.index()] {
            problem.exprs.operands(expr).iter().for_each(|operand| used[operand.index()] = true);
            if let crate::problem::Expr::Var(var) = expr {
                mark(var);
            }
        }
    }
    for (id, var) in problem.vars().iter() {
        if i128::from(problem.size(var.domain)) + 1 < 1i128 << var.width {
            mark(id);
        }
    }
    bits
}

/// A bit by its number.
pub(super) fn bit(number: u32) -> BitId {
    BitId::new(number as usize)
}
