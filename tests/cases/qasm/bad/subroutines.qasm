OPENQASM 3.0;
include "stdgates.inc";
qubit[3] q;
bit[2] c;
def loop(qubit a) { >>>loop<<<(a); } // Q008
def given(bit >>>b<<<) { } // Q030
def >>>silent<<<(qubit a) -> bit { x a; } // Q034
def early(qubit a) -> bit { if (c[0]) { >>>return measure a;<<< } return measure a; } // Q034
def valued(qubit a) -> bit { >>>return 1;<<< } // Q034
def none(qubit a) { >>>return measure a;<<< } // Q034
def f(qubit[2] a, int n) -> bit { x a[n]; return measure a[0]; }
def outside() { x >>>q[0]<<<; } // Q006
def g(qubit a) { x a; }
>>>f(q[0:1], 1);<<< // Q023
c[0] = >>>f<<<(q[0:1]); // Q030
c[0] = f(>>>q<<<, 1); // Q015
c[0] = f(>>>1<<<, 1); // Q030
c[0] = f(q[0:1], >>>0.5<<<); // Q019
>>>c[0] = g(q[0]);<<< // Q034
c[0] = >>>x<<< q[0]; // Q034
>>>g q[0];<<< // Q033
>>>inv @ g(q[0]);<<< // Q033
outside();
>>>return;<<< // Q034
