//! The audit of a whole search file: is it the search that the problem asks for?
//!
//! Input: a problem, its places, a circuit that prepares, iterates and measures. Output: a [`SearchVerdict`]. The circuit
//! is followed gate by gate from |0...0> (`machine`); the solutions come from the problem alone. It must
//! prepare the even superposition of the strings of the start state; after j iterations each amplitude must be the one that theory says
//! (`profile`) up to one global phase, with every other qubit clean; and it must end by measuring
//! `search[i]` into `found[i]`.
//!
//! A search with phases of its own (`phases`) and an estimation (`counting`) are judged by what they must be instead.
//!
//! One turn of a loop must be one iteration. What stands outside of loops may hold iterations too (a loop of one turn
//! is written without a loop): their number is the least that explains the state.
//!
//! A loop with many turns need not be followed to its end. States between iterations lie in a plane (spanned by the
//! uniform superpositions of the solutions and of the rest); two followed turns say what the body does to two
//! independent vectors of it, so if the body is unitary, it does the same in every further turn.

mod counting;
mod entries;
mod machine;
mod phases;
mod plane;
mod profile;
mod readout;
mod schedule;

use self::entries::Rows;
use self::machine::{MOST_ENTRIES, Machine};
use self::profile::{Fit, Profile};
use self::readout::Readout;
use super::state::Stop;
use super::state::amplitude::Complex;
use super::superposition::run::in_words;
use super::{AuditError, Outcome};
use crate::budget::Budget;
use crate::circuit::{COUNTED, Circuit, GIVEN, Gate, QubitId, SEARCH};
use crate::judge::restate::restate;
use crate::judge::rows;
use crate::places::Places;
use crate::problem::Problem;

/// The largest distance of an amplitude from what it must be, where no rotation was followed.
pub const TOLERANCE: f64 = 1e-9;
/// How far each rotation that is followed may be off: half a unit of the seventh decimal of an angle, so that angles may be
/// written with seven decimals. These errors add up, at most to [`MOST_TOLERANCE`].
pub const ROUNDING: f64 = 5e-8;
/// The largest tolerance, however many rotations are followed.
pub const MOST_TOLERANCE: f64 = 1e-4;
/// Gates between two looks at the budget.
const GATES_A_LOOK: usize = 16;
/// Turns that are followed of a loop that the input of the file ends.
const GIVEN_TURNS: u64 = 2;
/// At most so many bytes for a state, unless the budget says otherwise.
const MEMORY: u64 = 1 << 30;
/// The largest search register that is followed.
const MOST_BITS: usize = 26;
/// At most so many iterations outside of loops.
const MOST_UNROLLED: u64 = 1 << 12;

/// The verdict on a search file.
#[derive(Clone, PartialEq, Debug)]
pub struct SearchVerdict {
    /// What was found.
    pub outcome: Outcome,
    /// Iterations in the file.
    pub iterations: u64,
    /// Iterations with the highest success at the first peak, for as many solutions as the problem has; `None` where
    /// the search is too large to count them. A file with another number is a search for the problem all the same:
    /// the notes say so.
    pub planned: Option<u64>,
    /// Iterations that were followed gate by gate.
    pub iterations_checked: u64,
    /// The probability of the solutions after those iterations, from the amplitudes.
    pub success: f64,
    /// The largest distance of an amplitude from what it must be.
    pub deviation: f64,
    /// What the verdict rests on, and what is wrong.
    pub notes: Vec<String>,
}

/// Follows a search file and compares it with the search for this problem. `work_limit` bounds the amplitudes that are
/// computed; at least one turn of a loop is followed.
pub fn audit_search(
    problem: &Problem,
    places: &Places,
    circuit: &Circuit,
    work_limit: u64,
    budget: &Budget,
) -> Result<SearchVerdict, AuditError> {
    places.check(problem)?;
    let search = search_register(places, circuit)?;
    if let Some(verdict) = too_large(circuit, &search, budget) {
        return Ok(verdict);
    }
    let restated = restate(problem, places);
    let truth = rows::truth(&restated.problem, &restated.places.searched);
    audit_search_against(&truth, places, circuit, work_limit, budget)
}

/// The same, with the truth table at hand: bit `v` says whether the string `v` is marked.
pub fn audit_search_against(
    truth: &[u64],
    places: &Places,
    circuit: &Circuit,
    work_limit: u64,
    budget: &Budget,
) -> Result<SearchVerdict, AuditError> {
    let search = search_register(places, circuit)?;
    if let Some(verdict) = too_large(circuit, &search, budget) {
        return Ok(verdict);
    }
    let profile = Profile::new(truth, search.len(), &places.start);
    if circuit.measured.iter().any(|register| register.name == COUNTED) {
        return Ok(counting::audit_counting(circuit, &search, &profile, work_limit, budget));
    }
    if machine::has_phases(circuit) {
        return Ok(phases::audit_phases(circuit, &search, &profile, work_limit, budget));
    }
    let machine = Machine::new(circuit, &search);
    let mut follower = Follower {
        circuit,
        search,
        profile,
        machine,
        work_limit,
        budget,
        verdict: open(),
        phase: Complex { re: 1.0, im: 0.0 },
        unfollowed: false,
    };
    match follower.follow() {
        Ok(()) => {}
        Err(end) => end.tell(&mut follower.verdict),
    }
    if follower.verdict.outcome == Outcome::Differs && machine::has_angles(circuit) {
        // No plain search; perhaps one whose phases are multiples of pi/4.
        let verdict = phases::audit_phases(circuit, &follower.search, &follower.profile, work_limit, budget);
        if verdict.outcome == Outcome::Equal {
            return Ok(verdict);
        }
    }
    let mut verdict = follower.verdict;
    let planned = follower.profile.planned();
    verdict.planned = Some(planned);
    if verdict.iterations == GIVEN {
        verdict
            .notes
            .push("how many iterations are run is the input of the file; each turn of the loop is one".to_owned());
    } else if verdict.outcome == Outcome::Equal && verdict.iterations != planned {
        let (iterations, marked) = (verdict.iterations, follower.profile.marked());
        let success = follower.profile.success(planned);
        let note =
            format!("{iterations} iterations; with {marked} marked, {planned} have the highest success, {success:.9}");
        verdict.notes.push(note);
    }
    Ok(verdict)
}

fn open() -> SearchVerdict {
    SearchVerdict {
        outcome: Outcome::Undecided,
        iterations: 0,
        planned: None,
        iterations_checked: 0,
        success: 0.0,
        deviation: 0.0,
        notes: Vec::new(),
    }
}

fn search_register(places: &Places, circuit: &Circuit) -> Result<Vec<QubitId>, AuditError> {
    if places.search_len() == 0 {
        return Err(AuditError::NothingToSearch);
    }
    let search = circuit.register(SEARCH);
    match search.len() {
        0 => Err(AuditError::NoRegister(SEARCH)),
        found if found == places.search_len() => Ok(search),
        found => Err(AuditError::RegisterSize { name: SEARCH, found, expected: places.search_len() }),
    }
}

/// The verdict where the search does not fit the memory.
fn too_large(circuit: &Circuit, search: &[QubitId], budget: &Budget) -> Option<SearchVerdict> {
    let bits = search.len();
    let fits = bits <= MOST_BITS && Rows::bytes(bits, circuit.qubit_count()) * 2 <= budget.memory().unwrap_or(MEMORY);
    (!fits).then(|| SearchVerdict {
        notes: vec![format!("not followed: a search over {bits} bits does not fit this machine's memory limit")],
        ..open()
    })
}

/// Why following ended early.
enum End {
    Differs(String),
    Undecided(String),
}

impl End {
    fn tell(self, verdict: &mut SearchVerdict) {
        let (outcome, text) = match self {
            Self::Differs(text) => (Outcome::Differs, text),
            Self::Undecided(text) => (Outcome::Undecided, text),
        };
        verdict.outcome = outcome;
        verdict.notes.push(text);
    }
}

struct Follower<'c> {
    circuit: &'c Circuit,
    search: Vec<QubitId>,
    profile: Profile<'c>,
    machine: Machine<'c>,
    work_limit: u64,
    budget: &'c Budget,
    verdict: SearchVerdict,
    /// The global phase at the last comparison.
    phase: Complex,
    /// Whether turns of a loop were not followed.
    unfollowed: bool,
}

impl<'c> Follower<'c> {
    fn follow(&mut self) -> Result<(), End> {
        let circuit = self.circuit;
        let tail = Readout::found(circuit, &self.search)?;
        for (at, block) in circuit.blocks().iter().enumerate() {
            let end = (block.gates.end as usize).min(tail);
            let gates = circuit.gates().get(block.gates.start as usize..end).unwrap_or(&[]);
            if gates.is_empty() && at > 0 {
                continue;
            }
            if self.unfollowed {
                return Err(End::Undecided("gates after the turns that were not followed are not judged".to_owned()));
            }
            match block.repeat {
                1 => self.plain(gates)?,
                turns => self.turns(gates, turns)?,
            }
        }
        self.verdict.outcome = Outcome::Equal;
        self.verdict.notes.extend(self.machine.notes());
        Ok(())
    }

    /// Gates outside of loops: the least number of iterations that explains the state after them.
    fn plain(&mut self, gates: &[Gate]) -> Result<(), End> {
        self.run(gates)?;
        let amplitudes = self.amplitudes()?;
        let at = |value: usize| amplitudes[value];
        let sums = self.profile.sums(at);
        self.verdict.success = sums.success;
        let first = self.verdict.iterations;
        let mut nearest = f64::INFINITY;
        for turns in first..=first + MOST_UNROLLED {
            if self.profile.is_excluded(turns, &sums, 1e-6) {
                continue;
            }
            let fit = self.profile.fit(turns, &sums, at);
            nearest = nearest.min(fit.deviation);
            if fit.deviation <= self.machine.tolerance() {
                self.take(turns, &fit);
                return Ok(());
            }
        }
        self.verdict.deviation =
            if nearest.is_finite() { nearest } else { self.profile.fit(first, &sums, at).deviation };
        let what =
            if first == 0 { "the start state, nor that after some iterations" } else { "that after some iterations" };
        Err(End::Differs(format!("the state outside of loops is not {what}")))
    }

    fn take(&mut self, turns: u64, fit: &Fit) {
        self.verdict.iterations = turns;
        self.verdict.iterations_checked = turns;
        self.verdict.deviation = self.verdict.deviation.max(fit.deviation);
        self.phase = fit.phase;
    }

    /// A loop: one iteration a turn.
    fn turns(&mut self, gates: &[Gate], turns: u64) -> Result<(), End> {
        let is_unitary = gates.iter().all(|gate| gate.op().is_unitary() && gate.condition().is_none());
        let first = self.verdict.iterations;
        // Where everything or nothing is marked there is one state only, and one turn says all.
        let needed = if (2.0 * self.profile.theta).sin().abs() < 1e-9 { 1 } else { 2 };
        let mut steps: Vec<Complex> = Vec::new();
        for turn in 1..=turns {
            let before = self.machine.updates();
            self.run(gates)?;
            let cost = self.machine.updates() - before;
            let amplitudes = self.amplitudes()?;
            let at = |value: usize| amplitudes[value];
            let sums = self.profile.sums(at);
            self.verdict.success = sums.success;
            let fit = self.profile.fit(first + turn, &sums, at);
            if fit.deviation > self.machine.tolerance() {
                self.verdict.deviation = self.verdict.deviation.max(fit.deviation);
                return Err(End::Differs(format!(
                    "the state after turn {turn} of the loop is not that after {} iterations",
                    first + turn
                )));
            }
            let back = Complex { re: self.phase.re, im: -self.phase.im };
            steps.push(fit.phase.times(back));
            self.take(first + turn, &fit);
            let is_given = turns == GIVEN && turn == GIVEN_TURNS;
            if turn < turns && (is_given || self.machine.updates() + cost > self.work_limit) {
                self.verdict.iterations = first.saturating_add(turns); // GIVEN stays what it is
                self.unfollowed = true;
                let tolerance = self.machine.tolerance();
                let same = |a: &Complex, b: &Complex| (a.re - b.re).abs() + (a.im - b.im).abs() < 1e3 * tolerance;
                if is_unitary && steps.len() >= needed && steps.iter().all(|step| same(step, &steps[0])) {
                    let turns = if turns == GIVEN { "all".to_owned() } else { turns.to_string() };
                    let note = format!(
                        "{turn} of {turns} turns of the loop were followed; the others follow, since its body is unitary and does the same to two independent states"
                    );
                    self.verdict.notes.push(note);
                    return Ok(());
                }
                return Err(End::Undecided(format!(
                    "{turn} of {turns} turns of the loop were followed within the work limit"
                )));
            }
        }
        Ok(())
    }

    fn run(&mut self, gates: &[Gate]) -> Result<(), End> {
        let follow = |(at, gate)| follow_gate(self.circuit, &mut self.machine, self.budget, at, gate);
        gates.iter().enumerate().try_for_each(follow)
    }

    fn amplitudes(&mut self) -> Result<Vec<Complex>, End> {
        let circuit = self.circuit;
        self.machine.amplitudes().map_err(|residue| {
            let name = circuit.qubit_name(residue.qubit);
            End::Differs(format!("{name} is 1 between iterations where `{SEARCH}` is {}", residue.value))
        })
    }
}

/// Applies a gate; `at` is its place, after some of which the budget is looked at.
fn follow_gate(circuit: &Circuit, machine: &mut Machine, budget: &Budget, at: usize, gate: &Gate) -> Result<(), End> {
    if at.is_multiple_of(GATES_A_LOOK) {
        budget.report("audit of the search", machine.updates(), None);
        if budget.spent() {
            return Err(End::Undecided("the budget ran out".to_owned()));
        }
    }
    machine.apply(gate).map_err(|stop| {
        let gate = in_words(circuit, gate);
        End::Undecided(match stop {
            Stop::Entries => format!("at `{gate}` more than {MOST_ENTRIES} basis states would have to be followed"),
            Stop::Gate | Stop::Overflow => format!("`{gate}` is not followed"),
        })
    })
}
