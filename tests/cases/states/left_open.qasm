// A work qubit is left in a superposition.
//! bits 1
//! clause 1
//! expect differs
//! got superposition of 2 basis states
OPENQASM 3.0;
include "stdgates.inc";
qubit[1] search; qubit[1] work;
z search[0]; h work[0];
