"""Counts the solutions of a `.tally` file by enumeration: the reference that the command is compared with.

    python3 tally_reference.py FILE [--set NAME=VALUE]...

prints one JSON object: file, bits, variables, count, and objective (its best value and how many solutions reach it).
A file that the language does not allow is an error: a message with line and column, exit code 2.

How: partial assignments are rows of a table with one column for each variable assigned so far. The table is extended
by one variable at a time, in pieces of bounded size, depth first; a constraint is evaluated on a piece as soon as all
its variables have a column. Groups of variables that share no constraint are counted apart and multiplied.
"""

import argparse
import json
import sys

import numpy as np

import tally_meaning
from tally_ground import YESNO, evaluate
from tally_syntax import TallyError

PIECE = 1 << 16  # rows in one piece of a table
MOST_ROWS = 1 << 31  # rows made in all, before the search gives up


class TooLarge(Exception):
    """The enumeration would make more rows than `MOST_ROWS`."""


class Enumeration:
    """The solutions over some of the variables of a problem, piece by piece."""

    def __init__(self, problem, wanted, constraints):
        self.problem = problem
        self.constraints = constraints
        self.order = search_order(problem, wanted, constraints)
        place = {index: at for at, index in enumerate(self.order)}
        self.due = [[] for _ in self.order]
        for constraint in constraints:
            last = max(place[var.args[0]] for var in constraint.reads)
            self.due[last].append(constraint)
        self.rows_made = 0

    def pieces(self):
        """Tables (variable -> column) of solutions; together they hold each solution once."""
        yield from self.extend({}, 1, 0)

    def extend(self, columns, rows, level):
        if level == len(self.order):
            yield columns, rows
            return
        variable = self.problem.variables[self.order[level]]
        values_at_once = min(variable.size, PIECE)
        rows_at_once = max(1, PIECE // values_at_once)
        for start in range(0, rows, rows_at_once):
            part = {index: column[start : start + rows_at_once] for index, column in columns.items()}
            part_rows = min(rows_at_once, rows - start)
            for low in range(0, variable.size, values_at_once):
                high = min(variable.size, low + values_at_once)
                yield from self.assign(part, part_rows, level, variable, low, high)

    def assign(self, columns, rows, level, variable, low, high):
        """One piece, extended by the values `low .. high` (counted from the first) of one variable."""
        self.rows_made += rows * (high - low)
        if self.rows_made > MOST_ROWS:
            raise TooLarge(f"more than {MOST_ROWS} partial assignments")
        longer = {index: np.repeat(column, high - low) for index, column in columns.items()}
        values = np.tile(np.arange(low, high, dtype=np.int64) + variable.first, rows)
        longer[self.order[level]] = values.astype(bool) if variable.type == YESNO else values
        rows *= high - low
        for constraint in self.due[level]:
            holds = np.broadcast_to(evaluate(constraint, longer, {}), (rows,))
            if not holds.all():
                longer = {index: column[holds] for index, column in longer.items()}
                rows = int(np.count_nonzero(holds))
        if rows:
            yield from self.extend(longer, rows, level + 1)


def search_order(problem, wanted, constraints):
    """The variables in the order in which they are assigned: finish next the constraint that is cheapest to finish."""
    order, placed = [], set()
    waiting = [sorted(var.args[0] for var in constraint.reads) for constraint in constraints]
    while waiting:
        def cost(reads):
            open_bits = sum(problem.variables[index].bits for index in reads if index not in placed)
            return open_bits / (1 + sum(index in placed for index in reads))

        for index in min(waiting, key=cost):
            if index not in placed:
                order.append(index)
                placed.add(index)
        waiting = [reads for reads in waiting if not placed.issuperset(reads)]
    return order + [index for index in wanted if index not in placed]


def components(problem, constraints, kept_together):
    """Groups of variables such that no constraint reads two groups; `kept_together` are in one group."""
    leader = list(range(len(problem.variables)))

    def find(index):
        while leader[index] != index:
            leader[index] = leader[leader[index]]
            index = leader[index]
        return index

    for group in [*([var.args[0] for var in c.reads] for c in constraints), list(kept_together)]:
        for index in group[1:]:
            leader[find(index)] = find(group[0])
    groups = {}
    for index in range(len(problem.variables)):
        groups.setdefault(find(index), []).append(index)
    return list(groups.values())


def split(problem, kept_together=()):
    """The independent parts of a problem as enumerations, or None where a constant constraint fails."""
    constraints = []
    for conjunct in problem.conjuncts:
        if conjunct.value == 0:
            return None
        if conjunct.value is None:
            constraints.append(conjunct)
    parts = []
    for group in components(problem, constraints, kept_together):
        members = set(group)
        mine = [c for c in constraints if next(iter(c.reads)).args[0] in members]
        parts.append((group, mine))
    return parts


def count(problem):
    """The number of solutions."""
    parts = split(problem)
    if parts is None:
        return 0
    number = 1
    for group, constraints in parts:
        if not constraints:
            number *= tally_meaning.count_of([problem.variables[index].size for index in group])
            continue
        number *= sum(rows for _, rows in Enumeration(problem, group, constraints).pieces())
        if number == 0:
            break
    return number


def best(problem):
    """The best value of the objective and the number of solutions that reach it; None without objective or solution."""
    if problem.objective is None:
        return None
    aim, wanted = problem.objective
    together = [var.args[0] for var in wanted.reads]
    parts = split(problem, together)
    if parts is None:
        return None
    optimum, reached, others = wanted.value, 1, 1
    for group, constraints in parts:
        pieces = Enumeration(problem, group, constraints).pieces
        if not together or together[0] not in group:
            others *= sum(rows for _, rows in pieces())
            continue
        optimum, reached = None, 0
        for columns, rows in pieces():
            values = np.broadcast_to(evaluate(wanted, columns, {}), (rows,))
            top = int(values.min() if aim == "least" else values.max())
            if optimum is None or (top < optimum if aim == "least" else top > optimum):
                optimum, reached = top, 0
            if top == optimum:
                reached += int(np.count_nonzero(values == top))
    if reached * others == 0:
        return None
    return {"aim": aim, "value": optimum, "count": str(reached * others)}


def codes(problem):
    """The set of solutions as integers: bit i of the code is bit i of the encoding (first variable lowest, low bit
    first, value minus the least value of the domain)."""
    if any(conjunct.value == 0 for conjunct in problem.conjuncts):
        return set()
    constraints = [c for c in problem.conjuncts if c.value is None]
    everything = range(len(problem.variables))
    found = set()
    for columns, rows in Enumeration(problem, everything, constraints).pieces():
        total, shift = np.zeros(rows, dtype=object), 0
        for index, variable in enumerate(problem.variables):
            place = columns[index].astype(np.int64) - variable.first
            total = total + (place.astype(object) << shift)
            shift += variable.bits
        found.update(int(code) for code in total)
    return found


def read_file(path, settings=None):
    """The problem in a file."""
    with open(path, encoding="utf-8") as file:
        return tally_meaning.read(file.read(), settings)


def report(path, problem):
    """The JSON object that the command line prints."""
    return {
        "file": str(path),
        "bits": problem.bits,
        "variables": [
            {"name": v.name, "type": v.type, "first": v.first, "size": v.size} for v in problem.variables
        ],
        "count": str(count(problem)),
        "objective": best(problem),
    }


def main():
    parser = argparse.ArgumentParser(description=__doc__.splitlines()[0])
    parser.add_argument("file")
    parser.add_argument("--set", action="append", default=[], metavar="NAME=VALUE")
    options = parser.parse_args()
    try:
        settings = dict(setting.split("=", 1) for setting in options.set)
    except ValueError:
        parser.error("--set wants NAME=VALUE")
    try:
        print(json.dumps(report(options.file, read_file(options.file, settings)), indent=2))
    except (TallyError, TooLarge) as error:
        print(f"{options.file}: {error}", file=sys.stderr)
        return 2
    return 0


if __name__ == "__main__":
    sys.exit(main())
