// Four controls, 2 borrowed qubits of any value: 4(c - 2) = 8 Toffoli gates.
// Barenco et al., "Elementary gates for quantum computation", Phys. Rev. A 52:3457, 1995, arXiv:quant-ph/9503016, Lemma 7.2
// (from memory; counts computed for c = 3 to 8).
//! same qubit[5] q; qubit[2] dirty; ctrl(4) @ x q[0], q[1], q[2], q[3], q[4];
//! count toffoli 8
//! count gates 8
OPENQASM 3.0;
include "stdgates.inc";
qubit[5] q; qubit[2] dirty;
ccx q[3], dirty[1], q[4]; ccx q[2], dirty[0], dirty[1]; ccx q[0], q[1], dirty[0]; ccx q[2], dirty[0], dirty[1]; ccx q[3], dirty[1], q[4]; ccx q[2], dirty[0], dirty[1]; ccx q[0], q[1], dirty[0]; ccx q[2], dirty[0], dirty[1];
