OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
bit c;
c = measure q[0];
if (c) { x q[0] >>>}<<< // Q001
if (c) { >>>x ;<<< z q[0]; z q[>>>9<<<]; } // Q011 Q013
x q[>>>3<<<]; // Q013
