"""Runs OpenQASM 3 programs, as parsed by the standard's own reference parser, on a `SparseState`.

In:   a program tree of the PyPI package `openqasm3`, a start state, a source of random outcomes.
Out:  the final state, the outcomes of measurements and their probabilities, the distribution of every register that
      was measured as a whole.
How:  a plain walk over the tree. Everything that the language has and this walk does not know is an error, and so is
      what the parser lets pass: a name never declared, an index outside its register, a qubit given twice to one gate.
"""

import cmath
import math

import numpy as np
import openqasm3
from openqasm3 import ast

from sparse_state import SparseState

ROOT = 1 / math.sqrt(2)


class QasmError(Exception):
    """A program that this machine refuses."""


def turn(angle):
    return cmath.exp(1j * angle)


def diagonal(first, second):
    return ((first, 0), (0, second))


def rotation_y(angle):
    return ((math.cos(angle / 2), -math.sin(angle / 2)), (math.sin(angle / 2), math.cos(angle / 2)))


def rotation_x(angle):
    return ((math.cos(angle / 2), -1j * math.sin(angle / 2)), (-1j * math.sin(angle / 2), math.cos(angle / 2)))


# The one-qubit gates of the standard gate file: name -> (number of parameters, matrix).
ONE_QUBIT = {
    "id": (0, lambda: diagonal(1, 1)),
    "x": (0, lambda: ((0, 1), (1, 0))),
    "y": (0, lambda: ((0, -1j), (1j, 0))),
    "z": (0, lambda: diagonal(1, -1)),
    "h": (0, lambda: ((ROOT, ROOT), (ROOT, -ROOT))),
    "s": (0, lambda: diagonal(1, 1j)),
    "sdg": (0, lambda: diagonal(1, -1j)),
    "t": (0, lambda: diagonal(1, turn(math.pi / 4))),
    "tdg": (0, lambda: diagonal(1, turn(-math.pi / 4))),
    "sx": (0, lambda: (((1 + 1j) / 2, (1 - 1j) / 2), ((1 - 1j) / 2, (1 + 1j) / 2))),
    "p": (1, lambda a: diagonal(1, turn(a))),
    "phase": (1, lambda a: diagonal(1, turn(a))),
    "rx": (1, rotation_x),
    "ry": (1, rotation_y),
    "rz": (1, lambda a: diagonal(turn(-a / 2), turn(a / 2))),
}
# Gates of the standard gate file that are a one-qubit gate under controls: name -> (controls, that gate).
CONTROLLED = {
    "cx": (1, "x"), "CX": (1, "x"), "cy": (1, "y"), "cz": (1, "z"), "ch": (1, "h"), "ccx": (2, "x"),
    "cp": (1, "p"), "cphase": (1, "p"), "crx": (1, "rx"), "cry": (1, "ry"), "crz": (1, "rz"),
}  # fmt: skip

CONSTANTS = {"pi": math.pi, "π": math.pi, "tau": math.tau, "τ": math.tau, "euler": math.e, "ℇ": math.e}
BINARY = {
    "+": lambda a, b: a + b, "-": lambda a, b: a - b, "*": lambda a, b: a * b, "**": lambda a, b: a**b,
    "==": lambda a, b: a == b, "!=": lambda a, b: a != b, "<": lambda a, b: a < b, ">": lambda a, b: a > b,
    "<=": lambda a, b: a <= b, ">=": lambda a, b: a >= b, "&&": lambda a, b: bool(a) and bool(b),
    "||": lambda a, b: bool(a) or bool(b), "^": lambda a, b: int(a) ^ int(b), "&": lambda a, b: int(a) & int(b),
    "|": lambda a, b: int(a) | int(b), "%": lambda a, b: a % b,
}  # fmt: skip
UNARY = {"-": lambda a: -a, "!": lambda a: not a, "~": lambda a: 1 - int(a)}


class Program:
    """A parsed program: its tree and its registers."""

    def __init__(self, text):
        self.tree = openqasm3.parse(text)
        if not (self.tree.version or "").startswith("3"):
            raise QasmError(f"the version is {self.tree.version}, expected 3")
        self.registers, self.qubits, self.includes = {}, 0, set()
        for statement in self.tree.statements:
            if isinstance(statement, ast.Include):
                self.includes.add(statement.filename)
            if isinstance(statement, ast.QubitDeclaration):
                size = 1 if statement.size is None else statement.size.value
                if size < 1 or statement.qubit.name in self.registers:
                    raise QasmError(f"register {statement.qubit.name}: size {size}, or declared twice")
                self.registers[statement.qubit.name] = list(range(self.qubits, self.qubits + size))
                self.qubits += size

    def size(self, name):
        """The qubits of a register; 0 if there is none of that name."""
        return len(self.registers.get(name, ()))


class Run:
    """One run of a program."""

    def __init__(self, program, state, random):
        self.program, self.state, self.random = program, state, random
        self.bits = {}  # classical registers: name -> list of 0/1
        self.variables = [dict(CONSTANTS)]  # innermost scope last
        self.gates = {}  # gates that the program defines
        self.measured = {}  # classical register -> distribution when it was measured as a whole
        self.probability = 1.0  # of the outcomes drawn so far
        self.spread = 0.0  # greatest difference between labels in the probability of an outcome
        self.steps = 0  # gates applied
        self.plans = {}  # gate statements whose operands never change, worked out once
        for statement in program.tree.statements:
            self.statement(statement)

    def statement(self, node):
        handler = HANDLERS.get(type(node))
        if handler is None:
            raise QasmError(f"a statement this machine does not know: {type(node).__name__}")
        handler(self, node)

    def block(self, statements):
        self.variables.append({})
        for statement in statements:
            self.statement(statement)
        self.variables.pop()

    # Values.

    def value(self, node):
        if isinstance(node, (ast.IntegerLiteral, ast.FloatLiteral)):
            return node.value
        if isinstance(node, ast.BooleanLiteral):
            return node.value
        if isinstance(node, ast.Identifier):
            return self.named(node.name)
        if isinstance(node, ast.UnaryExpression):
            return UNARY[node.op.name](self.value(node.expression))
        if isinstance(node, ast.BinaryExpression):
            left, right = self.value(node.lhs), self.value(node.rhs)
            if node.op.name == "/":
                both = isinstance(left, int) and isinstance(right, int)
                return left // right if both else left / right
            return BINARY[node.op.name](left, right)
        if isinstance(node, ast.IndexExpression) and isinstance(node.collection, ast.Identifier):
            return self.bit_list(node.collection.name)[self.index(node.index, node.collection.name)]
        raise QasmError(f"an expression this machine does not know: {type(node).__name__}")

    def named(self, name):
        for scope in reversed(self.variables):
            if name in scope:
                return scope[name]
        bits = self.bit_list(name)
        return sum(bit << place for place, bit in enumerate(bits))

    def bit_list(self, name):
        if name not in self.bits:
            raise QasmError(f"the name {name} is not declared")
        return self.bits[name]

    def index(self, indices, name):
        if len(indices) != 1:
            raise QasmError(f"{name} is indexed {len(indices)} times at once")
        found = self.value(indices[0])
        size = len(self.bits.get(name) or self.program.registers.get(name, ()))
        if not 0 <= found < size:
            raise QasmError(f"index {found} is outside {name} of {size}")
        return found

    # Declarations.

    def include(self, node):
        if node.filename != "stdgates.inc":
            raise QasmError(f"an unknown file is included: {node.filename}")

    def nothing(self, node):
        pass

    def constant(self, node):
        self.variables[-1][node.identifier.name] = self.value(node.init_expression)

    def classical(self, node):
        name = node.identifier.name
        if isinstance(node.type, ast.BitType):
            self.bits[name] = [0] * (1 if node.type.size is None else self.value(node.type.size))
            if isinstance(node.init_expression, ast.QuantumMeasurement):
                self.measure_into(node.init_expression.qubit, ast.Identifier(name))
            elif node.init_expression is not None:
                given = int(self.value(node.init_expression))
                self.bits[name] = [given >> place & 1 for place in range(len(self.bits[name]))]
        elif isinstance(node.type, (ast.IntType, ast.UintType, ast.FloatType, ast.BoolType)):
            given = node.init_expression
            self.variables[-1][name] = 0 if given is None else self.value(given)
        else:
            raise QasmError(f"{name} has a type this machine does not know")

    def define(self, node):
        if node.name.name in ONE_QUBIT or node.name.name in CONTROLLED or node.name.name in self.gates:
            raise QasmError(f"the gate {node.name.name} is defined twice")
        self.gates[node.name.name] = node

    def assignment(self, node):
        name = node.lvalue.name if isinstance(node.lvalue, ast.Identifier) else node.lvalue.name.name
        value = int(self.value(node.rvalue))
        if node.op.name == "^=":
            value ^= int(self.value(index_expression(node.lvalue)))
        elif node.op.name != "=":
            raise QasmError(f"the assignment {node.op.name} is not known here")
        bits = self.bit_list(name)
        if isinstance(node.lvalue, ast.Identifier):
            bits[:] = [value >> place & 1 for place in range(len(bits))]
        else:
            bits[self.index(node.lvalue.indices[0], name)] = value & 1

    # Control.

    def branch(self, node):
        self.block(node.if_block if self.value(node.condition) else node.else_block)

    def loop(self, node):
        given = node.set_declaration
        if isinstance(given, ast.RangeDefinition):
            step = 1 if given.step is None else self.value(given.step)
            start, end = self.value(given.start), self.value(given.end)
            values = range(start, end + (1 if step > 0 else -1), step)  # both ends are meant, as the standard says
        elif isinstance(given, ast.DiscreteSet):
            values = [self.value(value) for value in given.values]
        else:
            raise QasmError("a loop over something this machine does not know")
        for value in values:
            self.variables.append({node.identifier.name: value})
            self.block(node.block)
            self.variables.pop()

    # Qubits.

    def operand(self, node):
        """The qubits that an operand names: one, or a whole register."""
        name = node.name if isinstance(node, ast.Identifier) else node.name.name
        for scope in reversed(self.variables):
            if isinstance(scope.get(name), Qubit):
                return [scope[name].number]
        if name not in self.program.registers:
            raise QasmError(f"the qubits {name} are not declared")
        qubits = self.program.registers[name]
        if isinstance(node, ast.Identifier):
            return qubits
        if len(node.indices) != 1 or not isinstance(node.indices[0], list):
            raise QasmError(f"{name} is indexed in a way this machine does not know")
        return [qubits[self.index(node.indices[0], name)]]

    def reset(self, node):
        for qubit in self.operand(node.qubits):
            if self.draw(qubit):
                self.state.apply(ONE_QUBIT["x"][1](), qubit, [])

    def draw(self, qubit):
        outcome, probability, spread = self.state.measure(qubit, self.random)
        self.probability *= probability
        self.spread = max(self.spread, spread)
        return outcome

    def measurement(self, node):
        self.measure_into(node.measure.qubit, node.target)

    def measure_into(self, source, target):
        qubits = self.operand(source)
        if target is None:
            for qubit in qubits:
                self.draw(qubit)
            return
        whole = isinstance(target, ast.Identifier)
        name = target.name if whole else target.name.name
        bits = self.bit_list(name)
        places = range(len(bits)) if whole else [self.index(target.indices[0], name)]
        if len(places) != len(qubits):
            raise QasmError(f"{len(qubits)} qubits measured into {len(places)} bits of {name}")
        if whole and len(set(self.state.labels.tolist())) == 1:
            self.measured[name] = self.state.distribution(qubits)
        for place, qubit in zip(places, qubits):
            bits[place] = self.draw(qubit)

    # Gates.

    def gate(self, node):
        plan = self.plans.get(id(node))
        if plan is None:
            plan = self.plan(node)
            if self.is_fixed(node):
                self.plans[id(node)] = plan
        for step in plan:
            self.steps += 1
            self.state.apply(*step)

    def is_fixed(self, node):
        indexed = all(
            isinstance(q, ast.IndexedIdentifier) and isinstance(q.indices[0][0], ast.IntegerLiteral) for q in node.qubits
        )
        return indexed and not node.arguments and node.name.name not in self.gates

    def plan(self, node):
        """What a gate statement does: steps `(matrix, target, controls)`."""
        operands = [self.operand(qubit) for qubit in node.qubits]
        length = max((len(operand) for operand in operands), default=1)
        if any(len(operand) not in (1, length) for operand in operands):
            raise QasmError(f"{node.name.name}: registers of several sizes")
        arguments = [self.value(argument) for argument in node.arguments]
        found = []
        for at in range(length):
            qubits = [operand[at if len(operand) > 1 else 0] for operand in operands]
            if len(set(qubits)) != len(qubits):
                raise QasmError(f"{node.name.name}: one qubit given twice")
            found += self.steps_of(node.name.name, node.modifiers, arguments, qubits)
        return found

    def modified(self, modifiers, qubits):
        """Controls taken from the front of the operands, what is left of these, and whether the gate is inverted."""
        controls, inverted = [], False
        for modifier in modifiers:
            if modifier.modifier.name == "inv":
                inverted = not inverted
                continue
            if modifier.modifier.name not in ("ctrl", "negctrl"):
                raise QasmError(f"the modifier {modifier.modifier.name} is not known here")
            number = 1 if modifier.argument is None else self.value(modifier.argument)
            if number < 1 or number > len(qubits) - len(controls):
                raise QasmError(f"{number} controls where {len(qubits) - len(controls)} operands are left")
            wanted = int(modifier.modifier.name == "ctrl")
            controls += [(qubit, wanted) for qubit in qubits[len(controls) : len(controls) + number]]
        return controls, qubits[len(controls) :], inverted

    def steps_of(self, name, modifiers, arguments, qubits):
        controls, qubits, inverted = self.modified(modifiers, qubits)
        if name in self.gates:
            return self.expand(self.gates[name], controls, qubits, arguments, inverted)
        if "stdgates.inc" not in self.program.includes:
            raise QasmError(f"the gate {name} is used without the standard gate file")
        if name in ("swap", "cswap"):
            more = len(qubits) - 2
            if more != (name == "cswap"):
                raise QasmError(f"{name} with {len(qubits)} operands")
            controls, (a, b) = controls + [(q, 1) for q in qubits[:more]], qubits[more:]
            x = ONE_QUBIT["x"][1]()
            return [(x, a, [(b, 1)]), (x, b, [*controls, (a, 1)]), (x, a, [(b, 1)])]
        extra = 0
        if name in CONTROLLED:
            extra, name = CONTROLLED[name]
        if name not in ONE_QUBIT:
            raise QasmError(f"the gate {name} is neither defined nor in the standard gate file")
        wanted, matrix = ONE_QUBIT[name]
        if len(qubits) != extra + 1 or len(arguments) != wanted:
            raise QasmError(f"{name} with {len(qubits)} operands and {len(arguments)} parameters")
        controls += [(qubit, 1) for qubit in qubits[:extra]]
        made = matrix(*arguments)
        return [(adjoint(made) if inverted else made, qubits[-1], controls)]

    def expand(self, gate, controls, qubits, arguments, inverted):
        """The steps of a gate that the program defines."""
        if len(qubits) != len(gate.qubits) or len(arguments) != len(gate.arguments):
            raise QasmError(f"{gate.name.name} with {len(qubits)} operands and {len(arguments)} parameters")
        scope = {name.name: Qubit(qubit) for name, qubit in zip(gate.qubits, qubits)}
        scope.update({name.name: value for name, value in zip(gate.arguments, arguments)})
        self.variables.append(scope)
        steps = []
        for node in gate.body:
            if isinstance(node, ast.QuantumGate):
                steps += self.plan(node)
            elif not isinstance(node, ast.QuantumBarrier):
                raise QasmError(f"{gate.name.name}: a statement this machine does not know in a gate")
        self.variables.pop()
        if inverted:
            steps = [(adjoint(matrix), target, under) for matrix, target, under in reversed(steps)]
        return [(matrix, target, controls + under) for matrix, target, under in steps]

    def global_phase(self, node):
        qubits = [qubit for operand in node.qubits for qubit in self.operand(operand)]
        controls, left, inverted = self.modified(node.modifiers, qubits)
        if left:
            raise QasmError("gphase with an operand")
        angle = self.value(node.argument)
        self.state.phase(turn(-angle if inverted else angle), controls)


class Qubit:
    """The qubit that a parameter of a defined gate stands for."""

    def __init__(self, number):
        self.number = number


def adjoint(matrix):
    return tuple(tuple(complex(matrix[j][i]).conjugate() for j in range(2)) for i in range(2))


def index_expression(target):
    """A bit that is assigned to, as an expression."""
    if isinstance(target, ast.Identifier):
        return target
    return ast.IndexExpression(target.name, target.indices[0])


HANDLERS = {
    ast.Include: Run.include,
    ast.QubitDeclaration: Run.nothing,
    ast.QuantumBarrier: Run.nothing,
    ast.ConstantDeclaration: Run.constant,
    ast.ClassicalDeclaration: Run.classical,
    ast.ClassicalAssignment: Run.assignment,
    ast.QuantumGateDefinition: Run.define,
    ast.BranchingStatement: Run.branch,
    ast.ForInLoop: Run.loop,
    ast.QuantumReset: Run.reset,
    ast.QuantumMeasurementStatement: Run.measurement,
    ast.QuantumGate: Run.gate,
    ast.QuantumPhase: Run.global_phase,
}


def labelled_start(program, widths):
    """Every value of the registers in `widths`, each with a label of its own (its code); all other qubits 0."""
    bits = sum(widths.values())
    state = SparseState(program.qubits, 1 << bits)
    codes, shift = np.arange(1 << bits), 0
    for name, width in widths.items():
        state.fill(program.registers.get(name, []), (codes >> shift) & ((1 << width) - 1))
        shift += width
    state.labels = codes.astype(np.int64)
    return state


def undefined_start(program, random):
    """Qubits as a machine may hand them over: some basis state, drawn at random."""
    state = SparseState(program.qubits)
    state.fill(range(program.qubits), [random.getrandbits(program.qubits)] if program.qubits else [0])
    return state
