// Four controls, two clean work qubits, computed and undone: 2c - 3 = 5 Toffoli gates.
// The V-chain of textbooks (from memory).
//! same qubit[5] q; ctrl(4) @ x q[0], q[1], q[2], q[3], q[4];
//! count toffoli 5
//! count gates 5
OPENQASM 3.0;
include "stdgates.inc";
qubit[5] q; qubit[2] work;
ccx q[0], q[1], work[0]; ccx work[0], q[2], work[1]; ccx work[1], q[3], q[4]; ccx work[0], q[2], work[1]; ccx q[0], q[1], work[0];
