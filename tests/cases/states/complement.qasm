// The complement is marked: a global sign.
//! bits 2
//! clause 1 2
//! clause -1 -2
//! expect complement
OPENQASM 3.0;
include "stdgates.inc";
qubit[2] search;
x search[0]; z search[0]; x search[0]; h search[1]; x search[1]; h search[1];
