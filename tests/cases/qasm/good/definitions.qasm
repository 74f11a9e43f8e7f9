OPENQASM 3.0;
include "stdgates.inc";
gate majority a, b, c { cx c, b; cx c, a; ccx a, b, c; }
gate turn(t) a { rz(t / 2) a; barrier a; s a; }
gate both(t) a, b { turn(t) a; ctrl @ turn(-t) a, b; }
qubit[4] q;
majority q[0], q[1], q[2];
inv @ majority q[0], q[1], q[2];
both(1) q[0], q[1];
inv @ both(1) q[0], q[1];
negctrl @ turn(2) q[3], q[0];
pow(2) @ turn(0.5) q[0:1];
// ---- expect
// qubits q[4]
// bits
// x q[2] : q[1]
// x q[2] : q[0]
// x q[0] q[1] : q[2]
// x q[0] q[1] : q[2]
// x q[2] : q[0]
// x q[2] : q[1]
// rz(0.500000) q[0]
// s q[0]
// rz(-0.500000) q[0] : q[1]
// s q[0] : q[1]
// sdg q[0] : q[1]
// rz(0.500000) q[0] : q[1]
// sdg q[0]
// rz(-0.500000) q[0]
// rz(1.000000) !q[3] : q[0]
// s !q[3] : q[0]
// rz(0.250000) q[0]
// s q[0]
// rz(0.250000) q[0]
// s q[0]
// rz(0.250000) q[1]
// s q[1]
// rz(0.250000) q[1]
// s q[1]
