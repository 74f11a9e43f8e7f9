OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
x >>>$<<<q[0]; // Q002
x q[>>>5<<<]; // Q013
