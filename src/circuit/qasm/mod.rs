//! OpenQASM: [`mod@write`] and [`mod@write_two`] give text of version 3 and 2, [`mod@read`] takes either; writing and
//! reading do not import each other.

pub mod gadget;
pub mod read;
pub mod write;
pub mod write_two;
