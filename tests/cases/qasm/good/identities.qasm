OPENQASM 3.0;
include "stdgates.inc";
// Gates outside the set are written by exact identities; controls stand on the inner gate.
qubit[3] q;
y q[0];
cy q[0], q[1];
sx q[0];
inv @ sx q[0];
ctrl @ sx q[1], q[0];
rx(pi/2) q[0];
crx(0.25) q[0], q[1];
swap q[0], q[1];
cswap q[2], q[0], q[1];
// ---- expect
// qubits q[3]
// bits
// sdg q[0]
// x q[0]
// s q[0]
// sdg q[1]
// x q[0] : q[1]
// s q[1]
// h q[0]
// s q[0]
// h q[0]
// h q[0]
// sdg q[0]
// h q[0]
// h q[0]
// s q[1] : q[0]
// h q[0]
// h q[0]
// rz(1.570796) q[0]
// h q[0]
// h q[1]
// rz(0.250000) q[0] : q[1]
// h q[1]
// x q[1] : q[0]
// x q[0] : q[1]
// x q[1] : q[0]
// x q[1] : q[0]
// x q[2] q[0] : q[1]
// x q[1] : q[0]
