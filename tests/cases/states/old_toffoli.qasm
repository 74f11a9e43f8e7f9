// Version 2: the Toffoli of its library written out there, into mark.
//! bits 2
//! clause 1
//! clause 2
//! expect equal
OPENQASM 2.0;
include "qelib1.inc";
gate both a,b,c
{
  h c; cx b,c; tdg c; cx a,c; t c; cx b,c; tdg c; cx a,c;
  t b; t c; h c; cx a,b; t a; tdg b; cx a,b;
}
qreg search[2];
qreg mark[1];
both search[0],search[1],mark[0];
