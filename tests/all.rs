//! Every integration test, in one binary: one module a subject.

mod suite;
