//! From a problem to its network: domains first, then the constraints, then the clauses, then the root.

use super::builder::Builder;
use super::expr::Values;
use super::linear::{Linear, Range};
use super::{Conjunct, Lit, Network, NodeId, Places};
use crate::id::{ConstraintId, Id};
use crate::make::start::Guaranteed;
use crate::problem::Problem;

/// The network of a problem over its searched bits. The problem passed [`check`](crate::problem::check::check), and the
/// places are about it ([`Places::check`]).
pub fn build(problem: &Problem, places: &Places) -> Network {
    let mut builder = Builder::new(&places.searched);
    let mut bits = vec![Lit::NO; problem.bit_count()];
    for (at, bit) in places.searched.iter().enumerate() {
        bits[bit.index()] = Lit::new(NodeId::new(at + 1), false);
    }
    let mut conjuncts = Conjuncts::default();
    let guaranteed = Guaranteed::of(problem, places);
    domains(&mut builder, problem, &bits, &guaranteed, &mut conjuncts);
    let mut values = Values::new(problem, &bits);
    for (at, constraint) in problem.constraints.iter().enumerate() {
        if guaranteed.constraint(constraint.expr) {
            continue;
        }
        for lit in values.conjuncts(&mut builder, constraint.expr) {
            conjuncts.add(lit, Some(ConstraintId::new(at)));
        }
    }
    clauses(&mut builder, problem, &bits, &guaranteed, &mut conjuncts);
    let root = if conjuncts.contradictory { Lit::NO } else { builder.all(&conjuncts.lits()) };
    builder.finish(places.searched.clone(), conjuncts.list, root)
}

/// The conjuncts found so far, each literal once.
#[derive(Default)]
struct Conjuncts {
    list: Vec<Conjunct>,
    seen: rustc_hash::FxHashSet<Lit>,
    contradictory: bool,
}

impl Conjuncts {
    fn add(&mut self, lit: Lit, constraint: Option<ConstraintId>) {
        if lit == Lit::YES || !self.seen.insert(lit) {
            return;
        }
        self.contradictory |= lit == Lit::NO || self.seen.contains(&!lit);
        self.list.push(Conjunct { lit, constraint });
    }

    fn lits(&self) -> Vec<Lit> {
        self.list.iter().map(|conjunct| conjunct.lit).collect()
    }
}

/// "The code lies in the domain", for domains whose size is not a power of two.
fn domains(
    builder: &mut Builder,
    problem: &Problem,
    bits: &[Lit],
    guaranteed: &Guaranteed<'_>,
    conjuncts: &mut Conjuncts,
) {
    for (_, var) in problem.vars().iter().filter(|&(id, _)| !guaranteed.domain(id)) {
        let last = i128::from(problem.size(var.domain));
        let largest = (1i128 << var.width) - 1;
        if last < largest {
            let first = var.first_bit.index();
            let code = Linear::binary(0, &bits[first..first + usize::from(var.width)], Range::new(0, largest));
            let outside = builder.at_least(&code, last + 1);
            conjuncts.add(!outside, None);
        }
    }
}

/// A clause of k literals is k - 1 ANDs: it fails where all of them fail.
fn clauses(
    builder: &mut Builder,
    problem: &Problem,
    bits: &[Lit],
    guaranteed: &Guaranteed<'_>,
    conjuncts: &mut Conjuncts,
) {
    let mut failing: Vec<Lit> = Vec::new();
    for (at, clause) in problem.clauses.iter().enumerate().filter(|(_, clause)| !guaranteed.clause(clause)) {
        failing.clear();
        failing.extend(clause.iter().map(|lit| !bits[lit.bit().index()].complement_if(lit.is_negated())));
        failing.sort_unstable();
        failing.dedup();
        // The two literals of a bit are neighbours now; a clause with both always holds.
        if failing.windows(2).any(|pair| pair[0] == !pair[1]) {
            continue;
        }
        let fails = builder.all(&failing);
        conjuncts.add(!fails, Some(ConstraintId::new(problem.constraints.len() + at)));
    }
}
