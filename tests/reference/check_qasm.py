"""Reads the OpenQASM 3 files of the command with the standard's own reference parser, and runs small ones.

Files: every demo in `problems/` and every problem in `tiny/`, at each level, with each mark, as an oracle and as a
whole search. Each is parsed by the PyPI package `openqasm3`; a file above `MOST_STATEMENTS` is parsed up to there.
Where a run is affordable, the parsed program is run on a sparse state and held against the problem:

- a phase oracle, on all inputs in superposition with a label for each: |x>|0> becomes (-1)^f(x) |x>|0>, up to one
  factor for all x;
- a bit oracle, likewise: |x>|y>|0> becomes |x>|y xor f(x)>|0> for both y, up to one factor for all x and y;
- outcomes in mid-circuit are drawn at random, several times over; their probabilities must not depend on the input;
- a whole search starts from qubits in a random basis state (the standard calls them undefined) and must find each
  marked state with probability sin^2((2k+1) theta) / M, to 1e-9, for the k that the planning rule gives.

f comes from the reference readers of this folder; nothing here is shared with the command.
"""

import json
import math
import multiprocessing
import pathlib
import random
import re
import sys
import tempfile
from collections import Counter

import numpy as np
from openqasm3 import ast

import dimacs_reference
import tally_reference
from command import ROOT, CommandFailed, options, run
from qasm_machine import Program, QasmError, Run, labelled_start, undefined_start

LEVELS = ("wide", "toffoli", "clifford-t", "feedback")
MARKS = ("phase", "bit")
MOST_STATEMENTS = 4_000  # of one file that are parsed: the parser reads some 1,000 to 3,000 a second
MOST_TOKENS = 40_000  # likewise: a gate with many operands takes the parser as long as many gates
TOKEN = re.compile(r"//[^\n]*|\w+|[^\w\s]")
MOST_STEPS = 250_000_000  # gates times inputs of one run: some twenty seconds
MOST_SEARCH = 18  # qubits of a search register whose inputs are all run
OUTCOME_STRINGS = 3  # runs of a file with measurements in mid-circuit
PRECISION = 1e-9
FEWEST_PROBLEMS = 9


class Differs(Exception):
    """A file that does not do what the problem says."""


class Subject:
    """A problem file and what the reference says of it: how many bits, and which codes are solutions."""

    def __init__(self, path, bits, codes):
        self.path, self.bits = path, bits
        self.marked = codes() if bits <= MOST_SEARCH else None  # None: too many to list

    @classmethod
    def of_problem(cls, path, problem):
        return cls(path, problem.bits, lambda: tally_reference.codes(problem))

    @classmethod
    def of_file(cls, path):
        if path.suffix == ".tally":
            return cls.of_problem(path, tally_reference.read_file(path))
        formula = dimacs_reference.read(path.read_text())
        return cls(path, formula.variables, lambda: {int(code) for code in dimacs_reference.models(formula)})

    def table(self, placed):
        """f by value of the search register, whose qubit i carries bit `placed[i]`; other bits are free to be found."""
        marked = {sum((code >> bit & 1) << place for place, bit in enumerate(placed)) for code in self.marked}
        return np.array([code in marked for code in range(1 << len(placed))])


def head(text):
    """The text itself, or its start within the limits with the open braces closed; whether it is whole; its statements."""
    depth = tokens = statements = 0
    for token in TOKEN.finditer(text):
        if token.group().startswith("//"):
            continue
        tokens += 1
        if token.group() in "{}":
            depth += 1 if token.group() == "{" else -1
        elif token.group() == ";":
            statements += 1
            if statements == MOST_STATEMENTS or tokens > MOST_TOKENS:
                complete = text[token.end() :].strip(" \t\r\n}") == ""
                return text[: token.end()] + "}" * depth, complete, statements
    return text, True, statements


def gates(statements):
    """How many gates a program applies, loops written out; of two branches, the longer."""
    total = 0
    for node in statements:
        if isinstance(node, ast.ForInLoop):
            given = node.set_declaration
            if isinstance(given, ast.RangeDefinition) and isinstance(given.end, ast.IntegerLiteral):
                times = max(0, given.end.value - given.start.value + 1)
            else:
                times = 1
            total += times * gates(node.block)
        elif isinstance(node, ast.BranchingStatement):
            total += max(gates(node.if_block), gates(node.else_block))
        else:
            total += isinstance(node, (ast.QuantumGate, ast.QuantumMeasurementStatement, ast.QuantumReset))
    return total


def has_measurement(statements):
    """Whether a measurement stands in the statements."""
    for node in statements:
        if isinstance(node, ast.QuantumMeasurementStatement):
            return True
        if isinstance(node, ast.ForInLoop) and has_measurement(node.block):
            return True
        if isinstance(node, ast.BranchingStatement) and has_measurement([*node.if_block, *node.else_block]):
            return True
    return False


def check_oracle(program, table, mark, seed):
    """One run of an oracle on every input. Gives how many outcomes it drew had a choice."""
    widths = {"search": program.size("search")} | ({"mark": 1} if mark == "bit" else {})
    if any(program.size(name) != width for name, width in widths.items()) or len(table) != 1 << widths["search"]:
        raise Differs(f"registers {program.registers} do not fit a {mark} oracle over {len(table)} inputs")
    if mark == "phase" and program.size("mark"):
        raise Differs("a phase oracle with a mark register")
    run_ = Run(program, labelled_start(program, widths), random.Random(seed))
    state = run_.state
    if run_.spread > PRECISION:
        raise Differs(f"an outcome's probability differs by {run_.spread:.3g} from input to input")
    inputs, labels = 1 << sum(widths.values()), state.labels
    if len(state) != inputs or len(np.unique(labels)) != inputs:
        raise Differs(f"{inputs} basis states went in, {len(state)} came out")
    search = program.registers["search"]
    if (state.value(search) != labels & (len(table) - 1)).any():
        raise Differs("the search register is not as it was")
    clean = [qubit for name, qubits in program.registers.items() if name not in widths for qubit in qubits]
    if any(state.bit(qubit).any() for qubit in clean):
        raise Differs("a work qubit is not clean afterwards")
    truth = table[labels & (len(table) - 1)]
    signs = np.ones(inputs)
    if mark == "phase":
        signs = np.where(truth, -1.0, 1.0)
    elif (state.value(program.registers["mark"]) != (labels >> widths["search"]) ^ truth).any():
        raise Differs("the mark is not y xor f(x)")
    factors = state.amplitudes * signs
    off = np.abs(factors - factors[0]).max()
    if off > PRECISION or abs(abs(factors[0]) - 1) > PRECISION:
        raise Differs(f"amplitudes are off by {off:.3g} from one common factor of size 1")
    return run_.probability < 1 - PRECISION


def planned(space, marked):
    """The smallest k with the greatest p_k among k <= ceil(pi / (4 theta)), and p_k = sin^2((2k+1) theta).

    Boyer, Brassard, Hoyer, Tapp, "Tight bounds on quantum searching", Fortschritte der Physik 46 (1998), section 3.
    """
    theta = math.asin(math.sqrt(marked / space))
    best, success = 0, marked / space
    for k in range(1, math.ceil(math.pi / (4 * theta)) + 1):
        chance = math.sin((2 * k + 1) * theta) ** 2
        if chance > success + 1e-12:
            best, success = k, chance
    return best, success


def check_search(program, table, seed):
    """One run of a whole search; its distribution when `search` is measured into `found`."""
    draw = random.Random(seed)
    run_ = Run(program, undefined_start(program, draw), draw)
    if "found" not in run_.measured or len(run_.measured["found"]) != len(table):
        raise Differs("the search register is not measured as a whole into `found`")
    k, success = planned(len(table), int(table.sum()))
    expected = np.where(table, success / table.sum(), (1 - success) / max(1, (~table).sum()))
    off = np.abs(run_.measured["found"] - expected).max()
    if off > PRECISION:
        got = run_.measured["found"][table].sum()
        raise Differs(f"success {got:.12f} where {success:.12f} is expected after {k} iterations; off by {off:.3g}")
    return run_.probability < 1 - PRECISION


def examine(path, subject, mark, whole):
    """Parses a file and runs it if that is affordable; gives what was done, as words for the tally."""
    text, complete, statements = head(path.read_text())
    program = Program(text)
    done = Counter({"parsed to the end" if complete else "parsed in part": 1, "statements": statements})
    size = program.size("search")
    if not complete or subject.marked is None or size > MOST_SEARCH:
        return done
    steps = gates(program.tree.statements) << (size + (mark == "bit"))
    if steps > MOST_STEPS:
        return done
    beside = path.with_suffix(".places.json")
    placed = json.loads(beside.read_text())["searched"] if beside.exists() else list(range(subject.bits))
    table = subject.table(placed)
    times = OUTCOME_STRINGS if has_measurement(program.tree.statements) and not whole else 1
    if whole and "feedback" in path.name:
        times = OUTCOME_STRINGS
    for seed in range(times):
        chance = check_search(program, table, seed) if whole else check_oracle(program, table, mark, seed)
        done["runs"] += 1
        done["runs in which outcomes had a choice"] += chance
    done["searches run" if whole else "oracles run"] += 1
    return done


def may_be_refused(subject, mark, whole):
    """Whether the command may decline to write a file: it marks nothing or everything, or such a search is not made."""
    if subject.marked is not None:
        trivial = len(subject.marked) in (0, 1 << subject.bits)
    else:
        trivial = subject.path.suffix == ".tally" and tally_reference.count(tally_reference.read_file(subject.path)) == 0
    return trivial or (whole and mark == "bit")


def in_words(done):
    """A tally of what was done, as a sentence."""
    return ", ".join(f"{number} {what}" for what, number in sorted(done.items()) if number)


def check_problem(task):
    """All files of one problem; gives lines to print and a tally of what was done."""
    command, path = task
    name, lines, done = path.name, [], Counter()
    try:
        subject = Subject.of_file(path)
    except Exception as error:  # a worker reports, whatever happened
        return [f"FAIL {name}: the reference refuses it: {error}"], Counter(failed=1)
    with tempfile.TemporaryDirectory() as folder:
        for level in LEVELS:
            for mark in MARKS:
                for whole in (False, True):
                    kind = "search" if whole else "oracle"
                    out = pathlib.Path(folder) / f"{level}-{mark}-{kind}.qasm"
                    more = ["--whole", "--start", "strings"] if whole else []
                    try:
                        done += check_file(command, subject, path, level, mark, more, out)
                    except Exception as error:
                        done["failed"] += 1
                        lines.append(f"FAIL {name}, {level}, {mark}, {kind}: {type(error).__name__}: {error}")
    marked = "solutions not listed" if subject.marked is None else f"{len(subject.marked)} marked"
    lines.append(f"     {name} ({subject.bits} bits, {marked}): {in_words(done)}")
    return lines, done


def check_file(command, subject, path, level, mark, more, out):
    """One file: written by the command, parsed, run."""
    whole = "--whole" in more
    try:
        run(command, "compile", path, "--level", level, "--mark", mark, *more, "-o", out)
    except CommandFailed as error:
        if error.code == 2 and may_be_refused(subject, mark, whole):
            return Counter({"declined, as may be": 1})
        if error.code != 2 or "--no-narrowing" in more:
            raise
        # The bits that are left to search may all be free; the circuit over the bits as given there is in any case.
        return check_file(command, subject, path, level, mark, [*more, "--no-narrowing"], out)
    return Counter(files=1) + examine(out, subject, mark, whole)


def main():
    given = options(__doc__.splitlines()[0], ("--jobs", {"type": int, "default": 2, "help": "worker processes"}))
    demos = sorted(path for path in (ROOT / "problems").glob("*") if path.suffix in (".tally", ".cnf"))
    tiny = sorted(pathlib.Path(__file__).parent.joinpath("tiny").glob("*.*"))
    if len(demos) < FEWEST_PROBLEMS or len(tiny) < FEWEST_PROBLEMS:
        print(f"only {len(demos)} demos and {len(tiny)} tiny problems were found: is this the right tree?")
        return 1
    total = Counter()
    tasks = [(given.command, path) for path in [*demos, *tiny]]
    with multiprocessing.Pool(given.jobs) as pool:
        for lines, done in pool.imap(check_problem, tasks):
            print("\n".join(lines), flush=True)
            total += done
    print(f"OpenQASM of {len(tasks)} problems: {in_words(total)}")
    if total["oracles run"] < 8 * (len(tiny) - 2) or total["searches run"] < 4 * (len(tiny) - 2):
        print(f"FAIL too few were run: {total['oracles run']} oracles, {total['searches run']} searches")
        return 1
    return 1 if total["failed"] else 0


if __name__ == "__main__":
    sys.exit(main())
