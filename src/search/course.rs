//! The whole search of any aim, from any start state.
//!
//! Input: an oracle, a start state, a [`Course`] and the level. Output: a circuit that resets what it uses, prepares the
//! start, runs the course, and measures. After: what is measured has the distribution that the plan of the aim predicts
//! (the tests follow the written files).
//!
//! | course | iterations | oracle | measured |
//! |---|---|---|---|
//! | [`Course::Plain`] | a loop | phase or bit | `search` into `found` |
//! | [`Course::Given`] | a loop, as often as the input `iterations` of the file says | phase or bit | the same |
//! | [`Course::Matched`] | a loop with the same phase in oracle and reflection | bit, used twice an iteration | the same |
//! | [`Course::Sequence`] | written out, each with phases of its own | bit, used twice | the same |
//! | [`Course::Counting`] | controlled, 2^j of them by digit j | bit, used twice | `count` into `counted` |
//!
//! The angle form of an oracle computes the root into `mark`, turns it, and computes it again, which erases it; the
//! controlled form flips the sign of `mark` under the control instead. A phase that no input shows may be left out of the
//! bare oracle, and is not left out of the controlled one: an iterate is `-(1 - 2|s><s|) O`, and the control of digit 0
//! gives that sign.

use std::f64::consts::PI;

use num_bigint::BigUint;
use num_traits::ToPrimitive;

use crate::circuit::{COUNT, COUNTED, Circuit, Control, FOUND, GIVEN, Level, MARK, Op, Part, QubitId, SEARCH, WORK};
use crate::make::lower::{Form, about_work, append_preparation, append_reflection_about};
use crate::places::Start;
use crate::search::plan::Details;
use crate::search::whole::append_oracle;

/// The most digits that are counted: beyond, the loop of the last one is never run.
const MOST_DIGITS: u64 = 60;

/// What is run.
#[derive(Clone, PartialEq, Debug)]
pub enum Course {
    /// So many iterations.
    Plain(u64),
    /// As many as the input of the file says.
    Given,
    /// So many iterations with this phase on marked states and on the start: success for certain, where phase and number
    /// are those of the plan.
    Matched {
        /// How many.
        iterations: u64,
        /// Of oracle and of reflection, in radians.
        phase: f64,
    },
    /// Iteration j with the phases `(alpha_j, beta_j)`: `-(1 - (1 - e^(-i alpha)) |s><s|) (1 - (1 - e^(i beta)) P)`.
    Sequence(Vec<(f64, f64)>),
    /// Amplitude estimation with so many binary digits, at least one.
    Counting(u32),
}

impl Course {
    /// The course that carries out a plan; `None` where it is longer than a circuit can be, or nothing is marked.
    pub fn of(details: &Details) -> Option<Self> {
        let number = |number: &BigUint| number.to_u64().filter(|&number| number < 1 << 62);
        match details {
            Details::Plain(plan) => number(&plan.iterations).map(Self::Plain),
            Details::Interval(interval) => number(&interval.iterations).map(Self::Plain),
            Details::Certainty(tuned) => {
                let iterations = number(&tuned.iterations)?;
                Some(if tuned.phase == PI {
                    Self::Plain(iterations)
                } else {
                    Self::Matched { iterations, phase: tuned.phase }
                })
            }
            Details::FixedPoint(sequence) => sequence.phases().map(Self::Sequence),
            Details::Schedule(..) => Some(Self::Given),
            Details::Estimation(estimation) => {
                let digits = (&estimation.points - 1u32).bits().max(1);
                (digits <= MOST_DIGITS).then_some(Self::Counting(digits as u32))
            }
            Details::NothingMarked => None,
        }
    }

    /// Whether the oracle must have a `mark`.
    pub fn needs_bit_oracle(&self) -> bool {
        matches!(self, Self::Matched { .. } | Self::Sequence(_) | Self::Counting(_))
    }

    /// The forms of the reflections, for their ancillas.
    fn form(&self) -> Form {
        match self {
            Self::Plain(_) | Self::Given => Form::Sign,
            Self::Matched { .. } | Self::Sequence(_) => Form::Angle(0.0),
            Self::Counting(_) => Form::Controlled(crate::id::Id::new(0)),
        }
    }
}

/// The circuit of a course. The oracle has the register `mark` where the course needs it.
pub fn circuit(oracle: &Circuit, start: &Start, course: &Course, level: Level) -> Circuit {
    assert!(!course.needs_bit_oracle() || !oracle.register(MARK).is_empty(), "this course is built on a bit oracle");
    let mut search = Search::new(oracle, start, course, level);
    search.prepare(course);
    match course {
        Course::Plain(0) => {}
        Course::Plain(iterations) => search.looped(*iterations, Search::plain),
        Course::Given => search.looped(GIVEN, Search::plain),
        Course::Matched { iterations: 0, .. } => {}
        Course::Matched { iterations, phase } => search.looped(*iterations, |search| search.turned(*phase, *phase)),
        Course::Sequence(phases) => phases.iter().for_each(|&(alpha, beta)| search.turned(-alpha, beta)),
        Course::Counting(_) => search.counting(),
    }
    search.measure(course);
    search.circuit
}

struct Search<'o> {
    circuit: Circuit,
    oracle: &'o Circuit,
    start: &'o Start,
    level: Level,
    search: Vec<QubitId>,
    mark: Vec<QubitId>,
    work: Vec<QubitId>,
    count: Vec<QubitId>,
}

impl<'o> Search<'o> {
    fn new(oracle: &'o Circuit, start: &'o Start, course: &Course, level: Level) -> Self {
        let mut circuit = Circuit::new();
        let len = oracle.register(SEARCH).len();
        let search = circuit.add_qubits(SEARCH, len);
        let mark = if oracle.register(MARK).is_empty() { Vec::new() } else { circuit.add_qubits(MARK, 1) };
        let reflecting = if *course == Course::Plain(0) { 0 } else { about_work(len, level, course.form()) };
        let work = oracle.register(WORK).len().max(reflecting);
        let work = if work > 0 { circuit.add_qubits(WORK, work) } else { Vec::new() };
        let count = match course {
            Course::Counting(digits) => circuit.add_qubits(COUNT, *digits as usize),
            _ => Vec::new(),
        };
        for register in &oracle.measured {
            circuit.add_measured(&register.name, register.len as usize);
        }
        Self { circuit, oracle, start, level, search, mark, work, count }
    }

    fn prepare(&mut self, course: &Course) {
        let circuit = &mut self.circuit;
        for register in [&self.search, &self.mark, &self.work, &self.count] {
            register.iter().for_each(|&qubit| circuit.push(Op::Reset, &[], qubit));
        }
        append_preparation(circuit, &self.search, self.start, self.level);
        self.count.iter().for_each(|&qubit| circuit.push(Op::H, &[], qubit));
        if !course.needs_bit_oracle() {
            // A flip of this mark is a sign.
            self.mark.iter().for_each(|&qubit| circuit.push(Op::X, &[], qubit));
            self.mark.iter().for_each(|&qubit| circuit.push(Op::H, &[], qubit));
        }
        circuit.note(0, Part::Prepare, None);
    }

    fn looped(&mut self, times: u64, body: impl FnOnce(&mut Self)) {
        let from = self.circuit.gates().len();
        body(self);
        self.circuit.repeat_from(from, times);
    }

    fn plain(&mut self) {
        append_oracle(&mut self.circuit, self.oracle);
        self.reflect(Form::Sign);
    }

    /// The start is multiplied by `e^(i start)` and what is marked by `e^(i marked)`.
    fn turned(&mut self, start: f64, marked: f64) {
        self.mark_twice(|circuit, mark| circuit.push_angle(None, Op::P, marked, &[], mark));
        self.reflect(Form::Angle(start));
    }

    /// Computes the root into `mark`, does something to it, and erases it.
    fn mark_twice(&mut self, between: impl FnOnce(&mut Circuit, QubitId)) {
        append_oracle(&mut self.circuit, self.oracle);
        let from = self.circuit.gates().len();
        between(&mut self.circuit, self.mark[0]);
        self.circuit.note(from, Part::Mark, None);
        append_oracle(&mut self.circuit, self.oracle);
    }

    fn reflect(&mut self, form: Form) {
        append_reflection_about(&mut self.circuit, &self.search, &self.work, self.start, self.level, form);
    }

    /// Digit j controls 2^j iterations; then the inverse Fourier transform.
    fn counting(&mut self) {
        for at in 0..self.count.len() {
            let control = self.count[at];
            self.looped(1 << at, |search| {
                search.mark_twice(|circuit, mark| circuit.push(Op::Z, &[Control::on(control)], mark));
                search.reflect(Form::Controlled(control));
            });
        }
        let from = self.circuit.gates().len();
        // The sign of an iterate, which 2^j of them show only for j = 0.
        self.circuit.push(Op::Z, &[], self.count[0]);
        self.inverse_fourier();
        self.circuit.note(from, Part::Measure, None);
    }

    /// The inverse Fourier transform of `count`, its digits reversed by the measurement: D. Coppersmith, "An approximate
    /// Fourier transform useful in quantum factoring", IBM Research Report RC 19642, 1994 (from memory; the tests compare
    /// the distribution).
    fn inverse_fourier(&mut self) {
        let digits = self.count.clone();
        for at in (0..digits.len()).rev() {
            for later in at + 1..digits.len() {
                let angle = -PI / (1u64 << (later - at)) as f64;
                self.controlled_phase(angle, digits[later], digits[at]);
            }
            self.circuit.push(Op::H, &[], digits[at]);
        }
    }

    /// `e^(i angle)` where both are 1, by three rotations that every level has.
    fn controlled_phase(&mut self, angle: f64, a: QubitId, b: QubitId) {
        let circuit = &mut self.circuit;
        circuit.push_angle(None, Op::P, angle / 2.0, &[], a);
        circuit.push_angle(None, Op::P, angle / 2.0, &[], b);
        circuit.push(Op::X, &[Control::on(a)], b);
        circuit.push_angle(None, Op::P, -angle / 2.0, &[], b);
        circuit.push(Op::X, &[Control::on(a)], b);
    }

    fn measure(&mut self, course: &Course) {
        let from = self.circuit.gates().len();
        let counting = matches!(course, Course::Counting(_));
        let (name, mut qubits) = if counting { (COUNTED, self.count.clone()) } else { (FOUND, self.search.clone()) };
        if counting {
            qubits.reverse();
        }
        let into = self.circuit.add_measured(name, qubits.len());
        qubits.iter().zip(into).for_each(|(&qubit, bit)| self.circuit.push_measure(None, qubit, bit));
        self.circuit.note(from, Part::Measure, None);
    }
}
