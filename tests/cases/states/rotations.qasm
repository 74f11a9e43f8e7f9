// Rotations by multiples of pi/4 are exact; cx by h, crz and p.
//! bits 2
//! clause 1
//! clause 2
//! expect equal
OPENQASM 3.0;
include "stdgates.inc";
qubit[2] search;
cp(pi/2) search[0], search[1]; crz(pi/2) search[0], search[1]; crz(-pi/2) search[0], search[1]; cp(pi/2) search[1], search[0]; ry(pi/2) search[0]; ry(-pi/2) search[0]; rz(pi/4) search[0]; rz(-pi/4) search[0];
