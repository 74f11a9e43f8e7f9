"""Tests of the checker of DRAT proofs, on cases small enough to follow by hand."""

import itertools
import unittest

from drat_reference import Refused, check, read_proof

# The example of the paper that defines the format: eight clauses over four variables without a model.
EXAMPLE = "p cnf 4 8\n1 2 -3 0\n-1 -2 3 0\n2 3 -4 0\n-2 -3 4 0\n-1 -3 -4 0\n1 3 4 0\n-1 2 4 0\n1 -2 -4 0\n"


def pigeons(holes):
    """One pigeon more than there are holes."""
    sits = lambda pigeon, hole: pigeon * holes + hole + 1  # noqa: E731
    clauses = [[sits(pigeon, hole) for hole in range(holes)] for pigeon in range(holes + 1)]
    for hole in range(holes):
        for one, other in itertools.combinations(range(holes + 1), 2):
            clauses.append([-sits(one, hole), -sits(other, hole)])
    return f"p cnf {holes * (holes + 1)} {len(clauses)}\n" + "".join(
        " ".join(map(str, clause)) + " 0\n" for clause in clauses
    )


class Steps(unittest.TestCase):
    def test_the_example_of_the_format(self):
        self.assertEqual(check(EXAMPLE, "-1 0\nd -1 2 4 0\n2 0\n0\n"), 2)

    def test_steps_that_do_not_follow(self):
        for proof in ("0\n", "-1 0\n2 0\n1 0\n3 4 0\n", "2 0\n", ""):
            formula = EXAMPLE.replace("1 -2 -4 0\n", "") if "2 0" in proof else EXAMPLE
            with self.assertRaises(Refused):
                check(formula, proof)

    def test_a_model_stays_a_model(self):
        # Whatever is dropped from the example has a model, so nothing refutes it.
        lines = EXAMPLE.splitlines(keepends=True)
        for at in range(1, len(lines)):
            with self.assertRaises(Refused):
                check("".join(lines[:at] + lines[at + 1 :]), "-1 0\n2 0\n0\n")

    def test_definitions_of_new_variables(self):
        # 5 is defined as 1 and 2; the clauses follow from nothing, but are tautologies on their first literals.
        formula = "p cnf 2 4\n1 2 0\n1 -2 0\n-1 2 0\n-1 -2 0\n"
        definition = "5 -1 -2 0\n-5 1 0\n-5 2 0\n"
        self.assertEqual(check(formula, definition + "1 0\n"), 3 + 1)
        with self.assertRaises(Refused):
            # Used before it is defined the other way round: 5 holds, so it may not be made to fail.
            check("p cnf 2 2\n1 2 0\n-1 -2 0\n", "5 0\n-5 1 0\n")

    def test_pigeons_are_not_refuted_by_propagation(self):
        with self.assertRaises(Refused):
            check(pigeons(3), "0\n")

    def test_lines_that_are_no_steps(self):
        for line in ("1 2", "1 0 2 0", "d"):
            with self.assertRaises(Refused):
                list(read_proof(line))


if __name__ == "__main__":
    unittest.main()
