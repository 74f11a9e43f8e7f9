//! Every input, for a circuit that was read symbolically: only the function that it marks is evaluated.
//!
//! This is complete: the reading has shown for all inputs at once that the circuit gives back what it must, up to the
//! function. Both the function and the problem's own reading are tapes, swept over blocks of inputs; blocks in which neither
//! holds anywhere are passed together.

use crate::budget::Budget;
use crate::judge::audit::basis::findings::{Case, Findings};
use crate::judge::audit::basis::normal;
use crate::judge::audit::basis::symbols::Function;
use crate::judge::audit::support;
use crate::judge::rows;
use crate::judge::rows::in_order::{Then, in_order};
use crate::judge::rows::lanes::{LANE_BITS, LANES, Row};
use crate::judge::rows::sweep::Sweep;
use crate::judge::rows::tape::Tape;

/// Blocks in a run of one thread: the budget is looked at, and results are merged, after each.
const BLOCKS_A_RUN: u64 = 1 << 10;

/// A function of a circuit beside the problem, ready to be compared.
pub(crate) struct Compared {
    circuit: Tape,
    problem: Tape,
    /// The constant phase.
    global: u8,
}

impl Compared {
    /// Prepares the comparison.
    pub(crate) fn new(case: &Case, function: &Function) -> Self {
        // A phase oracle may be read as its complement with another global sign, so that it has conjuncts to stop at.
        let flip = case.roles.mark.is_none() && normal::is_better_negated(&function.graph, function.root);
        let reading = normal::for_evaluation(&function.graph, function.root ^ flip, case.problem.bit_count());
        Self {
            circuit: rows::tape_of(&reading, &case.places.searched),
            problem: rows::tape(case.problem, &case.places.searched),
            global: (function.global + 4 * u8::from(flip)) % 8,
        }
    }

    /// How many row operations a sweep over all inputs takes at most, one row being 2048 inputs.
    pub(crate) fn work(&self) -> u64 {
        self.circuit.work().saturating_add(self.problem.work())
    }

    /// Compares the inputs in order until one differs, all are done or the budget is spent. The flag says whether all are
    /// done.
    pub(crate) fn exhaust(&self, case: &Case, budget: &Budget) -> (Findings, bool) {
        let bits = case.places.search_len();
        let blocks = 1u64 << bits.saturating_sub(LANE_BITS);
        let run_len = BLOCKS_A_RUN.min(blocks);
        let runs = blocks / run_len;
        let mut total = Findings::default();
        let work = |(circuit, problem): &mut (Sweep, Sweep), run: u64| {
            (!budget.spent()).then(|| self.run(case, circuit, problem, run * run_len..(run + 1) * run_len))
        };
        let merge = |run, findings| {
            total.add(findings);
            budget.report("audit", run + 1, Some(runs));
            if total.differ(case.options) { Then::Stop } else { Then::GoOn }
        };
        let state = || (Sweep::new(&self.circuit), Sweep::new(&self.problem));
        let merged = in_order(case.options.threads, runs, state, work, merge);
        (total, merged == runs)
    }

    fn run(&self, case: &Case, circuit: &mut Sweep, problem: &mut Sweep, blocks: std::ops::Range<u64>) -> Findings {
        let mut findings = Findings::default();
        let lanes = LANES.min(1 << case.places.search_len());
        let within = Row::first_lanes(lanes);
        // Where the start state holds every string, blocks without a difference are passed together.
        let is_whole = case.places.start.parts().is_empty();
        // The first block after the last difference.
        let mut start = blocks.start;
        let mut block = blocks.start;
        while block < blocks.end {
            let wrong = match (circuit.block(block), problem.block(block)) {
                (None, None) => Row::ZEROS,
                (Some(one), None) | (None, Some(one)) => *one & within,
                (Some(one), Some(other)) => (*one ^ *other) & within,
            };
            let judged = support::row(&case.places.start, |qubit| Row::of_bit(qubit, block));
            if wrong.is_zero() && is_whole {
                block = circuit.dead_until(block).min(problem.dead_until(block)).clamp(block + 1, blocks.end);
                continue;
            }
            findings.agree(case.roles, self.global, start * LANES, (block - start) * lanes);
            findings.compared(case.roles, self.global, &wrong, &judged, block * LANES, lanes);
            block += 1;
            start = block;
        }
        findings.agree(case.roles, self.global, start * LANES, (blocks.end - start) * lanes);
        findings
    }
}
