// An alias, a definition that computes, its inverse, a subroutine, a loop, and a phase under controls.
//! bits 3
//! clause 1 2
//! clause 3
//! expect equal
OPENQASM 3.0;
include "stdgates.inc";
qubit[3] search;
qubit work;
let first = search[0:1];
gate either a, b, t { x t; negctrl @ negctrl @ x a, b, t; }
def mark_all(qubit[2] a, qubit b, angle p) { ctrl(2) @ gphase(p) a[0], b; for int i in [1:1] { id a[i]; } }
either first[0], first[1], work;
mark_all(search[2:-1:1], work, pi);
inv @ either first[0], first[1], work;
