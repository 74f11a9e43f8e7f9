OPENQASM 3.0;
include "stdgates.inc";
qreg q[2];
creg c[2];
qreg a;
h q;
measure q -> c;
// ---- expect
// qubits q[2] a[1]
// bits c[2]
// h q[0]
// h q[1]
// measure q[0] -> c[0]
// measure q[1] -> c[1]
