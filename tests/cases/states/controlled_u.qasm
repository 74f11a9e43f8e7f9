// U(pi, 0, pi) is i times X, so its controlled form turns the phase of the control, too: cu takes it back.
//! bits 2
//! clause 1
//! clause 2
//! expect equal
OPENQASM 3.0;
include "stdgates.inc";
qubit[2] search;
h search[1];
ctrl @ U(pi, 0, pi) search[0], search[1];
sdg search[0];
h search[1];
cu(pi, 0, pi, pi / 2) search[0], search[1];
cu(-pi, pi, 0, -pi / 2) search[0], search[1];
