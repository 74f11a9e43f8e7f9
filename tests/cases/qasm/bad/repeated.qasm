OPENQASM 3.0;
include "stdgates.inc";
qubit[12] q;
>>>ccx q[0], q[1], q[0];<<< // Q014
>>>cx q, q;<<< // Q014
>>>ctrl(9) @ x q[0], q[1], q[2], q[3], q[4], q[5], q[6], q[7], q[8], q[3];<<< // Q014
