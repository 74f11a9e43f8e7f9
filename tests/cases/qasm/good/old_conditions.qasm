OPENQASM 2.0;
include "qelib1.inc";
// A register is compared as a whole; a bit that nothing has written is 0.
qreg q[3];
creg c[3];
if (c == 0) x q[0];
if (c == 1) y q[0];
measure q[1] -> c[1];
if (c == 2) z q[2];
if (c == 0) h q[2];
if (c == 3) h q[0];
// ---- expect
// qubits q[3]
// bits c[3]
// x q[0]
// measure q[1] -> c[1]
// if c[1]: z q[2]
// if !c[1]: h q[2]
