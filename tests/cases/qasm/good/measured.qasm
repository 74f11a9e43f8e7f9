OPENQASM 3.0;
include "stdgates.inc";
// The measured erase of an AND.
qubit[2] search;
qubit[1] work;
bit[1] outcome;
bit[2] found;
h work[0];
outcome[0] = measure work[0];
if (outcome[0]) { cz search[0], search[1]; }
reset work[0];
found = measure search;
measure search[1] -> found[0];
bit last = measure work[0];
// ---- expect
// qubits search[2] work[1]
// bits outcome[1] found[2] last[1]
// h work[0]
// measure work[0] -> outcome[0]
// if outcome[0]: z search[0] : search[1]
// reset work[0]
// measure search[0] -> found[0]
// measure search[1] -> found[1]
// measure search[1] -> found[0]
// measure work[0] -> last[0]
