OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
bit[2] c;
>>>while<<< (true) { x q[0]; } // Q003
>>>switch<<< (c) { case 1 { x q[0]; } } // Q003
>>>int<<< i = 3; // Q003
>>>input<<< angle[32] phi; // Q003
p(phi) q[0];
>>>output<<< bit r; // Q003
>>>box<<< { x q[0]; } // Q003
>>>delay<<<[100ns] q[0]; // Q003
>>>extern<<< f(int) -> int; // Q003
>>>opaque<<< g a; // Q003
>>>end<<<; // Q003
x q[>>>2<<<]; // Q013
