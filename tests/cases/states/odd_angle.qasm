// An angle that exact amplitudes do not hold.
//! bits 1
//! clause 1
//! expect error A022
OPENQASM 3.0;
include "stdgates.inc";
qubit[1] search;
rz(0.3) search[0];
