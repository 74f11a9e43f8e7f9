//! From a problem to its network: domains first, then the constraints, then the clauses, then the root.

use super::builder::Builder;
use super::expr::Values;
use super::linear::{self, Linear, Range};
use super::{Conjunct, Lit, Network, NodeId, Places};
use crate::id::{ConstraintId, Id, IdVec};
use crate::make::narrow::{Settled, held, settled};
use crate::make::start::Guaranteed;
use crate::places::{Digit, Formula};
use crate::problem::{BitId, ExprId, Problem};
use rustc_hash::FxHashMap;

/// The network of a problem over its searched bits; computed bits are nodes, and clauses that hold by construction are left
/// out. The problem passed [`check`](crate::problem::check::check), and the
/// places are about it ([`Places::check`]).
pub fn build(problem: &Problem, places: &Places) -> Network {
    // A clause of k literals is k - 1 nodes and one that joins it to the others.
    let mut builder = Builder::with_capacity(&places.searched, problem.clauses.iter().map(<[_]>::len).sum());
    let mut bits = vec![Lit::NO; problem.bit_count()];
    for (at, bit) in places.searched.iter().enumerate() {
        bits[bit.index()] = Lit::new(NodeId::new(at + 1), false);
    }
    for computed in &places.computed {
        bits[computed.bit as usize] = formula(&mut builder, &computed.formula, &bits);
    }
    let mut conjuncts = Conjuncts::default();
    let guaranteed = Guaranteed::of(problem, places);
    domains(&mut builder, problem, &bits, &guaranteed, &mut conjuncts);
    let solved: FxHashMap<ExprId, Lit> = settled(problem, places)
        .into_iter()
        .map(|(id, settled)| match settled {
            Settled::Always => (id, Lit::YES),
            Settled::Within { number, width } => (id, within(&mut builder, &number, width, &bits)),
        })
        .collect();
    let mut values = Values::new(problem, &bits, solved);
    for (at, constraint) in problem.constraints.iter().enumerate() {
        if guaranteed.constraint(constraint.expr) {
            continue;
        }
        for lit in values.conjuncts(&mut builder, constraint.expr) {
            conjuncts.add(lit, Some(ConstraintId::new(at)));
        }
    }
    clauses(&mut builder, problem, &bits, &held(problem, places), &guaranteed, &mut conjuncts);
    conjuncts.finish(builder, places.searched.clone())
}

/// The conjuncts found so far, each literal once.
#[derive(Default)]
pub(super) struct Conjuncts {
    list: Vec<Conjunct>,
    seen: rustc_hash::FxHashSet<Lit>,
    contradictory: bool,
}

impl Conjuncts {
    /// Adds what must hold too.
    pub(super) fn add(&mut self, lit: Lit, constraint: Option<ConstraintId>) {
        if lit == Lit::YES || !self.seen.insert(lit) {
            return;
        }
        self.contradictory |= lit == Lit::NO || self.seen.contains(&!lit);
        self.list.push(Conjunct { lit, constraint });
    }

    /// The network whose root is their conjunction, a balanced tree.
    fn finish(self, builder: Builder, searched: Vec<BitId>) -> Network {
        self.finish_by(builder, searched, |builder, lits| builder.all(&lits)).0
    }

    /// The same with the tree that `all` makes, and where each node of the builder went.
    pub(super) fn finish_by(
        self,
        mut builder: Builder,
        searched: Vec<BitId>,
        all: impl FnOnce(&mut Builder, Vec<Lit>) -> Lit,
    ) -> (Network, IdVec<NodeId, Option<Lit>>) {
        let lits: Vec<Lit> = self.list.iter().map(|conjunct| conjunct.lit).collect();
        let root = if self.contradictory { Lit::NO } else { all(&mut builder, lits) };
        builder.finish(searched, self.list, root)
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
    held: &[bool],
    guaranteed: &Guaranteed<'_>,
    conjuncts: &mut Conjuncts,
) {
    let mut failing: Vec<Lit> = Vec::new();
    for (at, clause) in problem.clauses.iter().enumerate() {
        if held[at] || guaranteed.clause(clause) {
            continue;
        }
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

/// A computed bit as a node.
fn formula(builder: &mut Builder, of: &Formula, bits: &[Lit]) -> Lit {
    let parts = |list: &[Formula], builder: &mut Builder| -> Vec<Lit> {
        let mut lits: Vec<Lit> = list.iter().map(|part| formula(builder, part, bits)).collect();
        // Equal conjunctions of many parts become one node where they are built in one order.
        lits.sort_unstable();
        lits
    };
    match of {
        Formula::Constant(value) => Lit::constant(*value),
        Formula::Bit(bit) => bits[bit.index()],
        Formula::Not(inner) => !formula(builder, inner, bits),
        Formula::And(list) => {
            let lits = parts(list, builder);
            builder.all(&lits)
        }
        Formula::Or(list) => {
            let lits: Vec<Lit> = parts(list, builder).into_iter().map(|lit| !lit).collect();
            !builder.all(&lits)
        }
        Formula::Xor(list) => {
            let lits = parts(list, builder);
            builder.odd(&lits)
        }
        Formula::Digit(digit) => {
            let at = usize::from(digit.at);
            let number = number(builder, digit, bits);
            builder.digits(&number, 0, at + 1).digits[at]
        }
    }
}

/// A number of which digits are computed. Its range is what its terms can reach, whatever they are for.
fn number(builder: &mut Builder, of: &Digit, bits: &[Lit]) -> Linear {
    let terms: Vec<(Lit, i128)> =
        of.terms.iter().map(|(weight, term)| (formula(builder, term, bits), i128::from(*weight))).collect();
    let parts = terms.iter().map(|&(_, weight)| weight);
    let reach = parts.fold(Range::new(of.constant.into(), of.constant.into()), |range, weight| Range {
        lo: range.lo + weight.min(0),
        hi: range.hi + weight.max(0),
    });
    Linear::of(of.constant.into(), terms, reach)
}

/// Whether a number lies from 0 to `2^width - 1`: by its digits above, which are those of [`formula`], node for node, or by
/// comparing it with both ends.
fn within(builder: &mut Builder, of: &Digit, width: usize, bits: &[Lit]) -> Lit {
    let number = number(builder, of, bits);
    let range = number.range();
    if range.lo >= 0 && range.hi >> width == 0 {
        return Lit::YES;
    }
    let digits_of = |number: i128| linear::width(number.max(0) as u128);
    let size = digits_of(range.hi).max(digits_of(-(range.lo + 1))).max(width);
    let count = size + usize::from(range.lo < 0);
    let digits = |b: &mut Builder| {
        let above: Vec<Lit> = b.digits(&number, 0, count).digits[width..].iter().map(|&digit| !digit).collect();
        b.all(&above)
    };
    let ends = |b: &mut Builder| {
        let (low, high) = (b.at_least(&number, 0), b.at_least(&number, 1 << width));
        b.and(low, !high)
    };
    builder.cheapest(&[&digits, &ends])
}
