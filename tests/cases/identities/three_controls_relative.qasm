// Three controls, one clean work qubit, relative-phase pairs: 8c - 9 = 15 T.
// Maslov, Phys. Rev. A 93:022311, 2016, arXiv:1508.03273 (from memory).
//! same qubit[4] q; ctrl(3) @ x q[0], q[1], q[2], q[3];
//! count t 15
//! count gates 33
OPENQASM 3.0;
include "stdgates.inc";
qubit[4] q; qubit[1] work;
h work[0]; t work[0]; cx q[1], work[0]; tdg work[0]; cx q[0], work[0]; t work[0]; cx q[1], work[0]; tdg work[0]; h work[0];
h q[3]; cx q[2], q[3]; tdg q[3]; cx work[0], q[3]; t q[3]; cx q[2], q[3]; tdg q[3]; cx work[0], q[3]; t q[2]; t q[3]; h q[3]; cx work[0], q[2]; t work[0]; tdg q[2]; cx work[0], q[2];
h work[0]; t work[0]; cx q[1], work[0]; tdg work[0]; cx q[0], work[0]; t work[0]; cx q[1], work[0]; tdg work[0]; h work[0];
