// The Toffoli gate from 7 T and 6 CX: the 15 gates of the open standard's gate library.
// 7 T is optimal: Gosset, Kliuchnikov, Mosca, Russo, QIC 14, 2014, arXiv:1308.4134.
//! same qubit[3] q; ccx q[0], q[1], q[2];
//! count t 7
//! count cx 6
//! count gates 15
OPENQASM 3.0;
include "stdgates.inc";
qubit[3] q;
h q[2]; cx q[1], q[2]; tdg q[2]; cx q[0], q[2]; t q[2]; cx q[1], q[2]; tdg q[2]; cx q[0], q[2]; t q[1]; t q[2]; h q[2]; cx q[0], q[1]; t q[0]; tdg q[1]; cx q[0], q[1];
