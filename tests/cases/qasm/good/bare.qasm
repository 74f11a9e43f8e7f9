qubit[2] q;
bit[2] c;
reset q;
c = measure q;
// ---- expect
// qubits q[2]
// bits c[2]
// reset q[0]
// reset q[1]
// measure q[0] -> c[0]
// measure q[1] -> c[1]
