//! Every input, gate by gate.
//!
//! This is complete: each gate of the circuit takes basis states to basis states, up to a phase, so the circuit is known
//! from what it does to each of them, and by linearity so is what it does to any superposition. A `reset` is allowed
//! where it finds the same value on every input (then its outcome tells nothing), and is a difference elsewhere.

use crate::budget::Budget;
use crate::judge::audit::basis::findings::{Batch, Case, Findings};
use crate::judge::audit::basis::kernel::{Machine, Program};
use crate::judge::audit::support;
use crate::judge::rows;
use crate::judge::rows::in_order::{Then, in_order};
use crate::judge::rows::lanes::{LANE_BITS, LANES, Row};
use crate::judge::rows::sweep::Sweep;

/// Blocks in a run of one thread: the budget is looked at, and results are merged, after each.
const BLOCKS_A_RUN: u64 = 64;

/// Tries the inputs in order until one differs, all are done or the budget is spent. The flag says whether all are done.
pub(crate) fn exhaust(case: &Case, program: &Program, budget: &Budget) -> (Findings, bool) {
    let bits = case.places.search_len();
    let tape = rows::tape(case.problem, &case.places.searched);
    let blocks = 1u64 << bits.saturating_sub(LANE_BITS);
    let lanes = LANES.min(1 << bits);
    let run_len = BLOCKS_A_RUN.min(blocks);
    let runs = blocks / run_len;
    let mut total = Findings::default();
    let work = |(machine, sweep, search): &mut (Machine, Sweep, Vec<Row>), run: u64| {
        if budget.spent() {
            return None;
        }
        let mut findings = Findings::default();
        for block in run * run_len..(run + 1) * run_len {
            for (at, row) in search.iter_mut().enumerate().skip(LANE_BITS) {
                *row = Row::of_bit(at, block);
            }
            let solutions = sweep.block(block).copied().unwrap_or(Row::ZEROS);
            let support = support::row(&case.places.start, |qubit| search[qubit]);
            let batch = Batch { search, solutions, support, lanes, first: block * LANES };
            findings.run(machine, case.roles, &batch);
        }
        Some(findings)
    };
    let state = || {
        let search = (0..bits).map(|at| Row::of_bit(at, 0)).collect();
        let mut machine = Machine::new(program);
        machine.clear();
        (machine, Sweep::new(&tape), search)
    };
    let merge = |run, findings| {
        total.add(findings);
        budget.report("audit", run + 1, Some(runs));
        if total.differ(case.options) { Then::Stop } else { Then::GoOn }
    };
    let merged = in_order(case.options.threads, runs, state, work, merge);
    let is_complete = merged == runs;
    (total, is_complete)
}
