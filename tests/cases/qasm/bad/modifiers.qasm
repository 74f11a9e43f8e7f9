OPENQASM 3.0;
include "stdgates.inc";
qubit[4] q;
>>>negctrl(2) @<<< x q[0], q[1], q[2]; // Q020
>>>ctrl(0) @<<< x q[0]; // Q020
>>>ctrl(1.5) @<<< x q[0], q[1]; // Q019
ctrl @ >>>pow(0.5) @<<< s q[0], q[1]; // Q020
>>>pow(1/2) @<<< z q[0]; // Q020
>>>pow(q) @<<< z q[0]; // Q031
