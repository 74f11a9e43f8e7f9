//! The superposition the search begins from, as plain data.

use serde::{Deserialize, Serialize};

/// The superposition the search begins from: all its basis states have the same amplitude.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Start {
    /// Every bit string of the search register.
    AllStrings,
    /// The strings that each of these parts allows; no qubit is in two parts, and one in no part takes both values.
    Parts(Vec<Part>),
}

/// A condition on some qubits of the search register, given by their places in it.
#[derive(Clone, PartialEq, Eq, Debug, Serialize, Deserialize)]
#[serde(rename_all = "kebab-case")]
pub enum Part {
    /// The qubits, low bit first, spell a number below `size`; 1 <= `size` <= 2^(number of qubits).
    Below {
        /// Places in the search register, low bit first.
        qubits: Vec<u32>,
        /// How many codes are allowed.
        size: u64,
    },
    /// Exactly `ones` of the qubits are 1.
    Weight {
        /// Places in the search register.
        qubits: Vec<u32>,
        /// How many of them are 1; at most their number.
        ones: u32,
    },
}

impl Part {
    /// The qubits it speaks of, as places in the search register.
    pub fn qubits(&self) -> &[u32] {
        match self {
            Self::Below { qubits, .. } | Self::Weight { qubits, .. } => qubits,
        }
    }

    /// Whether the part allows these values of its qubits.
    pub fn allows(&self, value: impl Fn(u32) -> bool) -> bool {
        match self {
            Self::Below { qubits, size } => {
                let code = qubits.iter().enumerate().map(|(at, &qubit)| u64::from(value(qubit)) << at).sum::<u64>();
                code < *size
            }
            Self::Weight { qubits, ones } => qubits.iter().filter(|&&qubit| value(qubit)).count() == *ones as usize,
        }
    }

    /// Whether the part makes sense by itself: it has qubits, none of them twice, and a size that they can spell.
    pub(super) fn is_sound(&self) -> bool {
        let qubits = self.qubits();
        let fits = match self {
            Self::Below { size, .. } => qubits.len() < 64 && (1..=1u64 << qubits.len()).contains(size),
            Self::Weight { ones, .. } => *ones as usize <= qubits.len(),
        };
        !qubits.is_empty() && fits
    }
}

impl Start {
    /// Whether the start state holds this string of the search register.
    pub fn allows(&self, value: impl Fn(u32) -> bool) -> bool {
        match self {
            Self::AllStrings => true,
            Self::Parts(parts) => parts.iter().all(|part| part.allows(&value)),
        }
    }

    /// The parts; none where every string is in it.
    pub fn parts(&self) -> &[Part] {
        match self {
            Self::AllStrings => &[],
            Self::Parts(parts) => parts,
        }
    }
}
