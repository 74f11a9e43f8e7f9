// A mark qubit whose phase depends on it: X and then Z.
//! bits 1
//! clause 1
//! expect differs
//! got phase
OPENQASM 3.0;
include "stdgates.inc";
qubit[1] search; qubit[1] mark;
cx search[0], mark[0]; z mark[0];
