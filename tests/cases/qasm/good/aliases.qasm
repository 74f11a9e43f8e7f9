OPENQASM 3.0;
include "stdgates.inc";
// An alias names elements in an order of its own; indices into it start anew.
qubit[4] q;
qubit r;
bit[3] c;
let even = q[0:2:3];
let all = even ++ r ++ q[{3, 1}];
let part = all[1:2];
x even[1];
cx part[0], part[1];
h all;
let low = c[0:1];
low = measure part;
if (low[1]) { let inner = q[3]; x inner; }
// ---- expect
// qubits q[4] r[1]
// bits c[3]
// x q[2]
// x q[2] : r[0]
// h q[0]
// h q[2]
// h r[0]
// h q[3]
// h q[1]
// measure q[2] -> c[0]
// measure r[0] -> c[1]
// if c[1]: x q[3]
