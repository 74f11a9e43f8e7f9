OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
x q[0]
>>>y<<< q[1]; // Q001
z q[0];
