//! Tallymark turns a constraint problem into a quantum search that can be trusted: it *tallies* the solutions with
//! classical solvers and builds the reversible circuit that *marks* them, then proves that the two agree.

#![cfg_attr(
    test,
    allow(
        clippy::approx_constant,
        clippy::excessive_precision,
        reason = "published tables are typed as they are printed"
    )
)]

// The floor: every room may use these, and these use no room.
pub mod budget;
pub mod columns;
pub mod diag;
pub mod id;
pub mod random;
pub mod span;

// The rooms, in the order data flows through them.
pub mod source;
// Text became the one meaning.
pub mod problem;
// Which bits are searched is plain data.
pub mod places;
// Definitions are read back from clauses.
pub mod structure;
// The maker turns the problem into a circuit.
pub mod circuit;
pub mod make;
// The judge counts and audits, without the maker.
pub mod judge;
pub mod sat;
// Oracle and tally become a search.
pub mod search;

pub mod cli;
pub mod ledger;
pub mod pipeline;
pub mod report;
