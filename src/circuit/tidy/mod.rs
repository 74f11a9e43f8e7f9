//! Tidying: fewer gates for the same operation.
//!
//! Each pass takes a circuit and gives one with the same registers and regions that does the same, exactly; the audit is
//! the judge of that. A block that is repeated is tidied on its own.

mod cancel;
mod fold;

use std::collections::VecDeque;

use crate::circuit::{Circuit, Gate, Op};

pub use cancel::cancel;
pub use fold::fold;

/// What becomes of a gate.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Fate {
    Kept,
    Dropped,
    /// A turn by so many multiples of pi/4 takes its place, on the same target.
    Turn(u8),
}

const _: () = assert!(size_of::<Fate>() <= 2);

/// The circuit with each gate after its fate, in the memory of the old one.
fn rebuilt(mut circuit: Circuit, fates: &[Fate]) -> Circuit {
    let mut moved = Vec::with_capacity(circuit.gates.len() + 1);
    // A turn may be two gates: those for which there is no room yet wait.
    let mut waiting: VecDeque<Gate> = VecDeque::new();
    let mut kept = 0;
    for (at, fate) in fates.iter().enumerate() {
        moved.push((kept + waiting.len()) as u32);
        let gate = circuit.gates[at];
        match fate {
            Fate::Kept => waiting.push_back(gate),
            Fate::Dropped => {}
            Fate::Turn(eighths) => waiting.extend(Op::turning(*eighths).iter().map(|&op| Gate { op, ..gate })),
        }
        while kept <= at
            && let Some(gate) = waiting.pop_front()
        {
            circuit.gates[kept] = gate;
            kept += 1;
        }
    }
    circuit.gates.truncate(kept);
    circuit.gates.extend(waiting);
    moved.push(circuit.gates.len() as u32);
    let range = |range: &std::ops::Range<u32>| moved[range.start as usize]..moved[range.end as usize];
    circuit.regions.iter_mut().for_each(|region| region.gates = range(&region.gates));
    circuit.regions.retain(|region| !region.gates.is_empty());
    circuit.blocks.iter_mut().for_each(|block| block.gates = range(&block.gates));
    circuit.blocks.retain(|block| !block.gates.is_empty());
    circuit
}
