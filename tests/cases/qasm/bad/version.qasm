>>>OPENQASM 2.0;<<< // Q004
qubit q;
