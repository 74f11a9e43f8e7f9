// Five controls, one borrowed qubit: four gates with three controls (m = 3), each from 4 Toffoli gates with a
// borrowed qubit: 8(c - 3) = 16.
// Barenco et al., "Elementary gates for quantum computation", Phys. Rev. A 52:3457, 1995, arXiv:quant-ph/9503016, Lemma 7.3
// and Corollary 7.4 (from memory; counts computed).
//! same qubit[6] q; qubit[1] dirty; ctrl(5) @ x q[0], q[1], q[2], q[3], q[4], q[5];
//! count toffoli 16
//! count gates 16
OPENQASM 3.0;
include "stdgates.inc";
qubit[6] q; qubit[1] dirty;
ccx q[2], q[5], dirty[0]; ccx q[0], q[1], q[5]; ccx q[2], q[5], dirty[0]; ccx q[0], q[1], q[5];
ccx dirty[0], q[0], q[5]; ccx q[3], q[4], q[0]; ccx dirty[0], q[0], q[5]; ccx q[3], q[4], q[0];
ccx q[2], q[5], dirty[0]; ccx q[0], q[1], q[5]; ccx q[2], q[5], dirty[0]; ccx q[0], q[1], q[5];
ccx dirty[0], q[0], q[5]; ccx q[3], q[4], q[0]; ccx dirty[0], q[0], q[5]; ccx q[3], q[4], q[0];
