//! (to be written)
pub mod whole;
