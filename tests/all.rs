//! Every integration test, in one binary: one module a subject.

#![allow(
    clippy::approx_constant,
    clippy::excessive_precision,
    reason = "published tables are typed as they are printed"
)]

mod suite;
