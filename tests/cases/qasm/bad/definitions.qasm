OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
bit c;
gate again a { >>>again<<< a; } // Q008
gate outside a { x >>>q<<<; } // Q006
gate twice a, >>>a<<< { x a; } // Q007
gate same a, b { >>>cx a, a;<<< } // Q014
gate few a { >>>cx a;<<< } // Q011
gate measured a { >>>reset a;<<< } // Q032
gate element a { x >>>a[0]<<<; } // Q032
gate angle_missing(t) a { p(>>>u<<<) a; >>>rz<<< a; } // Q006 Q012
gate >>>nothing<<< { } // Q032
gate >>>x<<< a { } // Q007
gate >>>U<<< a { } // Q007
gate fine(t) a { p(>>>1 / t<<<) a; } // Q019
>>>fine<<< q[0]; // Q012
fine(0) q[0]; again q; twice q[0], q[1];
for int i in [0:1] { gate >>>inner<<< a { x a; } } // Q025
x q[>>>2<<<]; // Q013
