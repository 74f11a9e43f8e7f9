OPENQASM 3.0;
include "stdgates.inc";
qubit[3] q;
x q[0]; z q[1]; h q[2]; s q[0]; sdg q[1]; t q[2]; tdg q[0]; id q[1];
cx q[0], q[1]; cz q[1], q[2]; ch q[0], q[2]; ccx q[0], q[1], q[2];
// ---- expect
// qubits q[3]
// bits
// x q[0]
// z q[1]
// h q[2]
// s q[0]
// sdg q[1]
// t q[2]
// tdg q[0]
// x q[0] : q[1]
// z q[1] : q[2]
// h q[0] : q[2]
// x q[0] q[1] : q[2]
