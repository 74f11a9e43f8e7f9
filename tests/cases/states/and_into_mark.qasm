// The 4-T AND needs a target in |0>: into mark it is wrong.
//! bits 2
//! clause 1
//! clause 2
//! expect differs
OPENQASM 3.0;
include "stdgates.inc";
qubit[2] search; qubit[1] mark;
h mark[0]; t mark[0]; cx search[0], mark[0]; cx search[1], mark[0]; cx mark[0], search[0]; cx mark[0], search[1]; tdg search[0]; tdg search[1]; t mark[0]; cx mark[0], search[0]; cx mark[0], search[1]; h mark[0]; s mark[0];
