"""A checker of DRAT proofs, from the format's definition.

The format and what a step must be: N. Wetzler, M. Heule, W. Hunt, "DRAT-trim: efficient checking and trimming using
expressive clausal proofs", SAT 2014. A line is a clause that is added, or `d` and a clause that is deleted. An added
clause must follow by unit propagation from its negation (RUP), or every resolvent on its first literal must (RAT).

As in that paper's checker, deletions of clauses that are units under what is known are passed over; that only keeps more
clauses. Usage: python3 drat_reference.py FORMULA PROOF
"""

import sys
from collections import defaultdict


class Refused(Exception):
    """The proof does not show that the formula has no model; the message says which step fails."""


def read_formula(text):
    """The clauses of a DIMACS CNF text."""
    clauses, clause = [], []
    for line in text.splitlines():
        if line.startswith(("c", "p")) or not line.strip():
            continue
        for number in map(int, line.split()):
            if number == 0:
                clauses.append(clause)
                clause = []
            else:
                clause.append(number)
    if clause:
        raise Refused("the formula ends inside a clause")
    return clauses


def read_proof(text):
    """The steps of a proof: (whether it deletes, the literals in their order)."""
    for line in text.splitlines():
        words = line.split()
        if not words or words[0] == "c":
            continue
        deletes = words[0] == "d"
        numbers = [int(word) for word in words[deletes:]]
        if not numbers or numbers[-1] != 0 or 0 in numbers[:-1]:
            raise Refused(f"no step of a proof: {line!r}")
        yield deletes, numbers[:-1]


class Checker:
    """The clauses at hand, two literals of each watched."""

    def __init__(self):
        self.clauses = {}  # by number: a list of different literals, the first two watched
        self.numbers = defaultdict(list)  # by the set of literals: the numbers of the clauses with these
        self.watching = defaultdict(set)  # by literal: numbers of the clauses that watch it
        self.having = defaultdict(set)  # by literal: numbers of the clauses that have it
        self.true = set()  # literals that hold
        self.trail = []
        self.next_number = 0
        self.refuted = False

    def assign(self, literal):
        """Makes a literal hold; False where its negation does."""
        if -literal in self.true:
            return False
        if literal not in self.true:
            self.true.add(literal)
            self.trail.append(literal)
        return True

    def propagate(self, done):
        """Follows up the trail from the place `done` on; False at a conflict."""
        while done < len(self.trail):
            false = -self.trail[done]
            done += 1
            for number in list(self.watching[false]):
                clause = self.clauses[number]
                if clause[0] == false:
                    clause[0], clause[1] = clause[1], clause[0]
                if clause[0] in self.true:
                    continue
                for at in range(2, len(clause)):
                    if -clause[at] not in self.true:
                        clause[1], clause[at] = clause[at], clause[1]
                        self.watching[false].discard(number)
                        self.watching[clause[1]].add(number)
                        break
                else:
                    if not self.assign(clause[0]):
                        return False
        return True

    def undo(self, length):
        """Takes back all but the first literals of the trail."""
        for literal in self.trail[length:]:
            self.true.discard(literal)
        del self.trail[length:]

    def insert(self, literals):
        """Adds a clause that is known to follow, and what it implies for good."""
        clause = sorted(dict.fromkeys(literals), key=lambda literal: -literal in self.true)
        number, self.next_number = self.next_number, self.next_number + 1
        self.clauses[number] = clause
        self.numbers[frozenset(clause)].append(number)
        for literal in clause:
            self.having[literal].add(number)
        for literal in clause[:2] if len(clause) > 1 else []:
            self.watching[literal].add(number)
        if len(clause) < 2 or -clause[1] in self.true:
            before = len(self.trail)
            if not clause or not self.assign(clause[0]) or not self.propagate(before):
                self.refuted = True

    def delete(self, literals):
        """Removes one clause with these literals, unless it says why a literal holds."""
        found = self.numbers.get(frozenset(literals))
        if not found or any(literal in self.true for literal in literals):
            return
        number = found.pop()
        for literal in self.clauses.pop(number):
            self.watching[literal].discard(number)
            self.having[literal].discard(number)

    def conflicts(self, literals):
        """Whether denying these literals leads to a conflict. What it assigns is left on the trail."""
        before = len(self.trail)
        return not (all(self.assign(-literal) for literal in literals) and self.propagate(before))

    def follows(self, literals):
        """Whether a clause may be added: by unit propagation, or as a tautology on its first literal."""
        root = len(self.trail)
        follows = self.conflicts(literals)
        if not follows and literals:
            denied = len(self.trail)
            follows = True
            for number in sorted(self.having[-literals[0]]):
                rest = [literal for literal in self.clauses[number] if literal != -literals[0]]
                follows = self.conflicts(rest)
                self.undo(denied)
                if not follows:
                    break
        self.undo(root)
        return follows


def check(formula, proof):
    """Checks a proof, given as texts; the number of clauses that were shown. Raises Refused."""
    checker = Checker()
    for clause in read_formula(formula):
        checker.insert(clause)
    added = 0
    for at, (deletes, literals) in enumerate(read_proof(proof), 1):
        if checker.refuted:
            break
        if deletes:
            checker.delete(literals)
        elif checker.follows(literals):
            checker.insert(literals)
            added += 1
        else:
            raise Refused(f"step {at} does not follow: {literals}")
    if not checker.refuted:
        raise Refused("the proof does not reach the empty clause")
    return added


def main():
    formula, proof = (open(path, encoding="ascii").read() for path in sys.argv[1:3])
    try:
        print(f"accepted: {check(formula, proof)} clauses shown")
    except Refused as refused:
        print(f"refused: {refused}")
        return 1
    return 0


if __name__ == "__main__":
    sys.exit(main())
