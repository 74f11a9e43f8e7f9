qubit q;
>>>OPENQASM 3.0;<<< // Q004
