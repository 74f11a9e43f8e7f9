// An angle without exact amplitudes is judged in floating point.
//! bits 1
//! clause 1
//! expect differs
//! got off by
OPENQASM 3.0;
include "stdgates.inc";
qubit[1] search;
rz(0.3) search[0];
