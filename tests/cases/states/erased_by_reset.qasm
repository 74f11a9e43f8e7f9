// Garbage erased by reset: the outcome tells the input.
//! bits 2
//! clause 1
//! clause 2
//! expect differs
//! got depends on the input
OPENQASM 3.0;
include "stdgates.inc";
qubit[2] search; qubit[1] work;
reset work;
h work[0]; t work[0]; cx search[0], work[0]; cx search[1], work[0]; cx work[0], search[0]; cx work[0], search[1]; tdg search[0]; tdg search[1]; t work[0]; cx work[0], search[0]; cx work[0], search[1]; h work[0]; s work[0];
z work[0]; reset work[0];
