OPENQASM 3.0;
include "stdgates.inc";
>>>include "mygates.inc";<<< // Q005
qubit q;
