//! The states along a line: sets of waiting clauses, each with the number of assignments that lead to it.

use num_bigint::BigUint;
use rustc_hash::FxHashMap;

use crate::budget::Budget;
use crate::judge::count::engine::{Number, Prepared};

/// Words of a state: clauses that are open at the same time have places of their own in it.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
pub(super) enum Width {
    One,
    Two,
    Four,
    More,
}

/// What a variable does to a state when it gets a value.
#[derive(Clone, Debug, Default)]
struct Value {
    /// Places that must not wait: clauses that end here without having come true.
    dead: Vec<u32>,
    /// Places that wait no more.
    cleared: Vec<u32>,
    /// Places that begin to wait.
    waiting: Vec<u32>,
}

/// The steps of a line.
#[derive(Clone, Debug)]
pub(super) struct Stepper {
    /// For each variable of the line, what its being false and true does.
    steps: Vec<[Value; 2]>,
    places: usize,
}

/// States between two looks at the budget.
const STATES_A_LOOK: u64 = 1 << 14;

impl Stepper {
    /// The steps of this line.
    pub(super) fn new(formula: &Prepared, line: &[u32]) -> Self {
        let mut when = vec![0usize; line.len()];
        line.iter().enumerate().for_each(|(at, &var)| when[var as usize] = at);
        let mut clauses_at: Vec<Vec<(u32, bool)>> = vec![Vec::new(); line.len()];
        let mut last = vec![0; formula.clauses.len()];
        for (at, clause) in formula.clauses.iter().enumerate() {
            for lit in clause {
                clauses_at[when[lit.var()]].push((at as u32, !lit.is_negated()));
                last[at] = last[at].max(when[lit.var()]);
            }
        }
        let mut place = vec![None; formula.clauses.len()];
        let mut free = Vec::new();
        let mut places = 0;
        let mut steps = Vec::with_capacity(line.len());
        for (at, clauses) in clauses_at.iter().enumerate() {
            let mut values = [Value::default(), Value::default()];
            let mut ended = Vec::new();
            for &(clause, saved_by) in clauses {
                let [saved, other] = if saved_by { [1, 0] } else { [0, 1] };
                let Some(own) = place[clause as usize] else {
                    let own = free.pop().unwrap_or_else(|| {
                        places += 1;
                        places as u32 - 1
                    });
                    place[clause as usize] = Some(own);
                    values[other].waiting.push(own);
                    continue;
                };
                values[saved].cleared.push(own);
                if last[clause as usize] == at {
                    values[other].dead.push(own);
                    ended.push(own);
                }
            }
            free.extend(ended);
            steps.push(values);
        }
        Self { steps, places }
    }

    pub(super) fn width(&self) -> Width {
        match self.places {
            0..=64 => Width::One,
            65..=128 => Width::Two,
            129..=256 => Width::Four,
            _ => Width::More,
        }
    }

    /// Counts with at most so much work and so many states at a time.
    pub(super) fn run<const WORDS: usize>(&self, work: u64, most: u64, budget: &Budget) -> Option<BigUint> {
        let mut states: Vec<([u64; WORDS], Number)> = vec![([0; WORDS], Number::ONE)];
        let mut next: FxHashMap<[u64; WORDS], Number> = FxHashMap::default();
        let mut done = 0;
        let mut look = STATES_A_LOOK;
        for (at, values) in self.steps.iter().enumerate() {
            let masks = [Masks::of(&values[0]), Masks::of(&values[1])];
            for (state, number) in &states {
                for masks in &masks {
                    if let Some(state) = masks.step(state) {
                        next.entry(state).and_modify(|sum| *sum = sum.plus(number)).or_insert_with(|| number.clone());
                    }
                }
                done += 1;
                if done >= look {
                    look += STATES_A_LOOK;
                    if done > work || next.len() as u64 > most || budget.spent() {
                        return None;
                    }
                    budget.report("counting along a line", at as u64, Some(self.steps.len() as u64));
                }
            }
            if done > work {
                return None;
            }
            states.clear();
            // The order of the states changes nothing: numbers are added, and that in any order.
            states.extend(next.drain());
        }
        Some(states.iter().fold(Number::ZERO, |sum, (_, number)| sum.plus(number)).to_big())
    }
}

/// A value as masks over the words of a state.
struct Masks<const WORDS: usize> {
    dead: [u64; WORDS],
    keep: [u64; WORDS],
    waiting: [u64; WORDS],
}

impl<const WORDS: usize> Masks<WORDS> {
    fn of(value: &Value) -> Self {
        let mask = |places: &[u32]| {
            let mut words = [0; WORDS];
            places.iter().for_each(|&place| words[place as usize / 64] |= 1 << (place % 64));
            words
        };
        Self { dead: mask(&value.dead), keep: mask(&value.cleared).map(|word| !word), waiting: mask(&value.waiting) }
    }

    fn step(&self, state: &[u64; WORDS]) -> Option<[u64; WORDS]> {
        let dead = (0..WORDS).any(|word| state[word] & self.dead[word] != 0);
        (!dead).then(|| std::array::from_fn(|word| (state[word] & self.keep[word]) | self.waiting[word]))
    }
}
