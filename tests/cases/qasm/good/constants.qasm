OPENQASM 3.0;
include "stdgates.inc";
const uint[4] n = 3;
const int last = n - 1;
const float[64] turn = tau / 2 ** n;
const angle[8] eighth = pi / 4;
qubit[n] q;
bit[last] c;
p(turn) q[last];
p(-eighth * 2) q[0];
for int i in {last, 0} { rz(i * 0.5) q[i]; }
for int i in [0:1] { const int j = i + 1; cx q[i], q[j]; }
// ---- expect
// qubits q[3]
// bits c[2]
// p(0.785398) q[2]
// p(-1.570796) q[0]
// rz(1.000000) q[2]
// rz(0.000000) q[0]
// x q[0] : q[1]
// x q[1] : q[2]
