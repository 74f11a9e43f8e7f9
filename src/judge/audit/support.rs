//! The strings that a start state holds, as the judge reads them: by counting ones and comparing numbers, string by string
//! or 2048 at a time. What a start state does not hold is no input of the oracle; but it must hold every solution.

use crate::budget::Budget;
use crate::id::Id;
use crate::judge::audit::{How, Outcome, Phases, Verdict, Witness};
use crate::judge::clauses;
use crate::judge::rows::lanes::Row;
use crate::places::{Part, Places, Start};
use crate::problem::{Bits, Problem};
use crate::sat::{Answer, Batsat, Engine, Lit};

/// Whether the start state holds the string in which the problem has these bits.
pub(super) fn holds(places: &Places, bits: &Bits) -> bool {
    places.start.allows(|qubit| bits.get(places.searched[qubit as usize]))
}

/// The lanes whose strings the start state holds; `row` gives the row of a qubit of the search register.
pub(super) fn row(start: &Start, row: impl Fn(usize) -> Row) -> Row {
    let parts = start.parts().iter();
    parts.fold(Row::splat(true), |all, part| all & part_row(part, &row))
}

fn part_row(part: &Part, row: &impl Fn(usize) -> Row) -> Row {
    let bits = part.qubits().iter().map(|&qubit| row(qubit as usize));
    match part {
        Part::Below { qubits, size } => {
            if size >> qubits.len() != 0 {
                return Row::splat(true);
            }
            bits.enumerate().fold(Row::ZEROS, |below, (at, bit)| match size >> at & 1 {
                1 => !bit | below,
                _ => !bit & below,
            })
        }
        Part::Weight { ones, .. } => {
            // A counter in binary, one digit a row.
            let mut digits: Vec<Row> = Vec::new();
            for mut carry in bits {
                for digit in &mut digits {
                    let next = *digit & carry;
                    *digit = *digit ^ carry;
                    carry = next;
                }
                digits.push(carry);
            }
            let wanted = |at: usize| if u64::from(*ones) >> at & 1 == 1 { Row::splat(true) } else { Row::ZEROS };
            digits.iter().enumerate().fold(Row::splat(true), |same, (at, digit)| same & !(*digit ^ wanted(at)))
        }
    }
}

/// Whether a solution is missing from the start state.
#[derive(Clone, PartialEq, Eq, Debug)]
pub(super) enum Lost {
    /// None is.
    Nothing,
    /// This one is.
    Solution(Bits),
    /// The budget ran out.
    Unknown,
}

/// Looks for a solution that the start state does not hold.
pub(super) fn lost(problem: &Problem, places: &Places, budget: &Budget) -> Lost {
    let mut result = Lost::Nothing;
    if places.start.parts().is_empty() {
        return result;
    }
    let cnf = clauses::encode(problem);
    for part in places.start.parts() {
        let qubits = part.qubits().iter().map(|&qubit| places.searched[qubit as usize].index());
        let bits: Vec<Lit> = qubits.map(|bit| Lit::new(bit, true)).collect();
        let breaches = match part {
            Part::Below { size, .. } if size >> bits.len() != 0 => Vec::new(),
            Part::Below { size, .. } => vec![Breach::AtLeast(*size)],
            Part::Weight { ones, .. } => {
                let zeros: Vec<Lit> = bits.iter().map(|&bit| !bit).collect();
                let few = bits.len() - *ones as usize;
                vec![Breach::MoreThan(bits.clone(), *ones as usize), Breach::MoreThan(zeros, few)]
            }
        };
        for breach in breaches {
            let mut engine = Batsat::new();
            for clause in cnf.clauses.iter() {
                let lits: Vec<Lit> = clause.iter().map(|lit| Lit::new(lit.bit().index(), !lit.is_negated())).collect();
                engine.add_clause(&lits);
            }
            breach.require(&mut engine, &bits, cnf.var_count);
            match engine.solve(&[], budget) {
                Answer::Unsat => {}
                Answer::Sat => return Lost::Solution(problem.bits().map(|bit| engine.value(bit.index())).collect()),
                Answer::Stopped => result = Lost::Unknown,
            }
        }
    }
    result
}

/// A way to break a part.
enum Breach {
    /// The number is at least this.
    AtLeast(u64),
    /// More than so many of these hold.
    MoreThan(Vec<Lit>, usize),
}

impl Breach {
    /// Clauses that have a model just where the part is broken; new variables begin at `free`.
    fn require(&self, engine: &mut Batsat, bits: &[Lit], free: usize) {
        match self {
            Self::AtLeast(size) => {
                // Where the size has a 1, so has the number, or it has a 1 above where the size has 0.
                for at in (0..bits.len()).filter(|at| size >> at & 1 == 1) {
                    let above = (at + 1..bits.len()).filter(|other| size >> other & 1 == 0).map(|other| bits[other]);
                    engine.add_clause(&std::iter::once(bits[at]).chain(above).collect::<Vec<_>>());
                }
            }
            Self::MoreThan(lits, most) => {
                // `so_far(i, j)` implies that at least j of the first i hold (C. Sinz, "Towards an optimal CNF encoding of
                // Boolean cardinality constraints", CP 2005, turned round).
                let width = most + 2;
                let so_far = |i: usize, j: usize| Lit::new(free + i * width + j, true);
                for (i, &lit) in lits.iter().enumerate() {
                    for j in 1..width {
                        engine.add_clause(&[!so_far(i + 1, j), so_far(i, j), lit]);
                        if j > 1 {
                            engine.add_clause(&[!so_far(i + 1, j), so_far(i, j), so_far(i, j - 1)]);
                        }
                    }
                }
                (1..width).for_each(|j| engine.add_clause(&[!so_far(0, j)]));
                engine.add_clause(&[so_far(lits.len(), most + 1)]);
            }
        }
    }
}

/// The verdict on an oracle whose start state lacks this solution.
pub(super) fn verdict(bits: Bits) -> Verdict {
    Verdict {
        outcome: Outcome::Differs,
        certificate: None,
        how: How::Proof,
        inputs: 1,
        work_clean: true,
        phases: Phases::Equal,
        witness: Some(Witness {
            bits,
            expected: "a solution in the start state".to_owned(),
            got: "a start state without it".to_owned(),
        }),
        notes: vec!["the start state does not hold every solution".to_owned()],
    }
}
