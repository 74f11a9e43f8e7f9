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
