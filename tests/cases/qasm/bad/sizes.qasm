OPENQASM 3.0;
include "stdgates.inc";
qubit[>>>0<<<] a; // Q017
qubit[>>>-3<<<] b; // Q017
qubit[>>>2.5<<<] d; // Q019
qubit[>>>100000000<<<] e; // Q018
x a;
x e[3];
