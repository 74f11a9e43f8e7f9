OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
>>>measure q[0];<<< // Q023
