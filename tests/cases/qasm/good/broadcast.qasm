OPENQASM 3.0;
include "stdgates.inc";
qubit[3] a;
qubit[3] b;
qubit c;
h a;
cx a, b;
cx c, b;
cx a[0:1], b[1:2];
cx a[2:-1:0], b;
x a[-1];
reset b;
// ---- expect
// qubits a[3] b[3] c[1]
// bits
// h a[0]
// h a[1]
// h a[2]
// x a[0] : b[0]
// x a[1] : b[1]
// x a[2] : b[2]
// x c[0] : b[0]
// x c[0] : b[1]
// x c[0] : b[2]
// x a[0] : b[1]
// x a[1] : b[2]
// x a[2] : b[0]
// x a[1] : b[1]
// x a[0] : b[2]
// x a[2]
// reset b[0]
// reset b[1]
// reset b[2]
