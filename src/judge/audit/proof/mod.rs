//! The proof that a circuit is the oracle of a problem, where there are too many inputs to try.
//!
//! Input: what a sample could not tell apart. Output: [`Proved`]: equal, with a [`Certificate`]; an input on which they
//! differ, confirmed by running it; or why neither was reached.
//!
//! 1. The circuit is read symbolically (`symbolic`) into the graph that also holds the problem's conjuncts (`spec`).
//!    Equal nodes are one node there, so what is computed and undone cancels, and conjuncts of one shape meet.
//! 2. What remains is a miter (`miter`): clauses without a model just if the two agree. A work qubit that could be left
//!    at 1, a changed input, a phase that is no sign of the marked states: each is a signal that must never hold.
//! 3. Its claims are shown one by one (`prover`): signals that never hold; conjuncts of the problem and of the circuit
//!    that look equal on patterns are equal (`simulate`); those without a partner follow from the other side. Where
//!    small windows are not enough, nodes inside are proven equal first (`sweep`).
//! 4. The proof of all that is checked from beginning to end by a program that shares nothing with the solvers.
//!
//! What the certificate covers is the miter; that the miter is the question, the reading of gates and of constraints
//! into the graph, is not part of it.

mod close;
mod diagram;
mod drawn;
mod graph;
mod groups;
mod miter;
mod parities;
mod prover;
mod simulate;
mod spec;
mod sweep;
mod symbolic;

use std::io::{self, Write};

use self::close::{Closing, Found};
use self::graph::{Graph, Signal};
use self::miter::{Miter, Sides};
use self::prover::Prover;
use self::simulate::Patterns;
use super::basis::findings::Case;
use super::verdict::Witness;
use crate::budget::Budget;
use crate::judge::audit::oracle::register_value;
use crate::problem::Bits;
use crate::sat::check::{Checked, Refused, check};
use crate::sat::drat::Proof;
use crate::sat::formula::Formula;

/// Clauses without a model, and the proof of that.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Certificate {
    /// The clauses: variable `i` of the file, from 1, is search qubit `i - 1`.
    pub formula: Formula,
    /// The proof.
    pub proof: Proof,
    /// What the checker saw.
    pub checked: Checked,
    /// Pairs of signals that were proven equal on the way.
    pub equivalences: usize,
}

impl Certificate {
    /// Writes the clauses as DIMACS CNF.
    pub fn write_formula(&self, out: &mut dyn Write) -> io::Result<()> {
        let comments = [
            "The miter of a problem and a circuit: it has no model just if the circuit is the problem's oracle.",
            "The first variables are the qubits of the search register, in order.",
        ];
        self.formula.write_dimacs(&comments.map(str::to_owned), out)
    }

    /// Writes the proof as DRAT text.
    pub fn write_proof(&self, out: &mut dyn Write) -> io::Result<()> {
        self.proof.write_text(out)
    }
}

/// What came of it.
pub(super) enum Proved {
    /// The circuit is the oracle of the problem.
    Equal {
        /// The global phase in multiples of pi/4.
        global: u8,
        /// Why.
        certificate: Certificate,
    },
    /// It is not; the input was run.
    Differs(Witness),
    /// Neither was shown, and this is why.
    Open(String),
}

/// Proves or refutes. The circuit keeps basis states, and a sample showed no difference.
pub(super) fn prove(case: &Case, budget: &Budget) -> Proved {
    let inputs = case.places.search_len() + usize::from(case.roles.mark.is_some());
    let mut graph = Graph::over(inputs);
    let Some(end) = symbolic::read(&mut graph, case.circuit, case.roles, case.first, budget) else {
        return Proved::Open("the symbolic reading of the circuit did not end within the budget".to_owned());
    };
    if end.has_other_phases {
        return Proved::Open("phases other than signs do not cancel in the symbolic reading".to_owned());
    }
    let mut ours = spec::conjuncts(&mut graph, case.problem, case.places);
    if graph.is_too_large() {
        return Proved::Open("the symbolic reading is too large".to_owned());
    }
    budget.report("audit: the proof", 0, None);
    let known = &case.options.known;
    let mut patterns = Patterns::new(&graph, case.problem, case.places, known, inputs, case.options.seed);
    let at_zero = patterns.word(0, end.sign) & 1 == 1;
    let mut zeros = end.zeros;
    let (marked, constant) = match end.flipped {
        Some(flipped) => {
            zeros.extend([end.sign ^ at_zero].into_iter().filter(|&zero| zero != Signal::NO));
            (flipped, at_zero)
        }
        None => {
            let (agree, all) = patterns.agreement(end.sign, &ours);
            let is_complement = 2 * agree < all;
            (end.sign ^ is_complement, is_complement)
        }
    };
    // The phase on the zero input is the global one times what the sign says there.
    let global = (case.first.eighths + 4 * u8::from(at_zero) + 4 * u8::from(constant)) % 8;
    if case.options.strict_phase && global != 0 {
        return Proved::Open("the circuit has a global phase".to_owned());
    }
    let mut theirs = graph.conjuncts(marked);
    // On strings that the start state does not hold the two need not agree.
    let held = spec::support(&mut graph, &case.places.start);
    for side in [&mut ours, &mut theirs] {
        side.extend(&held);
        side.sort_unstable();
        side.dedup();
    }
    let sides = Sides::new(zeros, &ours, &theirs);
    let miter = Miter::new(&graph, &sides, inputs);
    let prover = Prover::new(&graph, &miter, base(case, inputs), budget);
    let mut closing = Closing::new(prover, sides, &mut patterns);
    match closing.close() {
        Found::Closed => {}
        Found::Input(input) => return confirm(case, &input, global),
        Found::Open(open) => return Proved::Open(format!("{open} claims of the proof were not decided in the budget")),
    }
    let (proof, equivalences) = closing.finish();
    match check(&miter.formula, &proof, budget) {
        Ok(checked) => {
            let certificate = Certificate { formula: miter.formula, proof, checked, equivalences };
            Proved::Equal { global, certificate }
        }
        Err(Refused::Stopped) => Proved::Open("the budget ran out while the proof was checked".to_owned()),
        Err(refused) => Proved::Open(format!("a fault of tallymark: {refused}")),
    }
}

/// An input on which as many constraints hold as may be.
fn base(case: &Case, inputs: usize) -> Bits {
    let solution = case.options.known.iter().find(|solution| solution.len() == case.problem.bit_count());
    let zeros = Bits::zeros(case.problem.bit_count());
    let register = register_value(case.places, solution.unwrap_or(&zeros));
    register.iter().chain([false]).take(inputs).collect()
}

/// Runs a candidate gate by gate.
fn confirm(case: &Case, input: &Bits, global: u8) -> Proved {
    let register: Bits = input.iter().take(case.places.search_len()).collect();
    match case.explain(&register, global) {
        Some(witness) => Proved::Differs(witness),
        None => Proved::Open("an input that the solver gave is judged alike by both sides".to_owned()),
    }
}
