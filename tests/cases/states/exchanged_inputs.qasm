// The inputs are exchanged under a predicate that is symmetric in them.
//! bits 2
//! clause 1 2
//! clause -1 -2
//! expect differs
//! got search[
OPENQASM 3.0;
include "stdgates.inc";
qubit[2] search;
z search[0]; z search[1]; swap search[0], search[1];
