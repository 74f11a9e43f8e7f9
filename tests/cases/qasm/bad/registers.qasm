OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
bit[2] c;
x >>>c[0]<<<; // Q016
>>>q[0]<<< = measure q[1]; // Q016
reset >>>c<<<; // Q016
