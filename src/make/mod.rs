//! The maker: from a problem to an oracle circuit.

pub mod lower;
pub mod network;
pub mod start;
