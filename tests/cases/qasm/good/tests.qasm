OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
bit[2] c;
const int yes = 1;
c[0] = measure q[0];
if ((c[0])) x q[1];
if (!(c[0] == 1)) x q[1];
if (c[0] == "1") x q[1];
if (c[0] != yes) x q[1];
if (c[0] == yes - 1) { z q[1]; } else { h q[1]; }
// ---- expect
// qubits q[2]
// bits c[2]
// measure q[0] -> c[0]
// if c[0]: x q[1]
// if !c[0]: x q[1]
// if c[0]: x q[1]
// if !c[0]: x q[1]
// if !c[0]: z q[1]
// if c[0]: h q[1]
