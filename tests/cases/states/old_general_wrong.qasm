// The same with the correction for the other outcome.
//! bits 2
//! clause 1
//! clause 2
//! expect differs
OPENQASM 2.0;
include "qelib1.inc";
qreg search[2];
qreg work[1];
creg c[1];
gate toffoli a,b,t
{
  u2(0,pi) t; CX b,t; u1(-pi/4) t; CX a,t; u1(pi/4) t; CX b,t; u1(-pi/4) t; CX a,t;
  u1(pi/4) b; u1(pi/4) t; u2(0,pi) t; CX a,b; u1(pi/4) a; u1(-pi/4) b; CX a,b;
}
toffoli search[0],search[1],work[0];
u1(pi) work[0];
u2(0,pi) work[0];
measure work[0] -> c[0];
if (c==0) cu1(pi) search[0],search[1];
reset work[0];
