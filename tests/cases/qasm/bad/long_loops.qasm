OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
>>>for int i in [0:1000000000] { x q[i - i]; }<<< // Q018
