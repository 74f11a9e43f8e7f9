"""Tests of the OpenQASM machine and of the checks on top of it, on circuits written by hand.

The checks must pass right circuits and must see the three faults that basis states alone do not show.
"""

import math
import random
import unittest

import numpy as np

import check_qasm
import dimacs_reference
from qasm_machine import Program, QasmError, Run, labelled_start
from sparse_state import SparseState

HEADER = 'OPENQASM 3.0;\ninclude "stdgates.inc";\n'
AND = np.array([False, False, False, True])
AND3 = np.arange(8) == 7


def final(body, qubits="qubit[3] q;"):
    """The state that a program makes of |0…0>, as a dense vector."""
    program = Program(HEADER + qubits + body)
    run = Run(program, SparseState(program.qubits), random.Random(1))
    dense = np.zeros(1 << program.qubits, dtype=complex)
    dense[run.state.value(range(program.qubits))] = run.state.amplitudes
    return dense


def oracle(body, table, mark="phase", seeds=range(4), work="qubit[2] work; bit[2] outcome;"):
    """Holds a hand-written oracle against a truth table."""
    size = len(table).bit_length() - 1
    text = HEADER + f"// by hand\nqubit[{size}] search;\n" + ("qubit[1] mark;" if mark == "bit" else "") + work + body
    for seed in seeds:
        check_qasm.check_oracle(Program(text), table, mark, seed)


class Gates(unittest.TestCase):
    """Gates against matrices written out here."""

    def column(self, body):
        return final(body, "qubit[1] q;")

    def test_one_qubit(self):
        root = 1 / math.sqrt(2)
        for body, expected in {
            "x q[0];": [0, 1], "h q[0];": [root, root], "x q[0]; h q[0];": [root, -root], "h q[0]; z q[0];": [root, -root],
            "h q[0]; s q[0];": [root, 1j * root], "h q[0]; sdg q[0];": [root, -1j * root],
            "h q[0]; t q[0];": [root, (1 + 1j) / 2], "h q[0]; tdg q[0];": [root, (1 - 1j) / 2],
            "h q[0]; inv @ t q[0];": [root, (1 - 1j) / 2], "h q[0]; p(pi/2) q[0];": [root, 1j * root],
            "ry(pi/2) q[0];": [root, root], "ry(2 * pi / 3) q[0];": [0.5, math.sqrt(3) / 2],
            "h q[0]; rz(pi/2) q[0];": [(1 - 1j) / 2, (1 + 1j) / 2], "rx(pi) q[0];": [0, -1j], "y q[0];": [0, 1j],
            "x q[0]; y q[0];": [-1j, 0], "sx q[0]; sx q[0];": [0, 1], "gphase(pi/2);": [1j, 0],
        }.items():  # fmt: skip
            with self.subTest(body=body):
                np.testing.assert_allclose(self.column(body), expected, atol=1e-12)

    def test_controls_and_broadcast(self):
        for body, code in {
            "x q[0]; cx q[0], q[1];": 3, "ccx q[0], q[1], q[2];": 0, "x q; ccx q[0], q[1], q[2];": 3, "x q;": 7,
            "negctrl @ x q[0], q[2];": 4, "x q[1]; negctrl @ ctrl @ x q[0], q[1], q[2];": 6,
            "x q[1]; ctrl @ negctrl @ x q[0], q[1], q[2];": 2, "negctrl(2) @ x q[0], q[1], q[2];": 4,
            "x q[0]; swap q[0], q[2];": 4, "x q[0]; cswap q[1], q[0], q[2];": 1, "for int i in [0:2] { x q[i]; }": 7,
            "for int i in [0:2:2] x q[i];": 5, "for uint i in {1, 2} { x q[i]; }": 6,
            "gate both a, b { x a; cx a, b; } both q[2], q[0];": 5, "gate both a, b { x a; cx a, b; } x q[1]; ctrl @ both q[1], q[2], q[0];": 7,
            "gate both a, b { x a; cx a, b; } x q[2]; inv @ both q[2], q[0];": 1,
            "const int k = 2; for int i in [1:k] { x q[i]; }": 6,
        }.items():  # fmt: skip
            with self.subTest(body=body):
                np.testing.assert_allclose(final(body), np.arange(8) == code, atol=1e-12)

    def test_textbook_toffoli(self):
        """The doubly controlled X of the standard gate file (from memory), between two H: a doubly controlled Z."""
        body = """h search[2]; h search[2]; cx search[1], search[2]; tdg search[2]; cx search[0], search[2]; t search[2];
            cx search[1], search[2]; tdg search[2]; cx search[0], search[2]; t search[1]; t search[2];
            h search[2]; cx search[0], search[1]; t search[0]; tdg search[1]; cx search[0], search[1]; h search[2];"""
        oracle(body, AND3)

    def test_many_qubits_use_several_words(self):
        program = Program(HEADER + "qubit[70] q; x q[69]; h q[1]; cx q[69], q[63]; cx q[1], q[68]; cx q[1], q[68]; h q[1];")
        state = Run(program, SparseState(70), random.Random(0)).state
        self.assertEqual((len(state), state.value([1, 63, 68, 69]).tolist()), (1, [0b1010]))

    def test_refused_programs(self):
        for body in (
            "x q[3];", "cx q[0], q[0];", "ccz q[0], q[1], q[2];", "x r[0];", "cx q[0];", "rz q[0];", "if (c[0]) { x q[0]; }",
            "pow(2) @ x q[0];", "ctrl(3) @ x q[0], q[1], q[2];", "int i = 0; while (i < 1) { x q[0]; }",
        ):  # fmt: skip
            with self.subTest(body=body), self.assertRaises(QasmError):
                final(body)
        with self.assertRaises(QasmError):
            Run(Program("OPENQASM 3.0; qubit[1] q; x q[0];"), SparseState(1), random.Random(0))


class Oracles(unittest.TestCase):
    """Right oracles, and oracles with one fault."""

    COMPUTE = "ccx search[0], search[1], work[0]; ctrl @ z work[0], search[2];"
    MEASURED = "h work[0]; outcome[0] = measure work[0]; if (outcome[0]) { cz search[0], search[1]; } reset work[0];"

    def test_right_ones(self):
        oracle("reset work; ctrl(2) @ z search[0], search[1], search[2];", AND3)
        oracle("reset work;" + self.COMPUTE + "ccx search[0], search[1], work[0];", AND3)
        oracle("reset work;" + self.COMPUTE + self.MEASURED, AND3, seeds=range(8))
        oracle("ccx search[0], search[1], mark[0];", AND, "bit")
        oracle("negctrl @ z search[1], search[0];", np.array([False, True, False, False]))

    def test_measurement_has_a_choice(self):
        text = HEADER + "qubit[3] search; qubit[1] work; bit[1] outcome;" + self.COMPUTE + self.MEASURED
        self.assertTrue(check_qasm.check_oracle(Program(text), AND3, "phase", 0))

    def wrong(self, body, table, mark="phase"):
        with self.assertRaises(check_qasm.Differs):
            oracle(body, table, mark, seeds=range(8))

    def test_garbage_erased_by_reset(self):
        self.wrong(self.COMPUTE + "reset work[0];", AND3)

    def test_garbage_measured_without_its_h(self):
        self.wrong(self.COMPUTE + "outcome[0] = measure work[0]; if (outcome[0]) { x work[0]; }", AND3)

    def test_swapped_corrections(self):
        body = """ccx search[0], search[1], work[0]; ccx search[1], search[2], work[1]; cz work[0], work[1];
            h work[0]; outcome[0] = measure work[0]; h work[1]; outcome[1] = measure work[1];
            if (outcome[%d]) { cz search[0], search[1]; } if (outcome[%d]) { cz search[1], search[2]; } reset work;"""
        oracle(body % (0, 1), AND3, seeds=range(8))
        self.wrong(body % (1, 0), AND3)

    def test_other_faults(self):
        self.wrong("cz search[0], search[1];", AND3)
        self.wrong("ccx search[0], search[1], work[0];", AND3)
        self.wrong("ctrl(2) @ z search[0], search[1], search[2]; x search[0];", AND3)
        self.wrong("ctrl(2) @ z search[0], search[1], search[2]; h search[0];", AND3)
        self.wrong("ctrl(2) @ s search[0], search[1], search[2];", AND3)
        self.wrong("ccx search[0], search[1], mark[0]; cz search[0], mark[0];", AND, "bit")
        self.wrong("cx search[0], mark[0];", AND, "bit")
        self.wrong("ctrl @ p(0.0001) search[0], search[1]; ctrl(2) @ z search[0], search[1], search[2];", AND3)


class Searches(unittest.TestCase):
    """Whole searches."""

    BODY = """qubit[3] search; bit[3] found; %s h search;
        for int i in [1:%d] { ctrl(2) @ z search[0], search[1], search[2]; h search; x search;
        ctrl(2) @ z search[0], search[1], search[2]; x search; h search; }
        found = measure search;"""

    def test_planning_rule(self):  # exact fractions: Boyer, Brassard, Hoyer, Tapp 1998, worked out exactly
        for space, marked, k, success in ((4, 1, 1, 1), (8, 1, 2, 121 / 128), (8, 3, 1, 27 / 32), (16, 1, 3, 63001 / 65536),
                                          (8, 6, 0, 3 / 4), (8, 4, 0, 1 / 2), (64, 5, 2, 0.976353883743286)):  # fmt: skip
            with self.subTest(space=space, marked=marked):
                got = check_qasm.planned(space, marked)
                self.assertEqual(got[0], k)
                self.assertAlmostEqual(got[1], success, 12)

    def test_right_and_wrong(self):
        check_qasm.check_search(Program(HEADER + self.BODY % ("reset search;", 2)), AND3, 5)
        for reset, times in (("", 2), ("reset search;", 1), ("reset search;", 3)):
            with self.subTest(reset=reset, times=times), self.assertRaises(check_qasm.Differs):
                check_qasm.check_search(Program(HEADER + self.BODY % (reset, times)), AND3, 5)


class Texts(unittest.TestCase):
    """Cutting long files, and CNF."""

    def test_head_closes_what_it_opens(self):
        text = HEADER + "qubit[2] q; // a comment; with {\n for int i in [1:2] {" + "x q[0];\n" * 5000 + "}\nx q[1];"
        short, complete, statements = check_qasm.head(text)
        self.assertEqual((complete, statements), (False, check_qasm.MOST_STATEMENTS))
        self.assertLess(check_qasm.gates(Program(short).tree.statements), 2 * check_qasm.MOST_STATEMENTS)

    def test_dimacs(self):  # Ramsey: two colours for the edges of K_5 without a triangle in one colour: 12
        edges = {}
        for a in range(1, 6):
            for b in range(a + 1, 6):
                edges[a, b] = len(edges) + 1
        clauses = ""
        for a in range(1, 6):
            for b in range(a + 1, 6):
                for c in range(b + 1, 6):
                    triangle = [edges[a, b], edges[b, c], edges[a, c]]
                    clauses += " ".join(map(str, triangle)) + " 0\n" + " ".join(str(-e) for e in triangle) + " 0\n"
        self.assertEqual(dimacs_reference.count(dimacs_reference.read(f"c K5\np cnf 10 20\n{clauses}")), 12)
        for text in ("1 2 0", "p cnf 2 1\n1 3 0", "p cnf 2 1\n1 2", "p dnf 2 1\n1 0"):
            with self.subTest(text=text), self.assertRaises(dimacs_reference.DimacsError):
                dimacs_reference.read(text)


if __name__ == "__main__":
    unittest.main()
