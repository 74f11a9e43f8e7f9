//! Phase folding: rotations about equal parities become one.
//!
//! Between Hadamard gates a circuit of CNOTs, flips and phases keeps in each qubit a parity of path variables (one for
//! each input and each Hadamard gate), and multiplies by a phase that is a sum over parities: the rotations by multiples
//! of pi/4 on one parity add up, wherever they stand (M. Amy, D. Maslov, M. Mosca, "Polynomial-time T-depth optimization
//! of Clifford+T circuits via matroid partitioning", IEEE TCAD 33, 2014, section III). The sum is put at the first of
//! them; a rotation of a constant goes.
//!
//! A parity is known by the XOR of 128 drawn bits for each variable: two different ones look alike with a chance of
//! 2^-128. A group is left alone where its sum would need a global phase. Circuits with conditions, or with gates of two
//! controls, are returned as they are.

use rustc_hash::FxHashMap;

use super::{Fate, rebuilt};
use crate::circuit::{Circuit, Gate, Op, PerQubit};
use crate::random::SplitMix64;

/// The circuit with rotations about equal parities merged.
pub fn fold(circuit: Circuit) -> Circuit {
    let foldable = |gate: &Gate| {
        let plain = circuit.controls(gate).iter().all(|control| !control.is_negated());
        gate.condition().is_none() && plain && gate.control_count() <= usize::from(matches!(gate.op(), Op::X | Op::Z))
    };
    let mut fates = vec![Fate::Kept; circuit.gates().len()];
    if circuit.gates().iter().all(foldable) {
        for block in circuit.blocks() {
            fold_block(&circuit, block.gates.start as usize..block.gates.end as usize, &mut fates);
        }
    }
    rebuilt(circuit, &fates)
}

/// A qubit's parity of path variables, complemented or not.
#[derive(Clone, Copy, PartialEq, Eq)]
struct Parity {
    variables: u128,
    complemented: bool,
}

/// The rotations about one parity.
struct Group {
    /// Their gates, with the turn in eighths and whether the parity was complemented there.
    members: Vec<(usize, u8, bool)>,
}

fn fold_block(circuit: &Circuit, gates: std::ops::Range<usize>, fates: &mut [Fate]) {
    let mut random = SplitMix64::new(0x7061_7269_7479);
    let mut fresh = || Parity {
        variables: u128::from(random.next_u64()) << 64 | u128::from(random.next_u64()),
        complemented: false,
    };
    let mut state: PerQubit<Parity> = (0..circuit.qubit_count()).map(|_| fresh()).collect::<Vec<_>>().into();
    let mut places: FxHashMap<u128, usize> = FxHashMap::default();
    let mut groups: Vec<Group> = Vec::new();
    for at in gates {
        let gate = &circuit.gates()[at];
        let target = gate.target();
        match (gate.op(), circuit.controls(gate)) {
            (Op::X, [control]) => {
                let source = state[control.qubit()];
                state[target].variables ^= source.variables;
                state[target].complemented ^= source.complemented;
            }
            (Op::X, _) => state[target].complemented ^= true,
            (Op::H | Op::Ry, _) => state[target] = fresh(),
            (Op::Measure, _) => {}
            (Op::Reset, _) => state[target] = Parity { variables: 0, complemented: false },
            (op, []) => {
                if let Some(turn) = op.eighths() {
                    let Parity { variables, complemented } = state[target];
                    let place = *places.entry(variables).or_insert(groups.len());
                    if place == groups.len() {
                        groups.push(Group { members: Vec::new() });
                    }
                    groups[place].members.push((at, turn, complemented));
                }
            }
            // A controlled Z is diagonal, and so are other angles.
            _ => {}
        }
    }
    let constant = places.get(&0).copied();
    for (place, group) in groups.iter().enumerate() {
        merge(group, constant == Some(place), fates);
    }
}

/// A turn t of the complement of p is a turn of everything by t and of p by -t.
fn merge(group: &Group, constant: bool, fates: &mut [Fate]) {
    let &[(first, _, complemented), ..] = group.members.as_slice() else { return };
    let mut sum = 0u8;
    let mut everywhere = 0u8;
    for &(_, turn, other) in &group.members {
        if other == complemented {
            sum = (sum + turn) % 8;
        } else {
            sum = (sum + 8 - turn) % 8;
            everywhere = (everywhere + turn) % 8;
        }
    }
    if constant {
        // The parity is 0: the first qubit holds `complemented`.
        everywhere = (everywhere + if complemented { sum } else { 0 }) % 8;
        sum = 0;
    }
    let rotations = group.members.iter().filter(|(_, turn, _)| turn % 2 == 1).count();
    let saved = rotations > usize::from(sum % 2 == 1) || (sum == 0 && !group.members.is_empty());
    if everywhere == 0 && saved {
        for &(at, _, _) in &group.members {
            fates[at] = Fate::Dropped;
        }
        fates[first] = Fate::Turn(sum);
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::circuit::figures::figures;
    use crate::circuit::{Control, QubitId};

    fn t_count(push: impl FnOnce(&mut Circuit, &[QubitId])) -> u64 {
        let mut circuit = Circuit::new();
        let q = circuit.add_qubits("search", 3);
        push(&mut circuit, &q);
        figures(&fold(circuit)).t_count
    }

    #[test]
    fn rotations_about_equal_parities_meet_wherever_they_stand() {
        let cx = |c: &mut Circuit, a, b| c.push(Op::X, &[Control::on(a)], b);
        let pair = |second: Op| {
            t_count(|c, q| {
                cx(c, q[0], q[1]);
                c.push(Op::T, &[], q[1]);
                cx(c, q[0], q[1]);
                cx(c, q[1], q[0]);
                c.push(second, &[], q[0]);
            })
        };
        assert_eq!((pair(Op::T), pair(Op::Tdg), pair(Op::S)), (0, 0, 1));
        let apart = t_count(|c, q| {
            c.push(Op::T, &[], q[0]);
            c.push(Op::H, &[], q[0]);
            c.push(Op::T, &[], q[0]);
        });
        assert_eq!(apart, 2);
    }

    #[test]
    fn constants_turn_nothing_and_global_phases_are_not_made() {
        let cleared = t_count(|c, q| {
            c.push(Op::Reset, &[], q[0]);
            c.push(Op::T, &[], q[0]);
        });
        assert_eq!(cleared, 0);
        let global = t_count(|c, q| {
            c.push(Op::T, &[], q[0]);
            c.push(Op::X, &[], q[0]);
            c.push(Op::T, &[], q[0]);
        });
        assert_eq!(global, 2);
    }
}
