OPENQASM 3.0;
include "stdgates.inc";
// A power of a gate of finite order, or of one with an angle, is one gate.
qubit[3] q;
pow(3) @ t q[0];
pow(-3) @ t q[0];
pow(1000000007) @ x q[0];
pow(4) @ s q[0];
pow(-2) @ p(0.25) q[0];
inv @ pow(3) @ ctrl @ rz(0.5) q[0], q[1];
pow(2) @ sx q[0];
pow(2) @ cswap q[0], q[1], q[2];
pow(0) @ U(1, 2, 3) q[0];
pow(2) @ ctrl @ gphase(pi / 8) q[1];
// ---- expect
// qubits q[3]
// bits
// s q[0]
// t q[0]
// z q[0]
// t q[0]
// x q[0]
// p(-0.500000) q[0]
// rz(-1.500000) q[0] : q[1]
// h q[0]
// z q[0]
// h q[0]
// t q[1]
