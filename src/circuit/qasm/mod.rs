//! OpenQASM: [`mod@write`] gives text, [`mod@read`] takes it; neither imports the other.

pub mod read;
pub mod write;
