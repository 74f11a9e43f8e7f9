OPENQASM 3.0;
include "stdgates.inc";
// A whole search as this crate writes it.
qubit[2] search;
bit[2] found;
reset search;
h search[0];
h search[1];
for int i in [1:5] {
  cz search[0], search[1];
  h search;
  x search;
  ctrl @ z search[0], search[1];
  x search;
  h search;
}
found = measure search;
// ---- expect
// qubits search[2]
// bits found[2]
// reset search[0]
// reset search[1]
// h search[0]
// h search[1]
// repeat 5
// z search[0] : search[1]
// h search[0]
// h search[1]
// x search[0]
// x search[1]
// z search[0] : search[1]
// x search[0]
// x search[1]
// h search[0]
// h search[1]
// end
// measure search[0] -> found[0]
// measure search[1] -> found[1]
