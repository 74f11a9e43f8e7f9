OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
bit[2] c;
c = measure q;
if (c[0] >>>&&<<< c[1]) x q[0]; // Q021
if (!c[0] >>>||<<< c[1] == 0) x q[0]; // Q021
if (>>>c<<< == 3) x q[0]; // Q021
if (c == >>>4<<<) x q[0]; // Q021
if (c[0] == >>>"10"<<<) x q[0]; // Q021
