OPENQASM 3.0;
include "stdgates.inc";
/* a block
   comment ** / with stars */ qubit[2] q; // and a line
pragma tallymark anything; x q[9];
#pragma more
@tallymark.note x q[9];
@second
h q[0]; /**/ h q[1]; /***/
barrier q; barrier q[0], q[1]; barrier;
x q[0],;
// ---- expect
// qubits q[2]
// bits
// h q[0]
// h q[1]
// x q[0]
