// Angles without exact amplitudes, in superposition, that undo each other.
//! bits 1
//! clause 1
//! expect equal
//! note in floating point
OPENQASM 3.0;
include "stdgates.inc";
qubit[1] search;
qubit[1] work;
ry(0.7) work[0];
rz(0.3) search[0];
rz(pi - 0.3) search[0];
ry(-0.7) work[0];
