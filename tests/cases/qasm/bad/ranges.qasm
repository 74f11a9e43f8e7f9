OPENQASM 3.0;
include "stdgates.inc";
qubit[4] q;
x q[>>>-5<<<]; // Q013
x q[0:>>>4<<<]; // Q013
x >>>q[3:1]<<<; // Q024
x >>>q[0:0:3]<<<; // Q024
x q[>>>pi<<<]; // Q019
x q[>>>1.5<<<]; // Q019
