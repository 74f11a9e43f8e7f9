//! What the audited inputs showed, and the verdict that follows.
//!
//! For each input the circuit must give back the search register, clean ancillas and the right mark; any of these wrong
//! is a fault. Phases are judged against each of the eight global phases at once, because a global phase is free: a
//! phase oracle is right if *one* of them fits all inputs, and where none does, the one that fits most of them says
//! which inputs are wrong. A bit oracle must have no phase but a global one.

use crate::circuit::{Circuit, QubitId};
use crate::id::Id;
use crate::judge::audit::basis::kernel::Machine;
use crate::judge::audit::basis::smallest::smallest;
use crate::judge::audit::oracle::{Roles, Trace, problem_bits, trace};
use crate::judge::audit::support;
use crate::judge::audit::{How, Options, Outcome, Phases, Verdict, Witness};
use crate::judge::rows::lanes::Row;
use crate::places::Places;
use crate::problem::{Bits, Problem};

/// Findings over some inputs, which are numbered in the order in which they are tried.
#[derive(Clone, PartialEq, Eq, Debug, Default)]
pub(crate) struct Findings {
    /// How many inputs.
    pub(crate) inputs: u64,
    /// Whether an ancilla was left at 1, or reset when it held more than a constant.
    pub(crate) work_dirty: bool,
    /// The first input on which anything but the phase is wrong.
    fault: Option<u64>,
    /// For each global phase, in multiples of pi/4, how many phases fit it.
    fitting: [u64; 8],
    /// For each global phase, the first input whose phase does not fit it.
    misfit: [Option<u64>; 8],
}

/// Inputs that are tried together.
pub(crate) struct Batch<'a> {
    /// The rows of the search register.
    pub(crate) search: &'a [Row],
    /// The lanes that must be marked.
    pub(crate) solutions: Row,
    /// The lanes that the start state holds; the others are not judged.
    pub(crate) support: Row,
    /// How many lanes, from lane 0, are inputs.
    pub(crate) lanes: u64,
    /// The number of the input in lane 0.
    pub(crate) first: u64,
}

impl Findings {
    /// Runs a batch: once for a phase oracle, once for each value of `mark` for a bit oracle.
    pub(crate) fn run(&mut self, machine: &mut Machine, roles: &Roles, batch: &Batch) {
        let lanes = Row::first_lanes(batch.lanes) & batch.support;
        for y in [false, true] {
            if y && roles.mark.is_none() {
                break;
            }
            roles.search.iter().zip(batch.search).for_each(|(&qubit, row)| machine.set(qubit, *row));
            if let Some(mark) = roles.mark {
                machine.set(mark, Row::splat(y));
            }
            let dirty = machine.run() | machine.any_set(&roles.work);
            let mut wrong = dirty | machine.any_changed(&roles.search, batch.search);
            let is_tidy = wrong.is_zero();
            let mut owed = batch.solutions;
            if let Some(mark) = roles.mark {
                wrong = wrong | (machine.get(mark) ^ batch.solutions ^ Row::splat(y));
                owed = Row::ZEROS;
            }
            self.work_dirty |= !(dirty & lanes).is_zero();
            note(&mut self.fault, &(wrong & lanes), batch.first);
            self.phases(machine, &owed, &lanes, batch);
            if is_tidy { machine.clear_phases() } else { machine.clear() }
        }
        self.inputs += batch.lanes;
    }

    /// Adds `count` inputs from number `first` on, on which the circuit marks what it must with one phase for all.
    pub(crate) fn agree(&mut self, roles: &Roles, global: u8, first: u64, count: u64) {
        if count == 0 {
            return;
        }
        self.inputs += count;
        self.fitting[usize::from(global)] += count * if roles.mark.is_some() { 2 } else { 1 };
        for (at, misfit) in self.misfit.iter_mut().enumerate() {
            if at != usize::from(global) {
                *misfit = misfit.or(Some(first));
            }
        }
    }

    /// Adds `count` inputs from number `first` on, with one phase for all besides the mark, which is wrong in the lanes of
    /// `wrong`; only the lanes of `judged` say anything.
    pub(crate) fn compared(&mut self, roles: &Roles, global: u8, wrong: &Row, judged: &Row, first: u64, count: u64) {
        if roles.mark.is_some() {
            note(&mut self.fault, &(*wrong & *judged), first);
            return self.agree(roles, global, first, count);
        }
        let lanes = Row::first_lanes(count) & *judged;
        self.inputs += count;
        for at in 0..8 {
            let fits = match (usize::from(global) + 8 - at) % 8 {
                0 => !*wrong & lanes,
                4 => *wrong & lanes,
                _ => Row::ZEROS,
            };
            self.phase(at, &fits, &lanes, first);
        }
    }

    /// Compares the phases with those owed: a sign in the lanes of `owed`.
    fn phases(&mut self, machine: &Machine, owed: &Row, lanes: &Row, batch: &Batch) {
        let first = batch.first;
        let bits = [*machine.phase(0), *machine.phase(1), *machine.phase(2) ^ *owed];
        // The usual case first, because counting lanes is slow.
        if bits.iter().all(|bits| (*bits & *lanes).is_zero()) {
            self.fitting[0] += lanes.count();
            (1..8).for_each(|global| note(&mut self.misfit[global], lanes, first));
            return;
        }
        for global in 0..8 {
            let same = |bit: usize| if global >> bit & 1 == 1 { bits[bit] } else { !bits[bit] };
            let fits = same(0) & same(1) & same(2) & *lanes;
            self.phase(global, &fits, lanes, first);
        }
    }

    fn phase(&mut self, global: usize, fits: &Row, lanes: &Row, first: u64) {
        self.fitting[global] += fits.count();
        note(&mut self.misfit[global], &(!*fits & *lanes), first);
    }

    /// Adds findings over later inputs.
    pub(crate) fn add(&mut self, later: Findings) {
        self.inputs += later.inputs;
        self.work_dirty |= later.work_dirty;
        self.fault = self.fault.or(later.fault);
        for global in 0..8 {
            self.fitting[global] += later.fitting[global];
            self.misfit[global] = self.misfit[global].or(later.misfit[global]);
        }
    }

    /// Whether a difference is certain: no input that is still to come can make it right.
    pub(crate) fn differ(&self, options: &Options) -> bool {
        self.first_difference(options).is_some()
    }

    /// The global phase that the circuit is judged by: the one that fits most, and of equals the least. A strict audit
    /// knows none but 1.
    fn global(&self, options: &Options) -> usize {
        let best = |&global: &usize| (self.fitting[global], std::cmp::Reverse(global));
        if options.strict_phase { 0 } else { (0..8).max_by_key(best).expect("eight phases") }
    }

    fn first_difference(&self, options: &Options) -> Option<u64> {
        let misfit = match options.strict_phase {
            true => self.misfit[0],
            // While some global phase fits everything, no phase is wrong.
            false if self.misfit.contains(&None) => None,
            false => self.misfit[self.global(options)],
        };
        [self.fault, misfit].into_iter().flatten().min()
    }

    /// The verdict. `input` gives the value of the search register of an input by its number.
    pub(crate) fn verdict(&self, case: &Case, how: How, is_complete: bool, input: impl Fn(u64) -> Bits) -> Verdict {
        let global = self.global(case.options);
        let witness = self.first_difference(case.options).map(|at| case.witness(input(at), global as u8));
        let mut notes = Vec::new();
        if witness.is_none() {
            notes.extend(global_note(global as u8));
        }
        Verdict {
            outcome: match (&witness, is_complete) {
                (Some(_), _) => Outcome::Differs,
                (None, true) => Outcome::Equal,
                (None, false) => Outcome::Undecided,
            },
            how,
            inputs: self.inputs.into(),
            work_clean: !self.work_dirty,
            phases: if global == 4 && case.roles.mark.is_none() { Phases::Complement } else { Phases::Equal },
            witness,
            notes,
            certificate: None,
        }
    }
}

/// What is said about a global phase, given in multiples of pi/4.
pub(crate) fn global_note(global: u8) -> Option<String> {
    match global {
        0 => None,
        4 => Some("the circuit has the global phase -1".to_owned()),
        _ => Some(format!("the circuit has the global phase e^(i pi {global}/4)")),
    }
}

/// Notes the first lane that is set, unless an earlier one is known. The two values of `mark` are tried one after the
/// other, so the second may find an earlier lane of the same batch.
fn note(first: &mut Option<u64>, row: &Row, base: u64) {
    if first.is_none_or(|first| first > base) {
        let found = row.lanes().next().map(|lane| base + lane);
        *first = [*first, found].into_iter().flatten().min();
    }
}

/// What is judged.
#[derive(Clone, Copy)]
pub(crate) struct Case<'a> {
    pub(crate) problem: &'a Problem,
    pub(crate) places: &'a Places,
    pub(crate) circuit: &'a Circuit,
    pub(crate) roles: &'a Roles,
    pub(crate) options: &'a Options,
    /// The run of the first input: what every `reset` must find.
    pub(crate) first: &'a Trace,
}

impl Case<'_> {
    /// Explains a difference on an input, or on one with fewer ones.
    fn witness(&self, x: Bits, global: u8) -> Witness {
        let explained = self.explain(&x, global);
        assert!(explained.is_some(), "a fault of tallymark: rows and trace of a circuit disagree on the input {x}");
        let smaller = self.explain(&smallest(self, x, global), global);
        smaller.or(explained).expect("the first is there")
    }

    /// Explains a difference by running the one input gate by gate and asking the reference evaluator; `None` where
    /// there is none, as on an input that the start state does not hold.
    pub(crate) fn explain(&self, x: &Bits, global: u8) -> Option<Witness> {
        let bits = problem_bits(self.places, x);
        if !support::holds(self.places, &bits) {
            return None;
        }
        let is_solution = self.problem.holds(&bits);
        let expected = if is_solution { "marked" } else { "not marked" };
        let ys: &[bool] = if self.roles.mark.is_some() { &[false, true] } else { &[false] };
        let traces: Vec<Trace> = ys.iter().map(|&y| trace(self.circuit, self.roles, x, y)).collect();
        let mut got = Vec::new();
        for (trace, &y) in traces.iter().zip(ys) {
            self.faults(trace, x, &mut got);
            if let Some(mark) = self.roles.mark {
                let is_marked = trace.qubits.at(mark.index()) != y;
                if is_marked != is_solution {
                    got.push(if is_marked { "marked" } else { "not marked" }.to_owned());
                }
            }
        }
        let phases: Vec<u8> = traces.iter().map(|trace| (trace.eighths + 8 - global) % 8).collect();
        match phases[..] {
            [a, b] if a != b => got.push("the sign depends on mark".to_owned()),
            [a, _] if a != 0 => got.push("the sign depends on the input".to_owned()),
            [_, _] => {}
            _ => match (phases[0], is_solution) {
                (0, true) => got.push("not marked".to_owned()),
                (4, false) => got.push("marked".to_owned()),
                (0, false) | (4, true) => {}
                (eighths, _) => got.push(format!("turned by {eighths}/4 of pi")),
            },
        }
        got.dedup();
        (!got.is_empty()).then(|| Witness { bits, expected: expected.to_owned(), got: got.join(", ") })
    }

    fn faults(&self, trace: &Trace, x: &Bits, got: &mut Vec<String>) {
        let name = |qubit: QubitId| self.circuit.qubit_name(qubit);
        for (&(qubit, value), &(_, expected)) in trace.resets.iter().zip(&self.first.resets) {
            if value != expected {
                got.push(format!("{} reset at {}", name(qubit), u8::from(value)));
            }
        }
        for (&qubit, value) in self.roles.search.iter().zip(x.iter()) {
            if trace.qubits.at(qubit.index()) != value {
                got.push(format!("{} changed", name(qubit)));
            }
        }
        for &qubit in &self.roles.work {
            if trace.qubits.at(qubit.index()) {
                got.push(format!("{} left at 1", name(qubit)));
            }
        }
    }
}
