"""Compares the tallies of the command with those of the reference readers of this folder.

For every demo in `problems/` and every good case in `tests/cases/language/good/`: the number of solutions and the
number of bits; cases that note these numbers in the file must agree too. CNF demos are counted by trying every
assignment. Nothing is skipped without a line that says why.
"""

import pathlib
import re
import sys

import dimacs_reference
import tally_reference
from command import ROOT, CommandFailed, options, run_json
from tally_syntax import TallyError

FEWEST_DEMOS = 9  # the six puzzles and three more: fewer means that the check looks in the wrong place
FEWEST_CASES = 25


NOTE = re.compile(r"^#: *(set|bits|solutions) +(.*?) *$", re.MULTILINE)


class Case:
    """A file, with what it notes about itself: `#: set NAME=VALUE`, `#: bits N`, `#: solutions N`."""

    def __init__(self, path):
        self.path = path
        self.settings, self.noted = [], {}
        if path.suffix == ".tally":
            for key, value in NOTE.findall(path.read_text()):
                if key == "set":
                    self.settings.append(value)
                else:
                    self.noted[key] = int(value)

    def reference(self):
        """What the reference says: (solutions, bits), or a reason why it says nothing."""
        if self.path.suffix == ".tally":
            problem = tally_reference.read_file(self.path, dict(setting.split("=", 1) for setting in self.settings))
            return tally_reference.count(problem), problem.bits
        if self.path.suffix != ".cnf":
            return f"a {self.path.suffix} file"
        formula = dimacs_reference.read(self.path.read_text())
        if formula.variables > dimacs_reference.MOST_VARIABLES:
            return f"{formula.variables} variables, more than {dimacs_reference.MOST_VARIABLES}"
        return dimacs_reference.count(formula), formula.variables


def check(command, path):
    """One file: a line that says what was compared, and whether it agrees (None: not compared)."""
    name, case = path.relative_to(ROOT), Case(path)
    try:
        expected = case.reference()
        if isinstance(expected, str):
            return None, f"{name}: not compared, {expected}"
        found = run_json(command, "count", path, *(f"--set={setting}" for setting in case.settings))
    except (TallyError, tally_reference.TooLarge, dimacs_reference.DimacsError) as error:
        return False, f"{name}: the reference refuses it: {error}"
    except CommandFailed as error:
        return False, f"{name}: {error}"
    said = (int(found["tally"]["count"]), found["problem"]["bits"])
    noted = (case.noted.get("solutions", expected[0]), case.noted.get("bits", expected[1]))
    line = f"{name}: {expected[0]} solutions, {expected[1]} bits"
    if said == expected == noted and found["tally"]["exact"]:
        return True, line
    return False, f"{line}; the command says {said[0]} and {said[1]}, the file itself {noted[0]} and {noted[1]}"


def main():
    given = options(__doc__.splitlines()[0])
    demos = sorted((ROOT / "problems").glob("*.*"))
    tallies = [path for path in demos if path.suffix == ".tally"]
    cases = sorted((ROOT / "tests/cases/language/good").glob("*.tally"))
    if len(tallies) < FEWEST_DEMOS or len(cases) < FEWEST_CASES:
        print(f"only {len(tallies)} demos and {len(cases)} language cases were found: is this the right tree?")
        return 1
    tiny = sorted(pathlib.Path(__file__).parent.joinpath("tiny").glob("*.*"))
    failed = compared = skipped = 0
    for path in [*demos, *cases, *tiny]:
        agrees, line = check(given.command, path)
        print(("    " if agrees else "skip" if agrees is None else "FAIL") + " " + line)
        failed += agrees is False
        skipped += agrees is None
        compared += agrees is not None
    print(f"tallies: {compared} compared, {failed} differ, {skipped} not compared")
    return 1 if failed else 0


if __name__ == "__main__":
    sys.exit(main())
