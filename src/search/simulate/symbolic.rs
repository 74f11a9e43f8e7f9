//! The phases of a run of gates from what its gates are for all values at once.
//!
//! Input: a run, and the gates that set up the qubits outside the search register. Output: the plane of the run, or nothing
//! where the reading does not close, which says nothing about the run.
//!
//! The judge reads the gates as a sum over paths ([`marked_values`]), whatever they are for: Hadamard gates on ancillas,
//! measurements with corrections and a mark in superposition are no more than gates that keep basis states. The qubits
//! outside are set up before the run and put back after it, so that the reading begins and ends with all of them 0.

use super::complex::Complex;
use super::diagonal::{Plane, Run};
use crate::budget::Budget;
use crate::circuit::{Circuit, Op};
use crate::judge::audit::marked_values;

/// The plane of a run, perhaps one without members.
pub(super) fn plane(run: &Run, budget: &Budget) -> Option<Plane> {
    let angle = angle(run)?;
    let mut circuit = Circuit::with_registers_of(run.circuit);
    let outside = || run.outside.gates();
    outside().iter().for_each(|gate| circuit.push_copy(run.outside, gate));
    run.gates.iter().for_each(|gate| circuit.push_copy(run.circuit, gate));
    outside().iter().rev().for_each(|gate| circuit.push_inverse(run.outside, gate));
    let set = marked_values(&circuit, angle, run.threads, budget)?;
    Some(Plane { set, factor: angle.map_or(Complex::real(-1.0), Complex::turn) })
}

/// The one angle that gates of the run have, or none where the phase is a sign; nothing where there are several.
fn angle(run: &Run) -> Option<Option<f64>> {
    let turns = run.gates.iter().filter(|gate| matches!(gate.op(), Op::P | Op::Rz));
    let mut angles = turns.filter_map(|gate| run.circuit.angle(gate));
    let first = angles.next();
    angles.all(|angle| Some(angle) == first).then_some(first)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::circuit::{Level, Mark};
    use crate::id::Id;
    use crate::make::{lower, network};
    use crate::places::Places;
    use crate::problem::{BitId, BitLit, Problem};
    use crate::random::SplitMix64;
    use crate::search::simulate::sparse::Sparse;

    fn clauses(bits: usize, count: usize, seed: u64) -> Problem {
        let mut random = SplitMix64::new(seed);
        let mut problem = Problem::new();
        problem.add_numbered_vars(bits);
        for _ in 0..count {
            let first = random.below(bits as u64) as usize;
            let second = (first + 1 + random.below(bits as u64 - 1) as usize) % bits;
            problem.clauses.push(&[first, second].map(|bit| BitLit::new(BitId::new(bit), random.coin())));
        }
        problem
    }

    /// At every level the reading nearly always closes, and gives what following each value by itself gives.
    #[test]
    fn the_reading_gives_what_each_value_by_itself_gives() {
        let mut closed = 0;
        for seed in 0..6 {
            let problem = clauses(3 + seed as usize % 4, 4, seed);
            let network = network::build(&problem, &Places::as_given(&problem));
            for level in Level::ALL {
                for mark in [Mark::Phase, Mark::Bit] {
                    let options = lower::Options { level, mark };
                    let Ok(oracle) = lower::lower(&network, &options, &Budget::unlimited()) else { continue };
                    let (search, qubits) = (oracle.register("search"), oracle.qubit_count());
                    let (mut outside, mut rest) = (Circuit::with_registers_of(&oracle), Sparse::new(qubits));
                    for op in [Op::X, Op::H] {
                        oracle.register("mark").iter().for_each(|&mark| outside.push(op, &[], mark));
                    }
                    outside.gates().iter().for_each(|gate| rest.apply(&outside, gate));
                    let gates: Vec<_> = oracle.gates().iter().filter(|gate| gate.op() != Op::Reset).copied().collect();
                    let run = Run {
                        circuit: &oracle,
                        search: &search,
                        gates: &gates,
                        rest: &rest,
                        outside: &outside,
                        threads: 2,
                        seed,
                    };
                    let Some(found) = plane(&run, &Budget::unlimited()) else { continue };
                    let one_by_one = run.one_by_one(&Budget::unlimited()).unwrap();
                    let mut turned = one_by_one.iter().filter(|plane| !plane.factor.is_near(Complex::ONE));
                    let (wanted, rest) = (turned.next().unwrap(), turned.next());
                    assert!(wanted.factor.is_near(found.factor), "{seed} {level}: {found:?} {wanted:?}");
                    assert_eq!((&found.set, rest), (&wanted.set, None), "{seed} {level}");
                    closed += 1;
                }
            }
        }
        assert!(closed >= 36, "{closed}");
    }
}
