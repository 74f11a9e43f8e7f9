//! Searches whose iterations turn by angles of their own: tuned to be certain, or not to overshoot.
//!
//! How far an iteration turns is then the search's own affair, so there is no state that it must have on the way. All of it
//! is followed. At its end all marked strings must be alike and all others too, with every other qubit clean, and a marked
//! string must be likelier than at the start. What is told is the probability of the marked strings in that state.

use super::{End, Follower, TOLERANCE};
use crate::circuit::{Circuit, Op};
use crate::judge::audit::Outcome;
use crate::judge::audit::state::amplitude::multiples;

/// Whether some gate of a circuit turns by an angle of its own.
pub(super) fn is_tuned(circuit: &Circuit) -> bool {
    let of_its_own = |angle| multiples(angle, std::f64::consts::FRAC_PI_4).is_none();
    let turns = circuit.gates().iter().filter(|gate| matches!(gate.op(), Op::P | Op::Rz));
    turns.filter_map(|gate| circuit.angle(gate)).any(of_its_own)
}

impl Follower<'_> {
    /// Follows all gates before the last measurement, which begins at `tail`.
    pub(super) fn follow_tuned(&mut self, tail: usize) -> Result<(), End> {
        let circuit = self.circuit;
        for block in circuit.blocks() {
            let end = (block.gates.end as usize).min(tail);
            let gates = circuit.gates().get(block.gates.start as usize..end).unwrap_or(&[]);
            for turn in 0..block.repeat {
                if self.machine.updates() > self.work_limit {
                    let turns = block.repeat;
                    return Err(End::Undecided(format!(
                        "{turn} of {turns} turns of a loop were followed within the work limit, and only the end of a \
                         search with angles of its own is judged"
                    )));
                }
                self.run(gates)?;
                self.verdict.iterations += u64::from(block.repeat > 1);
            }
        }
        self.verdict.iterations_checked = self.verdict.iterations;
        let amplitudes = self.amplitudes()?;
        let sums = self.profile.sums(|value| amplitudes[value]);
        self.verdict.success = sums.success;
        self.verdict.deviation = self.profile.unlikeness(&sums, |value| amplitudes[value]);
        if self.verdict.deviation > TOLERANCE {
            return Err(End::Differs("at the end not all solutions are alike, or not all other strings".to_owned()));
        }
        let at_start = self.profile.success(0);
        if sums.success <= at_start + TOLERANCE {
            return Err(End::Differs("at the end a solution is no likelier than at the start".to_owned()));
        }
        self.verdict.outcome = Outcome::Equal;
        self.verdict.notes.push(format!(
            "its iterations turn by angles of their own, so its end was judged: all solutions are alike, and so are all \
             other strings, within {TOLERANCE:e}"
        ));
        Ok(())
    }
}
