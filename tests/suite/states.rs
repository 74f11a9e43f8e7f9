//! The OpenQASM reader, and the audits in superposition.

mod oracles;
mod reader;
mod searches;
mod standard;
