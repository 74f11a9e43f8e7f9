//! OpenQASM: [`write`] gives text, [`read`] takes it; neither imports the other.

pub mod read;
pub mod write;
