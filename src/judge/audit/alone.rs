//! A circuit alone, with no problem: what does it mark, and does it leave everything else as it was?
//!
//! Input: a circuit with a register `search`, perhaps `mark` and `work`. Output: [`Marks`]: how many values of the search
//! register it marks, the first of them, and whether it is an oracle at all (work clean, `search` kept, signs the only
//! phases). Without `mark` a value is marked by the phase -1; a circuit whose phases are no signs is read against its
//! most common phase. With `mark` a value is marked where `mark` is flipped.
//!
//! Circuits that keep basis states, as they are or as sums over paths, are run on every value, 64 at a time; others on a
//! superposition of all.

use std::borrow::Cow;

use crate::budget::Budget;
use crate::circuit::{Circuit, MARK, QubitId, SEARCH};
use crate::id::Id;
use crate::judge::audit::compare::Shared;
use crate::judge::audit::compare::columns::{Column, columns, start};
use crate::judge::audit::compare::words::{Words, input_word};
use crate::judge::audit::eighths::with_eighths;
use crate::judge::audit::oracle::Roles;
use crate::judge::audit::paths::{self, Read};
use crate::judge::audit::state::amplitude::{Amplitude, Exact};
use crate::judge::audit::superposition::run::{Draw, End};
use crate::judge::audit::{AuditError, How, Options, Outcome, oracle};
use crate::problem::Bits;

/// Every value is run, 64 at a time, up to so many searched qubits.
const ROW_BITS: usize = 26;
/// Every value is followed in superposition up to so many searched qubits.
const ALL_BITS: usize = 16;
/// Marked values that are kept.
const KEPT: usize = 8;

/// How a circuit marks.
#[derive(Clone, Copy, PartialEq, Eq, Debug, serde::Serialize)]
#[serde(rename_all = "kebab-case")]
pub enum Form {
    /// By a sign.
    Phase,
    /// By flipping `mark`.
    Bit,
}

/// What a circuit marks.
#[derive(Clone, PartialEq, Eq, Debug)]
pub struct Marks {
    /// `Equal` where it is an oracle (of whatever it marks), on every value; `Differs` where it is none.
    pub outcome: Outcome,
    /// How that was found.
    pub how: How,
    /// How it marks.
    pub form: Form,
    /// How many values of the search register were tried.
    pub inputs: u128,
    /// How many of them are marked.
    pub marked: u128,
    /// The first of them.
    pub first: Vec<Bits>,
    /// Whether every work qubit is clean again.
    pub work_clean: bool,
    /// A value on which it is no oracle, and why.
    pub fault: Option<(Bits, String)>,
    /// What else is to be said.
    pub notes: Vec<String>,
}

/// What a circuit does to one basis state.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Effect {
    /// It comes back, perhaps with `mark` flipped, with a phase in multiples of pi/4.
    Kept { flipped: bool, eighths: u8 },
    /// It does not; why.
    Broken(&'static str),
}

/// Looks at a circuit.
pub fn marks(circuit: &Circuit, options: &Options, budget: &Budget) -> Result<Marks, AuditError> {
    let (search, mark) = (circuit.register(SEARCH), circuit.register(MARK));
    if search.is_empty() {
        return Err(AuditError::NoRegister(SEARCH));
    }
    if mark.len() > 1 {
        return Err(AuditError::RegisterSize { name: MARK, found: mark.len(), expected: 1 });
    }
    oracle::check_gates(circuit)?;
    let mut inputs = search.clone();
    inputs.extend(&mark);
    let mut tally = Tally::new(search.len(), mark.len());
    let exact = as_basis_states(circuit, &search, &mark, budget);
    let most = if exact.is_some() { ROW_BITS } else { ALL_BITS };
    if search.len() > most {
        return Err(AuditError::TooLarge {
            what: format!("{} searched qubits, and without a problem {most} are the limit", search.len()),
        });
    }
    match exact {
        Some(exact) => {
            let mut inputs = exact.register(SEARCH);
            inputs.extend(exact.register(MARK));
            by_rows(&exact, &inputs, &mut tally, budget);
        }
        None => in_superposition(circuit, &inputs, &mut tally, options, budget)?,
    }
    Ok(tally.marks())
}

/// The circuit, or one that is the same operator by the sums over paths, where its gates keep basis states.
fn as_basis_states<'c>(
    circuit: &'c Circuit,
    search: &[QubitId],
    mark: &[QubitId],
    budget: &Budget,
) -> Option<Cow<'c, Circuit>> {
    let exact = with_eighths(circuit, false);
    if oracle::keeps_basis_states(&exact) {
        return Some(exact);
    }
    let inputs: Vec<QubitId> = search.iter().chain(mark).copied().collect();
    let work = Shared::rest(circuit, &inputs);
    let roles = Roles { search: search.to_vec(), mark: mark.first().copied(), work };
    let read = paths::read(circuit, &roles, None, budget).ok().filter(Read::is_shown)?;
    Some(Cow::Owned(paths::plain_circuit(&read, search.len(), !mark.is_empty())))
}

/// Runs every value on words.
fn by_rows(circuit: &Circuit, inputs: &[QubitId], tally: &mut Tally, budget: &Budget) {
    let work = Shared::rest(circuit, inputs);
    let bits = inputs.len();
    let lanes = if bits < 6 { 1usize << bits } else { 64 };
    let mut resets: Option<Vec<bool>> = None;
    for block in 0..1u64 << bits.saturating_sub(6) {
        if block.is_multiple_of(1 << 8) && budget.spent() {
            return;
        }
        let values: Vec<u64> = (0..bits).map(|bit| input_word(bit, block)).collect();
        let mut words = Words::new(circuit);
        inputs.iter().zip(&values).for_each(|(qubit, &word)| words.qubits[qubit.index()] = word);
        words.run(circuit);
        let expected = resets.get_or_insert_with(|| words.resets.iter().map(|word| word & 1 == 1).collect());
        let told = |(word, &value): (&u64, &bool)| word ^ if value { u64::MAX } else { 0 };
        let told = words.resets.iter().zip(expected.iter()).map(told).fold(0, |all, word| all | word);
        let dirty = work.iter().fold(0, |all, qubit| all | words.qubits[qubit.index()]);
        let searched = bits - tally.mark;
        let after = |at: usize| words.qubits[inputs[at].index()];
        let changed = (0..searched).fold(0, |all, at| all | after(at) ^ values[at]);
        let flipped = if tally.mark == 1 { after(searched) ^ values[searched] } else { 0 };
        for lane in 0..lanes {
            let is = |word: u64| word >> lane & 1 == 1;
            let effect = match () {
                () if is(told) => Effect::Broken(TELLING),
                () if is(dirty) => Effect::Broken(DIRTY),
                () if is(changed) => Effect::Broken(CHANGED),
                () => Effect::Kept { flipped: is(flipped), eighths: words.eighths(lane) },
            };
            tally.take(block << 6 | lane as u64, effect);
        }
    }
    tally.is_complete = true;
}

const TELLING: &str = "a reset or a measurement tells something about the input";
const DIRTY: &str = "work is not clean at the end";
const CHANGED: &str = "search is changed";
const SPREAD: &str = "it becomes a superposition";
const SIZE: &str = "its amplitude has another size than that of others";

/// Follows all values in superposition, for a few strings of outcomes.
fn in_superposition(
    circuit: &Circuit,
    inputs: &[QubitId],
    tally: &mut Tally,
    options: &Options,
    budget: &Budget,
) -> Result<(), AuditError> {
    tally.how = How::Superposition;
    let values: Vec<Bits> = (0..1u128 << inputs.len()).map(|value| Bits::from_number(value, inputs.len())).collect();
    let starts: Vec<Bits> = values.iter().map(|value| start(circuit, inputs, value)).collect();
    let mut first: Option<Vec<Effect>> = None;
    for draw in [Draw::Zeros, Draw::Ones, Draw::seeded(options.seed)] {
        let found = match columns(circuit, inputs, &starts, draw, budget)? {
            Ok(found) => found,
            Err(End::Telling { input, bit }) => {
                tally.notes.push(format!("the outcome at {bit} depends on the input"));
                tally.take(input as u64, Effect::Broken(TELLING));
                return Ok(());
            }
            Err(_) => return Ok(()),
        };
        let reference = found.columns[0].first().map_or(Exact::ONE, |entry| entry.2);
        let effects: Vec<Effect> = values
            .iter()
            .zip(&found.columns)
            .map(|(value, column)| effect(value, column, reference, tally.mark))
            .collect();
        let is_same = first.as_ref().is_none_or(|first| *first == effects);
        if !is_same {
            tally.notes.push("the operator depends on measurement outcomes".to_owned());
            tally.take(0, Effect::Broken(TELLING));
            return Ok(());
        }
        if first.is_none() {
            effects.iter().enumerate().for_each(|(at, &effect)| tally.take(at as u64, effect));
        }
        first = Some(effects);
        if found.free == 0 {
            break;
        }
    }
    tally.is_complete = true;
    Ok(())
}

/// What became of one value, its phase against the reference (which is against 1 where that is a real number).
fn effect(value: &Bits, column: &Column, reference: Exact, mark: usize) -> Effect {
    let [(after, is_clean, amplitude)] = &column[..] else { return Effect::Broken(SPREAD) };
    if !is_clean {
        return Effect::Broken(DIRTY);
    }
    let searched = value.len() - mark;
    if (0..searched).any(|at| value.at(at) != after.at(at)) {
        return Effect::Broken(CHANGED);
    }
    let offset = (0..8).find(|&turn| reference.turned(turn).is_positive()).map_or(0, |turn| (8 - turn) % 8);
    match (0..8).find(|&turn| reference.turned(turn) == *amplitude) {
        Some(turn) => Effect::Kept {
            flipped: mark == 1 && value.at(searched) != after.at(searched),
            eighths: (turn + offset) % 8,
        },
        None => Effect::Broken(SIZE),
    }
}

/// Collects effects in the order of the values.
struct Tally {
    bits: usize,
    mark: usize,
    how: How,
    inputs: u128,
    /// For each phase, how many have it, and the first of them.
    phases: [(u128, Vec<Bits>); 8],
    flips: (u128, Vec<Bits>),
    work_clean: bool,
    fault: Option<(Bits, String)>,
    notes: Vec<String>,
    is_complete: bool,
}

impl Tally {
    fn new(bits: usize, mark: usize) -> Self {
        Self {
            bits,
            mark,
            how: How::Exhaustive,
            inputs: 0,
            phases: Default::default(),
            flips: (0, Vec::new()),
            work_clean: true,
            fault: None,
            notes: Vec::new(),
            is_complete: false,
        }
    }

    fn take(&mut self, value: u64, effect: Effect) {
        let search = || Bits::from_number((value & ((1 << self.bits) - 1)).into(), self.bits);
        let with_mark = value >> self.bits & 1 == 1;
        self.inputs += u128::from(!with_mark);
        match effect {
            Effect::Broken(why) => {
                self.work_clean &= why != DIRTY && why != TELLING;
                if self.fault.is_none() {
                    self.fault = Some((search(), why.to_owned()));
                }
            }
            Effect::Kept { flipped, eighths } => {
                let value = search();
                let note = |list: &mut (u128, Vec<Bits>)| {
                    list.0 += 1;
                    if list.1.len() < KEPT {
                        list.1.push(value.clone());
                    }
                };
                note(&mut self.phases[usize::from(eighths)]);
                // Where search is kept, a reversible circuit flips both values of mark or none.
                if flipped && !with_mark {
                    note(&mut self.flips);
                }
            }
        }
    }

    fn marks(mut self) -> Marks {
        let kinds = (0..8).filter(|&eighths| self.phases[eighths].0 > 0).collect::<Vec<_>>();
        let is_signs = kinds.iter().all(|eighths| eighths % 4 == 0);
        let base = if is_signs { 0 } else { (0..8).rev().max_by_key(|&eighths| self.phases[eighths].0).unwrap_or(0) };
        let (form, (marked, first)) = match self.mark {
            1 => (Form::Bit, std::mem::take(&mut self.flips)),
            _ => (Form::Phase, std::mem::take(&mut self.phases[(base + 4) % 8])),
        };
        let odd = kinds.iter().find(|&&eighths| match form {
            Form::Phase => eighths != base && eighths != (base + 4) % 8,
            Form::Bit => kinds.len() > 1 && eighths != base,
        });
        if let (None, Some(&odd)) = (&self.fault, odd) {
            let value = self.phases[odd].1.first().cloned().unwrap_or_default();
            self.fault =
                Some((value, format!("its phase is turned by {}/4 of pi against others", (odd + 8 - base) % 8)));
        }
        if form == Form::Phase && 2 * marked > self.inputs {
            self.notes.push("up to a global sign the others are marked, which are fewer".to_owned());
        }
        if self.fault.is_none() && base != 0 {
            self.notes.push(format!("read against the most common phase, e^({base} i pi/4)"));
        }
        Marks {
            outcome: match (&self.fault, self.is_complete) {
                (Some(_), _) => Outcome::Differs,
                (None, true) => Outcome::Equal,
                (None, false) => Outcome::Undecided,
            },
            how: self.how,
            form,
            inputs: self.inputs,
            marked,
            first,
            work_clean: self.work_clean,
            fault: self.fault,
            notes: self.notes,
        }
    }
}
