OPENQASM 3.0;
include "stdgates.inc";
qubit[3] q;
const int[4] a = >>>8<<<; // Q019
const uint b = >>>-1<<<; // Q019
const int d = >>>1.5<<<; // Q019
const angle[4] e = >>>0.1<<<; // Q019
const float f = >>>q<<<; // Q031
const float[16] g = >>>1.0<<<; // Q017
p(>>>q[0]<<<) q[0]; // Q031
p(>>>sine(1)<<<) q[0]; // Q029
p(>>>sin(1, 2)<<<) q[0]; // Q029
p(>>>2 ^ 3<<<) q[0]; // Q029
p(>>>sqrt(-1)<<<) q[0]; // Q019
const int >>>pi<<< = 3; // Q007
x >>>n<<<; const int n = 1; // Q006
x >>>n<<<; // Q016
