OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
x q[>>>2<<<]; // Q013
>>>flip<<< q[0]; // Q008
>>>cx q[0];<<< // Q011
>>>cx q[0], q[0];<<< // Q014
x >>>r<<<; // Q006
