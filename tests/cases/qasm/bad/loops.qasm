OPENQASM 3.0;
include "stdgates.inc";
qubit[2] q;
for int >>>i<<< in [0:0:3] { x q[0]; } // Q024
for int i in [0:3] { x q[>>>i<<<]; } // Q013
for int >>>i<<< in [0:1.5] { x q[0]; } // Q019
for int i in [3:1] { x q[>>>2<<<]; } // Q013
for int i in [0:1] { x q[0]; } x q[>>>i<<<]; // Q006
