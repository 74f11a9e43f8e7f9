// Three controls from ANDs with measured erase: 4(c - 1) = 8 T.
// Gidney, "Halving the cost of quantum addition", Quantum 2:74, 2018, arXiv:1709.06648 (n-control NOT: 4n - 4).
//! same qubit[4] q; ctrl(3) @ x q[0], q[1], q[2], q[3];
//! count t 8
//! count measurements 2
OPENQASM 3.0;
include "stdgates.inc";
qubit[4] q; qubit[2] work; bit[2] m;
h work[0]; t work[0]; cx q[0], work[0]; cx q[1], work[0]; cx work[0], q[0]; cx work[0], q[1]; tdg q[0]; tdg q[1]; t work[0]; cx work[0], q[0]; cx work[0], q[1]; h work[0]; s work[0];
h work[1]; t work[1]; cx work[0], work[1]; cx q[2], work[1]; cx work[1], work[0]; cx work[1], q[2]; tdg work[0]; tdg q[2]; t work[1]; cx work[1], work[0]; cx work[1], q[2]; h work[1]; s work[1];
cx work[1], q[3];
h work[1]; m[1] = measure work[1]; if (m[1]) { cz work[0], q[2]; } reset work[1];
h work[0]; m[0] = measure work[0]; if (m[0]) { cz q[0], q[1]; } reset work[0];
