// An input is reset.
//! bits 1
//! clause 1
//! expect error A021
OPENQASM 3.0;
include "stdgates.inc";
qubit[1] search;
reset search[0];
