OPENQASM 2.0;
include "qelib1.inc";
qreg q[2];
>>>rzz<<<(1) q[0],q[1]; // Q010
>>>cu3<<<(1,2,3) q[0],q[1]; // Q035
>>>ctrl<<< q[0]; // Q008
