//! What becomes known from what is guessed.
//!
//! A bit that is guessed is searched; every bit that is then determined becomes known too, and so on, until a guess is needed
//! again. What can become known grows with what is known, so the set of guesses alone decides how far it goes.
//!
//! For each clause the number of its unknown bits is kept, and their exclusive or, which is the last one when one is left;
//! for each literal the number of its clauses with an unknown bit besides its own. So a run takes time linear in the size of
//! the clauses, the tests for uniqueness aside.

use super::ground::{Ground, bit};
use super::unique::{self, Depth};
use crate::id::Id;
use crate::problem::BitLit;

/// How a bit became known.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum How {
    /// It is searched.
    Searched,
    /// It is the parity of the others in this row.
    Row(u32),
    /// Its clauses over known bits leave no choice, those alone with sure bits if the step is sure.
    Forced,
    /// All clauses with the negation (`true`: the bit is the conjunction of their rests), or all with the bit, are over
    /// known bits.
    OneSided(bool),
}

/// A bit that became known.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) struct Step {
    pub(super) bit: u32,
    pub(super) how: How,
    /// Whether every solution over the same searched bits has the value that is computed.
    pub(super) is_sure: bool,
}

/// Which test comes first for a bit that need not be unique.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Pace {
    /// The one-sided rule, which costs nothing.
    Fast,
    /// Uniqueness, by all clauses in a window.
    Thorough,
}

/// A run.
#[derive(Clone)]
pub(super) struct Closure<'a> {
    ground: &'a Ground,
    pace: Pace,
    known: Vec<bool>,
    sure: Vec<bool>,
    /// For each clause, how many of its bits are unknown, and their exclusive or.
    open: Vec<u32>,
    left: Vec<u32>,
    /// For each literal, how many of its clauses have another unknown bit.
    blocked: Vec<u32>,
    row_open: Vec<u32>,
    row_left: Vec<u32>,
    queue: std::collections::VecDeque<u32>,
    pub(super) steps: Vec<Step>,
    /// Literals looked at.
    pub(super) work: u64,
}

impl<'a> Closure<'a> {
    /// Nothing is known but what needs no guess.
    pub(super) fn new(ground: &'a Ground, pace: Pace) -> Self {
        let tidy = &ground.tidy;
        let bits = ground.bit_count();
        let mut closure = Self {
            ground,
            pace,
            known: vec![false; bits],
            sure: vec![false; bits],
            open: (0..tidy.len()).map(|at| tidy.get(at).len() as u32).collect(),
            left: (0..tidy.len())
                .map(|at| tidy.get(at).iter().fold(0, |sum, lit| sum ^ lit.bit().index() as u32))
                .collect(),
            blocked: vec![0; 2 * bits],
            row_open: ground.rows.iter().map(|row| row.bits.len() as u32).collect(),
            row_left: ground
                .rows
                .iter()
                .map(|row| row.bits.iter().fold(0, |sum, bit| sum ^ bit.index() as u32))
                .collect(),
            queue: (0..bits as u32).collect(),
            steps: Vec::with_capacity(bits),
            work: tidy.lit_count() as u64 + bits as u64,
        };
        for at in (0..tidy.len()).filter(|&at| tidy.get(at).len() > 1) {
            tidy.get(at).iter().for_each(|lit| closure.blocked[lit.index()] += 1);
        }
        closure.propagate();
        closure
    }

    pub(super) fn is_known(&self, bit: u32) -> bool {
        self.known[bit as usize]
    }

    pub(super) fn is_complete(&self) -> bool {
        self.steps.len() == self.known.len()
    }

    /// The clauses of a literal that have an unknown bit besides its own.
    pub(super) fn open(&self, clause: u32) -> u32 {
        self.open[clause as usize]
    }

    pub(super) fn row_open(&self, row: u32) -> u32 {
        self.row_open[row as usize]
    }

    /// Searches a bit, and takes what follows.
    pub(super) fn guess(&mut self, bit: u32) {
        self.learn(Step { bit, how: How::Searched, is_sure: true });
        self.propagate();
    }

    fn propagate(&mut self) {
        while let Some(bit) = self.queue.pop_front() {
            if !self.known[bit as usize]
                && let Some((how, is_sure)) = self.rule(bit)
            {
                self.learn(Step { bit, how, is_sure });
            }
        }
    }

    fn learn(&mut self, step: Step) {
        let ground = self.ground;
        let own = step.bit;
        self.known[own as usize] = true;
        self.sure[own as usize] = step.is_sure;
        self.steps.push(step);
        for value in [true, false] {
            for &clause in ground.tidy.with(BitLit::new(bit(own), value)) {
                let at = clause as usize;
                self.work += 1;
                self.open[at] -= 1;
                self.left[at] ^= own;
                if self.open[at] == 1 {
                    let last = self.left[at];
                    let lits = ground.tidy.get(at);
                    let lit = lits.iter().find(|lit| lit.bit().index() as u32 == last).expect("the last unknown bit");
                    self.work += lits.len() as u64;
                    self.blocked[lit.index()] -= 1;
                    self.queue.push_back(last);
                }
            }
        }
        for &row in ground.rows_of(own) {
            let at = row as usize;
            self.work += 1;
            self.row_open[at] -= 1;
            self.row_left[at] ^= own;
            if self.row_open[at] == 1 {
                self.queue.push_back(self.row_left[at]);
            }
        }
    }

    /// By which rule a bit is known now, and whether that is sure.
    fn rule(&mut self, own: u32) -> Option<(How, bool)> {
        let may_witness = self.ground.may_witness(own);
        let mut unsure_row = None;
        for &row in self.ground.rows_of(own) {
            if self.row_open[row as usize] != 1 {
                continue;
            }
            let bits = &self.ground.rows[row as usize].bits;
            self.work += bits.len() as u64;
            if bits.iter().all(|other| other.index() as u32 == own || self.sure[other.index()]) {
                return Some((How::Row(row), true));
            }
            unsure_row = unsure_row.or(Some(row));
        }
        if may_witness
            && self.pace == Pace::Fast
            && let Some(one_sided) = self.one_sided(own)
        {
            return Some((one_sided, false));
        }
        if self.is_forced(own, true) {
            return Some((How::Forced, true));
        }
        if !may_witness {
            return None;
        }
        if let Some(row) = unsure_row {
            return Some((How::Row(row), false));
        }
        let one_sided = self.one_sided(own).filter(|_| self.pace == Pace::Thorough);
        one_sided.or_else(|| self.is_forced(own, false).then_some(How::Forced)).map(|how| (how, false))
    }

    fn one_sided(&self, own: u32) -> Option<How> {
        let lit = BitLit::new(bit(own), true);
        // The side with fewer clauses makes the smaller function.
        let sides = [(!lit, true), (lit, false)].into_iter().filter(|(lit, _)| self.blocked[lit.index()] == 0);
        let (_, is_conjunction) = sides.min_by_key(|(lit, _)| self.ground.tidy.with(*lit).len())?;
        Some(How::OneSided(is_conjunction))
    }

    /// Whether the clauses over known bits leave the bit no choice: those over sure bits alone, or all of them.
    fn is_forced(&mut self, own: u32, sure_only: bool) -> bool {
        let lit = BitLit::new(bit(own), true);
        let tidy = &self.ground.tidy;
        let is_rest = |&clause: &u32| {
            self.open[clause as usize] == 1
                && (!sure_only
                    || tidy
                        .get(clause as usize)
                        .iter()
                        .all(|lit| lit.bit() == bit(own) || self.sure[lit.bit().index()]))
        };
        let side = |lit: BitLit| tidy.with(lit).iter().copied().filter(is_rest).collect::<Vec<u32>>();
        let (with, without) = (side(lit), side(!lit));
        self.work += (tidy.with(lit).len() + tidy.with(!lit).len()) as u64;
        let depth = if self.pace == Pace::Thorough { Depth::Window } else { Depth::Clauses };
        unique::is_forced(tidy, bit(own), &with, &without, depth, &mut self.work)
    }
}
