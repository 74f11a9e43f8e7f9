//! Narrowing: what is computed is right by brute force, and as much is computed as is known to be possible.

mod claims;
mod commands;
mod equations;
mod families;
mod obligations;
mod reading;
mod sizes;
mod table;
mod withheld;
