// Two ANDs side by side whose correction bits are swapped.
//! bits 4
//! clause 1
//! clause 2
//! clause 3
//! clause 4
//! expect differs
//! got phase
OPENQASM 3.0;
include "stdgates.inc";
qubit[4] search; qubit[2] work; bit[2] outcome;
reset work;
h work[0]; t work[0]; cx search[0], work[0]; cx search[1], work[0]; cx work[0], search[0]; cx work[0], search[1]; tdg search[0]; tdg search[1]; t work[0]; cx work[0], search[0]; cx work[0], search[1]; h work[0]; s work[0];
h work[1]; t work[1]; cx search[2], work[1]; cx search[3], work[1]; cx work[1], search[2]; cx work[1], search[3]; tdg search[2]; tdg search[3]; t work[1]; cx work[1], search[2]; cx work[1], search[3]; h work[1]; s work[1];
cz work[0], work[1];
h work[0]; outcome[0] = measure work[0];
h work[1]; outcome[1] = measure work[1];
if (outcome[1]) { cz search[0], search[1]; }
if (outcome[0]) { cz search[2], search[3]; }
reset work;
