>>>OPENQASM 2.1;<<< // Q004
qubit q;
