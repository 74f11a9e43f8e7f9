// Five controls, 3 borrowed qubits of any value: 4(c - 2) = 12 Toffoli gates.
// Barenco et al., "Elementary gates for quantum computation", Phys. Rev. A 52:3457, 1995, arXiv:quant-ph/9503016, Lemma 7.2
// (from memory; counts computed for c = 3 to 8).
//! same qubit[6] q; qubit[3] dirty; ctrl(5) @ x q[0], q[1], q[2], q[3], q[4], q[5];
//! count toffoli 12
//! count gates 12
OPENQASM 3.0;
include "stdgates.inc";
qubit[6] q; qubit[3] dirty;
ccx q[4], dirty[2], q[5]; ccx q[3], dirty[1], dirty[2]; ccx q[2], dirty[0], dirty[1]; ccx q[0], q[1], dirty[0]; ccx q[2], dirty[0], dirty[1]; ccx q[3], dirty[1], dirty[2]; ccx q[4], dirty[2], q[5]; ccx q[3], dirty[1], dirty[2]; ccx q[2], dirty[0], dirty[1]; ccx q[0], q[1], dirty[0]; ccx q[2], dirty[0], dirty[1]; ccx q[3], dirty[1], dirty[2];
