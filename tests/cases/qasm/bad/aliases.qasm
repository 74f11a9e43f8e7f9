OPENQASM 3.0;
include "stdgates.inc";
qubit[3] q;
bit[2] c;
let a = q[0:>>>3<<<]; // Q013
let b = q ++ >>>c<<<; // Q016
let >>>q<<< = q[0]; // Q007
let d = q[0] ++ q[0];
>>>cx d[0], d[1];<<< // Q014
let e = >>>r<<<; // Q006
x a;
x d[>>>2<<<]; // Q013
for int i in [0:0] { let f = q[1]; x f; } x >>>f<<<; // Q006
