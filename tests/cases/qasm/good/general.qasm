OPENQASM 3.0;
include "stdgates.inc";
// Any gate on one qubit, and the phase that a control makes visible.
qubit[2] q;
U(pi, 0, pi) q[0];
U(0, 0, pi / 4) q[0];
U(0.5, 0.25, 0.125) q[0];
ctrl @ U(pi, 0, pi) q[0], q[1];
cu(pi / 2, 0, pi, 0) q[0], q[1];
u3(0, 0.5, 0.25) q[1];
gphase(pi);
ctrl @ gphase(pi / 4) q[1];
negctrl @ gphase(pi / 4) q[1];
negctrl @ ctrl @ gphase(0.1) q[0], q[1];
// ---- expect
// qubits q[2]
// bits
// s q[0]
// x q[0]
// s q[0]
// t q[0]
// p(0.125000) q[0]
// ry(0.500000) q[0]
// p(0.250000) q[0]
// p(0.250000) q[0]
// x q[0]
// p(0.250000) q[0]
// x q[0]
// s q[0] : q[1]
// x q[0] : q[1]
// s q[0] : q[1]
// z q[0] : q[1]
// ry(1.570796) q[0] : q[1]
// rz(0.750000) q[1]
// z q[0]
// x q[0]
// z q[0]
// x q[0]
// t q[1]
// x q[1]
// t q[1]
// x q[1]
// p(0.100000) !q[0] : q[1]
