OPENQASM 3.0;
include "stdgates.inc";
qubit[3] a;
qubit[2] b;
bit[2] c;
cx a, >>>b<<<; // Q015
>>>c = measure a;<<< // Q015
