// The same with one t for tdg.
//! bits 2
//! clause 1
//! clause 2
//! expect differs
OPENQASM 2.0;
include "qelib1.inc";
gate both a,b,c
{
  h c; cx b,c; tdg c; cx a,c; t c; cx b,c; tdg c; cx a,c;
  t b; t c; h c; cx a,b; t a; t b; cx a,b;
}
qreg search[2];
qreg mark[1];
both search[0],search[1],mark[0];
