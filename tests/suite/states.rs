//! The OpenQASM reader, and the audits in superposition.

mod reader;
