OPENQASM 3.0;
include "stdgates.inc";
qubit[2] größe;
phase(1) größe[0]; u1(2) größe[0]; cphase(3) größe[0], größe[1]; CX größe[0], größe[1]; cp(4) größe[0], größe[1]; cry(5) größe[0], größe[1]; crz(6) größe[0], größe[1];
// ---- expect
// qubits größe[2]
// bits
// p(1.000000) größe[0]
// p(2.000000) größe[0]
// p(3.000000) größe[0] : größe[1]
// x größe[0] : größe[1]
// p(4.000000) größe[0] : größe[1]
// ry(5.000000) größe[0] : größe[1]
// rz(6.000000) größe[0] : größe[1]
