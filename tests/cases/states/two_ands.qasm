// Three bits by two ANDs, each erased by measurement.
//! bits 3
//! clause 1
//! clause 2
//! clause 3
//! expect equal
//! note complete: all 4 strings of measurement outcomes
OPENQASM 3.0;
include "stdgates.inc";
qubit[3] search; qubit[2] work; bit[2] outcome;
reset work;
h work[0]; t work[0]; cx search[0], work[0]; cx search[1], work[0]; cx work[0], search[0]; cx work[0], search[1]; tdg search[0]; tdg search[1]; t work[0]; cx work[0], search[0]; cx work[0], search[1]; h work[0]; s work[0];
h work[1]; t work[1]; cx work[0], work[1]; cx search[2], work[1]; cx work[1], work[0]; cx work[1], search[2]; tdg work[0]; tdg search[2]; t work[1]; cx work[1], work[0]; cx work[1], search[2]; h work[1]; s work[1];
z work[1];
h work[1]; outcome[1] = measure work[1]; if (outcome[1]) { cz work[0], search[2]; } reset work[1];
h work[0]; outcome[0] = measure work[0]; if (outcome[0]) { cz search[0], search[1]; } reset work[0];
