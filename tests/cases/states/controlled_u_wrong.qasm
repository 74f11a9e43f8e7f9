// The phase of U under a control is not taken back.
//! bits 2
//! clause 1
//! clause 2
//! expect differs
OPENQASM 3.0;
include "stdgates.inc";
qubit[2] search;
h search[1];
ctrl @ U(pi, 0, pi) search[0], search[1];
h search[1];
cu(pi, 0, pi, pi / 2) search[0], search[1];
cu(-pi, pi, 0, -pi / 2) search[0], search[1];
