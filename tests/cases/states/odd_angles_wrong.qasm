// The same with one angle off by a thousandth.
//! bits 1
//! clause 1
//! expect differs
OPENQASM 3.0;
include "stdgates.inc";
qubit[1] search;
qubit[1] work;
ry(0.7) work[0];
rz(0.3) search[0];
rz(pi - 0.3) search[0];
ry(-0.701) work[0];
