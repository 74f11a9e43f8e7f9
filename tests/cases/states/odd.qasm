// An odd number of two bits, by phases only.
//! bits 2
//! clause 1 2
//! clause -1 -2
//! expect equal
OPENQASM 3.0;
include "stdgates.inc";
qubit[2] search;
s search[0]; z search[1]; s search[0];
