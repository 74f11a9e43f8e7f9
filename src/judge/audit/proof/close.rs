//! Closing the miter: which claims are made, in which order.
//!
//! First what must never hold. Then, with what both sides have as facts, conjuncts of the two sides that look equal are
//! proven equal, and those without a partner from all conjuncts of the other side: by decision diagrams where they are
//! about the same bits (`groups`), by linear algebra where they are parities (`parities`), else on windows. All that with
//! little effort first; what stays open is tried again with more, after a sweep. The last resort is the whole miter at once.

use rustc_hash::{FxHashMap, FxHashSet};

use super::graph::Signal;
use super::groups;
use super::miter::Sides;
use super::parities;
use super::prover::{Effort, Prover, Shown};
use super::simulate::Patterns;
use super::sweep::sweep;
use crate::problem::Bits;
use crate::sat::Lit;
use crate::sat::drat::Proof;

/// The first try.
const LITTLE: Effort = Effort { steps: 4_000, nodes: 3_000, rounds: 24 };
/// Inside a sweep.
const SWEEP: Effort = Effort { steps: 2_000, nodes: 3_000, rounds: 8 };
/// After it.
const MUCH: Effort = Effort { steps: 400_000, nodes: 100_000, rounds: 200 };

/// How many goals may stay open before the rest waits for stronger means.
const PATIENCE: usize = 24;
/// Steps of diagrams for a group of conjuncts, at first.
const FEW_STEPS: usize = 1 << 16;
/// For those that this is not enough for.
const MANY_STEPS: usize = 1 << 20;
/// For all of them together: some seconds.
const ALL_STEPS: usize = 1 << 22;

/// What came of it.
pub(super) enum Found {
    /// The miter is refuted.
    Closed,
    /// It has a model: an input on which the circuit is wrong.
    Input(Bits),
    /// So many claims are open.
    Open(usize),
}

/// Something to show.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Goal {
    /// This never holds.
    Never(Signal),
    /// This conjunct of the other side holds where all of this side (the problem's is `true`) do.
    Follows(bool, Signal),
}

/// Closes a miter.
pub(super) struct Closing<'a, 'p> {
    prover: Prover<'a>,
    sides: Sides,
    patterns: &'p mut Patterns,
    /// Conjuncts, of the problem or of the circuit, that were shown to follow from the other side.
    done: FxHashSet<(bool, Signal)>,
}

impl<'a, 'p> Closing<'a, 'p> {
    /// A miter with nothing shown.
    pub(super) fn new(prover: Prover<'a>, sides: Sides, patterns: &'p mut Patterns) -> Self {
        Self { prover, sides, patterns, done: FxHashSet::default() }
    }

    /// The proof, and how many signals were proven equal.
    pub(super) fn finish(self) -> (Proof, usize) {
        let equivalences = self.prover.equivalences();
        (self.prover.proof, equivalences)
    }

    /// Shows everything.
    pub(super) fn close(&mut self) -> Found {
        let zeros = self.sides.zeros.iter().map(|&zero| Goal::Never(zero)).collect();
        match self.show(zeros) {
            Found::Closed => {}
            Found::Open(_) => return self.last_resort(),
            input => return input,
        }
        let differ = self.prover.miter.differ;
        self.prover.proof.add([differ]);
        if self.sides.problem.is_empty() && self.sides.circuit.is_empty() {
            return self.conclude();
        }
        let common = std::mem::take(&mut self.sides.common);
        common.into_iter().for_each(|signal| self.prover.fact(signal));
        self.pair(LITTLE);
        self.state_sides();
        groups::follow(&mut self.prover, &self.sides, &mut self.done, FEW_STEPS, usize::MAX);
        parities::follow(&mut self.prover, &self.sides, &mut self.done, ALL_STEPS);
        match self.show(self.implications()) {
            Found::Closed => self.conclude(),
            Found::Open(_) => self.last_resort(),
            input => input,
        }
    }

    fn implications(&self) -> Vec<Goal> {
        let theirs = self.sides.circuit.iter().map(|&signal| Goal::Follows(true, signal));
        let ours = self.sides.problem.iter().map(|&signal| Goal::Follows(false, signal));
        theirs.chain(ours).filter(|goal| !self.is_done(*goal)).collect()
    }

    fn is_done(&self, goal: Goal) -> bool {
        matches!(goal, Goal::Follows(side, signal) if self.done.contains(&(!side, signal)))
    }

    fn state_sides(&mut self) {
        self.prover.set_sides(self.sides.problem.clone(), self.sides.circuit.clone());
    }

    /// Shows goals: with little effort, then with more after a sweep.
    fn show(&mut self, mut goals: Vec<Goal>) -> Found {
        if let Some(input) = self.try_goals(&mut goals, LITTLE, PATIENCE) {
            return Found::Input(input);
        }
        if let Some(Goal::Follows(..)) = goals.first() {
            groups::follow(&mut self.prover, &self.sides, &mut self.done, MANY_STEPS, ALL_STEPS);
            goals.retain(|goal| !self.is_done(*goal));
        }
        if goals.is_empty() {
            return Found::Closed;
        }
        let roots: Vec<Signal> = match goals[0] {
            Goal::Never(_) => goals.iter().map(|goal| goal.signal()).collect(),
            Goal::Follows(..) => self.sides.problem.iter().chain(&self.sides.circuit).copied().collect(),
        };
        sweep(&mut self.prover, self.patterns, &roots, SWEEP);
        if let Goal::Follows(..) = goals[0] {
            self.pair(MUCH);
            self.state_sides();
            goals = self.implications();
        }
        if let Some(input) = self.try_goals(&mut goals, MUCH, usize::MAX) {
            return Found::Input(input);
        }
        if goals.is_empty() { Found::Closed } else { Found::Open(goals.len()) }
    }

    /// Tries goals and keeps those that stay open, without a try once so many have stayed open; an input if one was
    /// refuted.
    fn try_goals(&mut self, goals: &mut Vec<Goal>, effort: Effort, patience: usize) -> Option<Bits> {
        let mut open = Vec::new();
        for goal in goals.drain(..) {
            if open.len() >= patience {
                open.push(goal);
                continue;
            }
            let shown = match goal {
                Goal::Never(signal) => self.prover.claim(&[signal], None, effort),
                Goal::Follows(side, signal) => self.prover.claim(&[!signal], Some(side), effort),
            };
            match shown {
                Shown::Proven => {}
                Shown::Refuted(input) => return Some(input),
                Shown::Open => open.push(goal),
            }
        }
        *goals = open;
        None
    }

    /// Proves conjuncts of the two sides equal that look equal, and makes them facts.
    fn pair(&mut self, effort: Effort) {
        let mut partners: FxHashMap<(Vec<u64>, bool), Vec<Signal>> = FxHashMap::default();
        for &signal in &self.sides.problem {
            let key = self.patterns.signature(self.prover.equal(signal));
            partners.entry(key).or_default().push(signal);
        }
        let (mut ours, mut theirs) = (Vec::new(), Vec::new());
        for &signal in &self.sides.circuit {
            let key = self.patterns.signature(self.prover.equal(signal));
            let Some(candidates) = partners.get(&key) else { continue };
            let found = candidates.iter().copied().find(|&partner| {
                let (late, early) = if signal.node() > partner.node() { (signal, partner) } else { (partner, signal) };
                self.prover.equate(late, early, effort) == Shown::Proven
            });
            if let Some(partner) = found {
                // The difference needs one of the two on each side, so both hold.
                self.prover.fact(partner);
                self.prover.fact(signal);
                ours.push(partner);
                theirs.push(signal);
            }
        }
        self.sides.problem.retain(|signal| !ours.contains(signal));
        self.sides.circuit.retain(|signal| !theirs.contains(signal));
    }

    /// The last steps, which follow by propagation.
    fn conclude(&mut self) -> Found {
        let problem = self.prover.miter.problem;
        self.prover.proof.add([!problem]);
        self.prover.proof.add(std::iter::empty::<Lit>());
        Found::Closed
    }

    fn last_resort(&mut self) -> Found {
        match self.prover.whole() {
            Shown::Proven => Found::Closed,
            Shown::Refuted(input) => Found::Input(input),
            Shown::Open => Found::Open(1),
        }
    }
}

impl Goal {
    fn signal(self) -> Signal {
        match self {
            Goal::Never(signal) | Goal::Follows(_, signal) => signal,
        }
    }
}
