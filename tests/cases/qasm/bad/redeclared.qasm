OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
bit[2] >>>q<<<; // Q007
qubit >>>x<<<; // Q007
