OPENQASM 3.0;
include "stdgates.inc";
qubit[4] q;
for uint i in [0:3] { x q[i]; }
for int i in [0:2:3] { cx q[i], q[i + 1]; }
for int i in [3:-1:2] h q[i];
for int i in [0:1] { for int j in [0:1] { z q[2*i + j]; } }
for int i in [0:9] { for int j in [1:2] { s q[0]; } }
for int i in [5:1] { t q[0]; }
for int i in [7:7] { tdg q[0]; }
for int i in [1:1000000000000] { x q[3]; }
// ---- expect
// qubits q[4]
// bits
// x q[0]
// x q[1]
// x q[2]
// x q[3]
// x q[0] : q[1]
// x q[2] : q[3]
// h q[3]
// h q[2]
// z q[0]
// z q[1]
// z q[2]
// z q[3]
// repeat 10
// s q[0]
// s q[0]
// end
// tdg q[0]
// repeat 1000000000000
// x q[3]
// end
