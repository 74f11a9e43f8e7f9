// The 4-T relative-phase Toffoli (Margolus form; Maslov, Phys. Rev. A 93:022311, 2016) and its inverse on a work qubit.
//! bits 2
//! clause 1
//! clause 2
//! expect equal
OPENQASM 3.0;
include "stdgates.inc";
qubit[2] search; qubit[1] work;
h work[0]; t work[0]; cx search[1], work[0]; tdg work[0]; cx search[0], work[0]; t work[0]; cx search[1], work[0]; tdg work[0]; h work[0];
z work[0];
h work[0]; t work[0]; cx search[1], work[0]; tdg work[0]; cx search[0], work[0]; t work[0]; cx search[1], work[0]; tdg work[0]; h work[0];
