OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
>>>u3<<<(1, 2, 3) q[0]; // Q010
>>>U<<<(1, 2, 3) q[0]; // Q010
>>>gphase<<<(1); // Q010
>>>cu<<<(1, 2, 3, 4) q[0], q[1]; // Q010
