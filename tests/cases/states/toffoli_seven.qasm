// The 7-T Toffoli list of the standard's gate library, into mark.
//! bits 2
//! clause 1
//! clause 2
//! expect equal
//! note complete: unitary
OPENQASM 3.0;
include "stdgates.inc";
qubit[2] search; qubit[1] mark;
h mark[0]; cx search[1], mark[0]; tdg mark[0]; cx search[0], mark[0]; t mark[0]; cx search[1], mark[0]; tdg mark[0]; cx search[0], mark[0];
t search[1]; t mark[0]; h mark[0]; cx search[0], search[1]; t search[0]; tdg search[1]; cx search[0], search[1];
