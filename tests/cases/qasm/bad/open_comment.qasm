OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
x q[0];
>>>/*<<< z q[0]; // Q002
