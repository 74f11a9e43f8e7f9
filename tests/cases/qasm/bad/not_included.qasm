OPENQASM 3.0;
qubit q;
>>>h<<< q; // Q009
x q;
