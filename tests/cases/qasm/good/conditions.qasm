OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
bit[2] c;
bit d;
c = measure q;
d = measure q[0];
if (c[0]) x q[0];
if (!c[0]) x q[0];
if (c[1] == 1) { x q[0]; z q[1]; }
if (c[1] == 0) x q[0]; else { h q[1]; }
if (c[1] != true) x q[1];
if (c[1] == false) { x q; }
if (d) reset q[0];
// ---- expect
// qubits q[2]
// bits c[2] d[1]
// measure q[0] -> c[0]
// measure q[1] -> c[1]
// measure q[0] -> d[0]
// if c[0]: x q[0]
// if !c[0]: x q[0]
// if c[1]: x q[0]
// if c[1]: z q[1]
// if !c[1]: x q[0]
// if c[1]: h q[1]
// if !c[1]: x q[1]
// if !c[1]: x q[0]
// if !c[1]: x q[1]
// if d[0]: reset q[0]
