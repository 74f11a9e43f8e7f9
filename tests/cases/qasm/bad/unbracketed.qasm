OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
bit[2] c;
c = measure q;
if (c[0]) x q[0]; else >>>if<<< (c[1]) z q[0]; // Q001
x q[0];
