//! Variables that an equation determines.
//!
//! Input: a problem and the steps that its clauses led to. Output: more computed bits: where a constraint is an equation of
//! whole numbers with a variable in one place, the variable is what the rest of the equation leaves for it, digit by digit;
//! where it is a parity with a yes/no variable in one place, that is the parity of the rest. Only the shape of the
//! constraint is looked at. After: every solution has the values that the formulas give, because the equation says so; and
//! [`settled`] says what is left of such an equation for the oracle to check: that the rest lies within reach of the
//! variable's bits.
//!
//! A variable that is added with a coefficient of odd part *q* has the digits of the rest divided by *q*, which modulo a power
//! of two is a product with the inverse; so the last of the bits that are counted is a parity of the others.

mod form;
mod solve;

use std::cmp::Reverse;

use rustc_hash::FxHashMap;

use crate::id::Id;
use crate::places::{Computed, Digit, Formula, Places};
use crate::problem::{BitId, Expr, ExprId, Problem, VarId};

use form::Equation;
use solve::Solved;

/// Steps that looking for circles may take, each one bit of a formula.
const MAX_STEPS: usize = 1 << 22;

/// What of an equation is left to check, once its variable is computed from it.
#[derive(Clone, PartialEq, Eq, Debug)]
pub enum Settled {
    /// Nothing: it holds by construction.
    Always,
    /// The number is at least 0 and below `2^width`.
    Within {
        /// The number; its digits are the variable's bits.
        number: Digit,
        /// How many bits the variable has.
        width: usize,
    },
}

/// The equations of a problem that places solve for a variable, each with what is left of it.
pub fn settled(problem: &Problem, places: &Places) -> Vec<(ExprId, Settled)> {
    let formulas: FxHashMap<u32, &Formula> = places.computed.iter().map(|of| (of.bit, &of.formula)).collect();
    if formulas.is_empty() {
        return Vec::new();
    }
    let is_there = |solved: &Solved| solved.bits.iter().all(|(bit, formula)| formulas.get(bit) == Some(&formula));
    let found = equations(problem).filter_map(|(id, equation)| {
        let first = |var: &VarId| problem.vars()[*var].first_bit.index() as u32;
        let vars = equation.variables(problem).into_iter().filter(|var| formulas.contains_key(&first(var)));
        let mut solved = vars.filter_map(|var| solve::solve(problem, &equation, var)).filter(is_there);
        solved.find_map(|solved| solved.settled).map(|settled| (id, settled))
    });
    found.collect()
}

/// Moves bits from what is searched to what is computed. The lists are those of places that passed their check.
pub(super) fn solve_equations(problem: &Problem, places: &mut Places) {
    let mut solver = Solver::new(problem, places);
    let found: Vec<(ExprId, Equation)> = equations(problem).collect();
    let mut uses: FxHashMap<VarId, usize> = FxHashMap::default();
    let vars_of: Vec<Vec<VarId>> = found.iter().map(|(_, equation)| equation.variables(problem)).collect();
    vars_of.iter().flatten().for_each(|&var| *uses.entry(var).or_default() += 1);
    for ((_, equation), mut vars) in found.iter().zip(vars_of) {
        // The variable of most bits; of equals the one in the fewest equations, which is least likely to close a circle.
        vars.sort_by_key(|&var| (Reverse(problem.vars()[var].width), uses[&var], Reverse(var)));
        for var in vars {
            if solver.steps > MAX_STEPS {
                break;
            }
            if solver.is_free(var)
                && let Some(solved) = solve::solve(problem, equation, var)
                && solver.follows(&solved)
            {
                solver.take(solved);
                break;
            }
        }
    }
    solver.finish(places);
}

/// The constraints that are equations, also under *all of*.
fn equations(problem: &Problem) -> impl Iterator<Item = (ExprId, Equation)> {
    let mut open: Vec<ExprId> = problem.constraints.iter().rev().map(|constraint| constraint.expr).collect();
    std::iter::from_fn(move || {
        while let Some(id) = open.pop() {
            match problem.exprs.get(id) {
                Expr::All(list) => open.extend(problem.exprs.items(list).iter().rev()),
                _ => {
                    if let Some(equation) = form::equation(problem, id) {
                        return Some((id, equation));
                    }
                }
            }
        }
        None
    })
}

/// The formulas so far, and what is searched.
struct Solver<'a> {
    problem: &'a Problem,
    formulas: FxHashMap<u32, Formula>,
    /// In the order in which formulas were found.
    order: Vec<u32>,
    is_new: bool,
    steps: usize,
}

impl<'a> Solver<'a> {
    fn new(problem: &'a Problem, places: &Places) -> Self {
        let formulas = places.computed.iter().map(|of| (of.bit, of.formula.clone())).collect();
        let order = places.computed.iter().map(|of| of.bit).collect();
        Self { problem, formulas, order, is_new: false, steps: 0 }
    }

    fn is_free(&self, var: VarId) -> bool {
        let var = &self.problem.vars()[var];
        let first = var.first_bit.index() as u32;
        (first..first + u32::from(var.width)).all(|bit| !self.formulas.contains_key(&bit))
    }

    /// Whether nothing that the formulas need is computed from their own bits.
    fn follows(&mut self, solved: &Solved) -> bool {
        let mut seen: rustc_hash::FxHashSet<u32> = rustc_hash::FxHashSet::default();
        let mut open: Vec<u32> = Vec::new();
        let mut need = |of: &Formula, open: &mut Vec<u32>| {
            of.for_each_bit(&mut |bit| {
                self.steps += 1;
                if seen.insert(bit.index() as u32) {
                    open.push(bit.index() as u32);
                }
            });
        };
        solved.bits.iter().for_each(|(_, formula)| need(formula, &mut open));
        while let Some(bit) = open.pop() {
            if solved.bits.iter().any(|&(own, _)| own == bit) {
                return false;
            }
            if let Some(formula) = self.formulas.get(&bit) {
                need(formula, &mut open);
            }
        }
        true
    }

    fn take(&mut self, solved: Solved) {
        self.is_new = true;
        for (bit, formula) in solved.bits {
            self.order.push(bit);
            self.formulas.insert(bit, formula);
        }
    }

    /// Writes the formulas in an order in which each follows what it needs, and what is left to search.
    fn finish(mut self, places: &mut Places) {
        if !self.is_new {
            return;
        }
        places.searched.retain(|bit| !self.formulas.contains_key(&(bit.index() as u32)));
        places.computed.clear();
        for &bit in &self.order {
            // Depth first; a formula is taken out where it is met first.
            let mut open = vec![(bit, false)];
            while let Some((bit, is_ready)) = open.pop() {
                if is_ready {
                    if let Some(formula) = self.formulas.remove(&bit) {
                        places.computed.push(Computed { bit, formula });
                    }
                } else if let Some(formula) = self.formulas.get(&bit) {
                    open.push((bit, true));
                    formula.for_each_bit(&mut |of: BitId| open.push((of.index() as u32, false)));
                }
            }
        }
    }
}
