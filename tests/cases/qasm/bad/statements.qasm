OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
>>>gate<<< twice a { x a; x a; } // Q003
twice q[0];
>>>def<<< f(qubit a) -> bit { return measure a; } // Q003
>>>while<<< (true) { x q[0]; } // Q003
>>>int<<< i = 3; // Q003
>>>const<<< float half = pi / 2; // Q003
p(half) q[0];
>>>let<<< r = q[0:1]; // Q003
x r;
x q[>>>2<<<]; // Q013
