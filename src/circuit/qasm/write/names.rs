//! The names of qubits and measured bits.

use crate::circuit::Register;

/// The names of all elements of a list of registers, in one string.
pub(super) struct Names {
    text: String,
    ends: Vec<u32>,
}

impl Names {
    /// As elements of their registers: `work[3]`.
    pub(super) fn new(registers: &[Register]) -> Self {
        Self::spelled(registers, "[", "]")
    }

    /// As names of their own: `work_3`.
    pub(super) fn single(registers: &[Register]) -> Self {
        Self::spelled(registers, "_", "")
    }

    fn spelled(registers: &[Register], open: &str, close: &str) -> Self {
        use std::fmt::Write;
        let mut names = Self { text: String::new(), ends: vec![0] };
        for register in registers {
            for at in 0..register.len {
                write!(names.text, "{}{open}{at}{close}", register.name).expect("a string takes everything");
                names.ends.push(u32::try_from(names.text.len()).expect("names below 4 GiB"));
            }
        }
        names
    }

    pub(super) fn get(&self, index: usize) -> &str {
        &self.text[self.ends[index] as usize..self.ends[index + 1] as usize]
    }
}
