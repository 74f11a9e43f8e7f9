// The AND from 4 T into a clean qubit, a CZ, and the erase by measurement, which costs no T.
// Gidney, "Halving the cost of quantum addition", Quantum 2:74, 2018, arXiv:1709.06648.
//! same qubit[3] q; ctrl(2) @ z q[0], q[1], q[2];
//! count t 4
//! count measurements 1
OPENQASM 3.0;
include "stdgates.inc";
qubit[3] q; qubit[1] work; bit[1] m;
h work[0]; t work[0]; cx q[0], work[0]; cx q[1], work[0]; cx work[0], q[0]; cx work[0], q[1]; tdg q[0]; tdg q[1]; t work[0]; cx work[0], q[0]; cx work[0], q[1]; h work[0]; s work[0];
cz work[0], q[2];
h work[0]; m[0] = measure work[0]; if (m[0]) { cz q[0], q[1]; } reset work[0];
