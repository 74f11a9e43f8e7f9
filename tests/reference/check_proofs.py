"""Proofs that the command writes, checked again by the checker of this folder; and proofs that were tampered with.

For some demos and small problems: `audit --proof DIR` of the command's own circuit must say "equal" and write a formula
and a proof that the checker accepts. The same proof must be refused with all its steps but the last gone, and with a
first step that claims the first qubit to be 1 always. Problems whose miter falls by propagation alone are counted apart.
Where bits are computed, what is claimed of them comes with a proof too, which must be accepted.
"""

import pathlib
import sys
import tempfile

from command import ROOT, CommandFailed, options, run, run_json
from drat_reference import Refused, check

PROBLEMS = [
    *(f"problems/{name}" for name in ("relay-codes.tally", "paint-shelf.tally", "even-streets.cnf", "smaller-number.cnf")),
    *(f"tests/reference/tiny/{name}" for name in ("small-sum.tally", "different.tally", "two-of-four.tally")),
]
FEWEST_STEPPED = 4  # so many proofs must have steps of their own, or nothing much was checked
FEWEST_CLAIMED = 3  # and so many problems must have computed bits


def is_refused(formula, proof):
    try:
        check(formula, proof)
    except Refused:
        return True
    return False


def examine(command, path, folder):
    """One problem: whether all is as it must be, a line, and whether the proof has steps."""
    circuit = folder / "oracle.qasm"
    try:
        run(command, "compile", path, "--level", "toffoli", "--no-narrowing", "-o", circuit)
        audit = run_json(command, "audit", path, circuit, "--proof", folder / "proof")["audit"]
    except CommandFailed as error:
        return False, str(error), False
    if (audit["verdict"], audit["how"]) != ("equal", "proof"):
        return False, f"{audit['verdict']} by {audit['how']}", False
    formula, proof = ((folder / "proof" / name).read_text() for name in ("miter.cnf", "proof.drat"))
    try:
        shown = check(formula, proof)
    except Refused as refused:
        return False, f"refused: {refused}", False
    if not is_refused(formula, "0\n"):
        return True, f"accepted; {len(proof.splitlines())} lines, falls by propagation alone", False
    if not is_refused(formula, "1 0\n" + proof):
        return False, "accepted with a first step that does not follow", True
    return True, f"accepted, {shown} clauses shown; tampered with, refused twice", True


def claims(command, path, folder):
    """What is claimed of computed bits: whether its proof is accepted, and a line; none where nothing is computed."""
    circuit = folder / "narrowed.qasm"
    try:
        run(command, "compile", path, "--level", "toffoli", "-o", circuit)
        if '"computed"' not in (folder / "narrowed.places.json").read_text():
            return None
        run(command, "audit", path, circuit, "--proof", folder / "claims")
        files = ((folder / "claims" / name).read_text() for name in ("obligations.cnf", "obligations.drat"))
        return True, f"the claims of computed bits: accepted, {check(*files)} clauses shown"
    except (CommandFailed, OSError, Refused) as error:
        # Where everything searched is marked there is no oracle, and nothing to audit.
        return None if "C003" in str(error) else (False, f"the claims of computed bits: {error}")


def main():
    given = options(__doc__.splitlines()[0])
    failed = stepped = proven = 0
    for name in PROBLEMS:
        with tempfile.TemporaryDirectory() as folder:
            is_right, line, has_steps = examine(given.command, ROOT / name, pathlib.Path(folder))
            claimed = claims(given.command, ROOT / name, pathlib.Path(folder))
        print(f"{'    ' if is_right else 'FAIL'} {name}: {line}", flush=True)
        failed += not is_right
        stepped += has_steps
        if claimed is not None:
            print(f"{'    ' if claimed[0] else 'FAIL'} {name}: {claimed[1]}", flush=True)
            failed += not claimed[0]
            proven += 1
    print(f"proofs: {len(PROBLEMS)} checked, {failed} wrong, {stepped} with steps of their own; claims of {proven} problems")
    return 1 if failed or stepped < FEWEST_STEPPED or proven < FEWEST_CLAIMED else 0


if __name__ == "__main__":
    sys.exit(main())
