//! The maker: from a problem to an oracle circuit.

pub mod lower;
pub mod narrow;
pub mod network;
pub mod start;
