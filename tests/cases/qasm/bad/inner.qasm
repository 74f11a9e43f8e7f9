OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
for int i in [0:3] { >>>qubit a;<<< x a; } // Q025
