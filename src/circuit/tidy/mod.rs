//! Tidying: fewer gates for the same operation.
//!
//! Each pass takes a circuit and gives one with the same registers and regions that does the same, exactly; the audit is
//! the judge of that. A block that is repeated is tidied on its own.

mod cancel;
mod fold;

use crate::circuit::{Block, Circuit, Op, Region};

pub use cancel::cancel;
pub use fold::fold;

/// What becomes of a gate.
#[derive(Clone, Copy, PartialEq, Eq, Debug)]
enum Fate {
    Kept,
    Dropped,
    /// Gates without controls take its place, on the same target.
    Became(&'static [Op]),
}

/// The circuit with each gate after its fate.
fn rebuilt(circuit: &Circuit, fates: &[Fate]) -> Circuit {
    let mut gates = Vec::with_capacity(circuit.gates.len());
    let mut moved = Vec::with_capacity(circuit.gates.len() + 1);
    for (gate, fate) in circuit.gates.iter().zip(fates) {
        moved.push(gates.len() as u32);
        match fate {
            Fate::Kept => gates.push(*gate),
            Fate::Dropped => {}
            Fate::Became(ops) => gates.extend(ops.iter().map(|&op| {
                let mut new = *gate;
                new.op = op;
                new
            })),
        }
    }
    moved.push(gates.len() as u32);
    let range = |range: &std::ops::Range<u32>| moved[range.start as usize]..moved[range.end as usize];
    let region = |region: &Region| Region { gates: range(&region.gates), ..region.clone() };
    let block = |block: &Block| Block { gates: range(&block.gates), repeat: block.repeat };
    Circuit {
        qubits: circuit.qubits.clone(),
        measured: circuit.measured.clone(),
        regions: circuit.regions.iter().map(region).filter(|region| !region.gates.is_empty()).collect(),
        gates,
        controls: circuit.controls.clone(),
        angles: circuit.angles.clone(),
        blocks: circuit.blocks.iter().map(block).filter(|block| !block.gates.is_empty()).collect(),
    }
}
