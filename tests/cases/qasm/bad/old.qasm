OPENQASM 2.0;
>>>include "stdgates.inc";<<< // Q005
include "qelib1.inc";
qreg q[2];
creg c[2];
>>>qubit<<< r; // Q008
ctrl >>>@<<< x q[0],q[1]; // Q001
>>>gphase<<<(1) q[0]; // Q008
measure q -> c;
if (>>>c<<< == 3) x q[0]; // Q021
if (c == >>>4<<<) x q[0]; // Q021
>>>opaque<<< magic a,b; // Q003
