// The teleportation of the paper on version 2, with its words.
OPENQASM 2.0;
include "qelib1.inc";
gate majority a,b,c { cx c,b; cx c,a; ccx a,b,c; }
qreg q[3];
creg c0[1];
creg c1[1];
u3(0.3,0.2,0.1) q[0];
h q[1];
cx q[1],q[2];
barrier q;
cx q[0],q[1];
h q[0];
measure q[0] -> c0[0];
measure q[1] -> c1[0];
if(c0==1) z q[2];
if(c1==1) x q[2];
reset q[0];
majority q[0],q[1],q[2];
cu1(pi/2) q[0],q[1];
u2(0,pi) q[0];
// ---- expect
// qubits q[3]
// bits c0[1] c1[1]
// p(0.100000) q[0]
// ry(0.300000) q[0]
// p(0.200000) q[0]
// h q[1]
// x q[1] : q[2]
// x q[0] : q[1]
// h q[0]
// measure q[0] -> c0[0]
// measure q[1] -> c1[0]
// if c0[0]: z q[2]
// if c1[0]: x q[2]
// reset q[0]
// x q[2] : q[1]
// x q[2] : q[0]
// x q[0] q[1] : q[2]
// p(1.570796) q[0] : q[1]
// z q[0]
// ry(1.570796) q[0]
