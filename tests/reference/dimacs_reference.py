"""A small strict reader of DIMACS CNF, and a count of the models by trying every assignment.

Bit i of a model's code is variable i + 1. A line `c p show … 0` names the variables that a projected count is about.
"""

import numpy as np

MOST_VARIABLES = 24
PIECE = 1 << 16


class DimacsError(Exception):
    """A file that this reader refuses."""


class Formula:
    """Clauses of literals over variables 1 to `variables`; `shown` is a set, or None where all count."""

    def __init__(self, variables, clauses, shown):
        self.variables, self.clauses, self.shown = variables, clauses, shown


def read(text):
    """The formula that a text says."""
    variables = None
    numbers, shown = [], None
    for number, line in enumerate(text.splitlines(), 1):
        words = line.split()
        if words[:3] == ["c", "p", "show"]:
            if words[-1] != "0":
                raise DimacsError(f"line {number}: a show line without its closing 0")
            shown = (shown or set()) | {int(word) for word in words[3:-1]}
        elif not words or words[0].startswith("c"):
            continue
        elif words[0] == "%":
            break
        elif words[0] == "p":
            if variables is not None or words[1] != "cnf" or len(words) != 4:
                raise DimacsError(f"line {number}: not the one header 'p cnf VARIABLES CLAUSES'")
            variables = int(words[2])
        elif variables is None:
            raise DimacsError(f"line {number}: a clause before the header")
        else:
            numbers += [int(word) for word in words]
    if variables is None or numbers and numbers[-1] != 0:
        raise DimacsError("no header, or the last clause has no closing 0")
    clauses, clause = [], []
    for literal in numbers:
        if abs(literal) > variables:
            raise DimacsError(f"literal {literal} with {variables} variables")
        if literal:
            clause.append(literal)
        else:
            clauses.append(clause)
            clause = []
    return Formula(variables, clauses, shown)


def models(formula):
    """The codes of all models, as an array."""
    if formula.variables > MOST_VARIABLES:
        raise DimacsError(f"{formula.variables} variables are too many to try every assignment")
    found, space = [], 1 << formula.variables
    for start in range(0, space, PIECE):
        codes = np.arange(start, min(space, start + PIECE), dtype=np.int64)
        for clause in formula.clauses:
            holds = np.zeros(len(codes), dtype=bool)
            for literal in clause:
                holds |= (codes >> (abs(literal) - 1) & 1) == (literal > 0)
            codes = codes[holds]
        found.append(codes)
    return np.concatenate(found)


def count(formula):
    """The number of models, projected on the shown variables where the file names some."""
    codes = models(formula)
    if formula.shown is None:
        return len(codes)
    mask = sum(1 << (variable - 1) for variable in formula.shown)
    return len(np.unique(codes & mask))
