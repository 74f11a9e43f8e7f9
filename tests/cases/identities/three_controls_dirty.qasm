// Three controls, 1 borrowed qubit of any value: 4(c - 2) = 4 Toffoli gates.
// Barenco et al., "Elementary gates for quantum computation", Phys. Rev. A 52:3457, 1995, arXiv:quant-ph/9503016, Lemma 7.2
// (from memory; counts computed for c = 3 to 8).
//! same qubit[4] q; qubit[1] dirty; ctrl(3) @ x q[0], q[1], q[2], q[3];
//! count toffoli 4
//! count gates 4
OPENQASM 3.0;
include "stdgates.inc";
qubit[4] q; qubit[1] dirty;
ccx q[2], dirty[0], q[3]; ccx q[0], q[1], dirty[0]; ccx q[2], dirty[0], q[3]; ccx q[0], q[1], dirty[0];
