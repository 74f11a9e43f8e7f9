OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
bit[2] c;
if (>>>c[0]<<<) x q[0]; // Q022
c = measure q;
if (>>>c<<<) x q[0]; // Q021
if (c[0] == >>>2<<<) x q[0]; // Q021
if (c[0]) { if (>>>c[1]<<<) { x q[0]; } } // Q021
if (c[0]) { >>>c[0]<<< = measure q[0]; } // Q021
if (>>>q[0]<<<) x q[0]; // Q016
