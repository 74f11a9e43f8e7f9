// One T gate of the 7-T list turned round: every basis state is right, the phases are not.
//! bits 2
//! clause 1
//! clause 2
//! expect differs
//! got phase
OPENQASM 3.0;
include "stdgates.inc";
qubit[2] search; qubit[1] mark;
h mark[0]; cx search[1], mark[0]; tdg mark[0]; cx search[0], mark[0]; t mark[0]; cx search[1], mark[0]; tdg mark[0]; cx search[0], mark[0];
tdg search[1]; t mark[0]; h mark[0]; cx search[0], search[1]; t search[0]; tdg search[1]; cx search[0], search[1];
