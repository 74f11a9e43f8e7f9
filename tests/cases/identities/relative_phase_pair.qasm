// Two relative-phase Toffoli gates (4 T each, Margolus form) around a CZ are one CCZ.
// Maslov, Phys. Rev. A 93:022311, 2016, arXiv:1508.03273.
//! same qubit[3] q; ctrl(2) @ z q[0], q[1], q[2];
//! count t 8
//! count cx 6
//! count gates 19
OPENQASM 3.0;
include "stdgates.inc";
qubit[3] q; qubit[1] work;
h work[0]; t work[0]; cx q[1], work[0]; tdg work[0]; cx q[0], work[0]; t work[0]; cx q[1], work[0]; tdg work[0]; h work[0];
cz work[0], q[2];
h work[0]; t work[0]; cx q[1], work[0]; tdg work[0]; cx q[0], work[0]; t work[0]; cx q[1], work[0]; tdg work[0]; h work[0];
