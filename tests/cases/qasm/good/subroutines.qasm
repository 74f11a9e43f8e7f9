OPENQASM 3.0;
include "stdgates.inc";
const int width = 2;
def parity(qubit[width] a, qubit t) { for int i in [0:width - 1] { cx a[i], t; } }
def look(qubit[2] a, qubit t, angle p) -> bit { parity(a, t); rz(p) t; return measure t; }
def erase(qubit a) -> bit { h a; return measure a; }
qubit[3] q;
bit[2] c;
parity(q[0:1], q[2]);
c[0] = look(q[{2, 1}], q[0], pi / 8);
bit d = erase(q[0]);
if (d) { c[1] = erase(q[1]); reset q[0]; }
// ---- expect
// qubits q[3]
// bits c[2] d[1]
// x q[0] : q[2]
// x q[1] : q[2]
// x q[2] : q[0]
// x q[1] : q[0]
// rz(0.392699) q[0]
// measure q[0] -> c[0]
// h q[0]
// measure q[0] -> d[0]
// if d[0]: h q[1]
// if d[0]: measure q[1] -> c[1]
// if d[0]: reset q[0]
