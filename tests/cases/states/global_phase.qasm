// The same with a global phase of e^(i pi/4): free for a bare oracle.
//! bits 2
//! clause 1 2
//! clause -1 -2
//! expect equal
//! note global phase
OPENQASM 3.0;
include "stdgates.inc";
qubit[2] search;
s search[0]; z search[1]; s search[0]; t search[1]; x search[1]; t search[1]; x search[1];
