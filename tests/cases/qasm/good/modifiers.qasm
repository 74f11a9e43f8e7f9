OPENQASM 3.0;
include "stdgates.inc";
// Control qubits are prepended in the order of the modifiers, outermost first.
qubit[5] q;
ctrl @ x q[0], q[1];
ctrl(3) @ x q[0], q[1], q[2], q[3];
negctrl @ x q[0], q[1];
negctrl @ ctrl @ z q[0], q[1], q[2];
ctrl @ negctrl @ negctrl(1) @ cx q[0], q[1], q[2], q[3], q[4];
inv @ s q[0];
inv @ ctrl @ t q[0], q[1];
ctrl @ inv @ inv @ tdg q[0], q[1];
inv @ rz(0.5) q[0];
// ---- expect
// qubits q[5]
// bits
// x q[0] : q[1]
// x q[0] q[1] q[2] : q[3]
// x !q[0] : q[1]
// z !q[0] q[1] : q[2]
// x q[0] !q[1] !q[2] q[3] : q[4]
// sdg q[0]
// tdg q[0] : q[1]
// tdg q[0] : q[1]
// rz(-0.500000) q[0]
