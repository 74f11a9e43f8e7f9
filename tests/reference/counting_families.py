"""Formulas of every size for bench_counting.py: clauses as lists of DIMACS numbers, and the variables to project on."""

import random


class Formula:
    """Clauses over variables numbered from 1; `shown` is None where all variables are counted over."""

    def __init__(self):
        self.variables = 0
        self.clauses = []
        self.shown = None

    def new(self, count):
        first = self.variables + 1
        self.variables += count
        return list(range(first, first + count))

    def add(self, *literals):
        self.clauses.append(list(literals))

    def at_most_one(self, literals):
        for at, left in enumerate(literals):
            for right in literals[:at]:
                self.add(-left, -right)

    def conjunction(self, left, right):
        (out,) = self.new(1)
        self.add(-out, left)
        self.add(-out, right)
        self.add(out, -left, -right)
        return out

    def exclusive(self, left, right):
        (out,) = self.new(1)
        for a, b, c in ((left, right, -out), (-left, -right, -out), (-left, right, out), (left, -right, out)):
            self.add(a, b, c)
        return out

    def full_adder(self, a, b, c):
        total, carry = self.new(2)
        for row in range(8):
            signs = [-1 if row >> bit & 1 else 1 for bit in range(3)]
            odd = sum(sign < 0 for sign in signs) % 2 == 1
            self.add(signs[0] * a, signs[1] * b, signs[2] * c, total if odd else -total)
        for left, right in ((a, b), (a, c), (b, c)):
            self.add(-left, -right, carry)
            self.add(left, right, -carry)
        return total, carry

    def sum(self, left, right):
        long, short = (left, right) if len(left) >= len(right) else (right, left)
        out, carry = [], None
        for at, bit in enumerate(long):
            others = [other for other in (short[at] if at < len(short) else None, carry) if other is not None]
            if len(others) == 2:
                total, carry = self.full_adder(bit, *others)
            elif len(others) == 1:
                total, carry = self.exclusive(bit, others[0]), self.conjunction(bit, others[0])
            else:
                total, carry = bit, None
            out.append(total)
        return out + ([carry] if carry is not None else [])

    def equals(self, bits, number):
        for at, bit in enumerate(bits):
            self.add(bit if number >> at & 1 else -bit)
        if number >> len(bits):
            self.add()

    def text(self):
        shown = [] if self.shown is None else [f"c p show {' '.join(map(str, self.shown))} 0"]
        rows = [" ".join(map(str, clause + [0])) for clause in self.clauses]
        return "\n".join([f"p cnf {self.variables} {len(rows)}", *shown, *rows]) + "\n"


def queens(n):
    formula = Formula()
    board = [formula.new(n) for _ in range(n)]
    lines = [list(row) for row in board] + [list(column) for column in zip(*board)]
    for line in lines:
        formula.clauses.append(list(line))
    for shift in range(-n + 1, n):
        lines.append([board[row][row - shift] for row in range(n) if 0 <= row - shift < n])
        lines.append([board[row][n - 1 - row + shift] for row in range(n) if 0 <= n - 1 - row + shift < n])
    for line in lines:
        formula.at_most_one(line)
    return formula


def grid(side, colours):
    formula = Formula()
    cells = [[formula.new(colours) for _ in range(side)] for _ in range(side)]
    for row in cells:
        for cell in row:
            formula.clauses.append(list(cell))
            formula.at_most_one(cell)
    for y in range(side):
        for x in range(side):
            for other_y, other_x in ((y, x + 1), (y + 1, x)):
                if other_y < side and other_x < side:
                    for own, far in zip(cells[y][x], cells[other_y][other_x]):
                        formula.add(-own, -far)
    return formula


def random_3sat(variables, ratio, seed):
    source = random.Random(f"{variables} {ratio} {seed}")
    formula = Formula()
    formula.new(variables)
    for _ in range(int(variables * ratio)):
        chosen = source.sample(range(1, variables + 1), 3)
        formula.clauses.append([var if source.random() < 0.5 else -var for var in chosen])
    return formula


def subset_sum(count, bits, seed):
    source = random.Random(f"{count} {bits} {seed}")
    weights = [source.randrange(1, 1 << bits) for _ in range(count)]
    formula = Formula()
    formula.shown = formula.new(count)
    (never,) = formula.new(1)
    formula.add(-never)
    total = []
    for weight, pick in zip(weights, list(formula.shown)):
        own = [pick if weight >> bit & 1 else never for bit in range(weight.bit_length())]
        total = formula.sum(total, own) if total else own
    formula.equals(total, sum(weights) // 2)
    return formula


def product(bits, number):
    formula = Formula()
    left, right = formula.new(bits), formula.new(bits)
    formula.shown = left + right
    total = []
    for shift, bit in enumerate(right):
        row = [formula.conjunction(bit, other) for other in left]
        total = total[:shift] + formula.sum(total[shift:], row) if total else row
    formula.equals(total, number)
    return formula


def all_families():
    """Name of the family, name of the formula, and a function that makes it."""
    for n in range(6, 13):
        yield "queens", f"queens-{n}", lambda n=n: queens(n)
    for side, colours in ((4, 3), (5, 3), (6, 3), (7, 3), (8, 3), (9, 3), (4, 4), (5, 4), (6, 4)):
        yield "grid", f"grid-{side}-{colours}", lambda side=side, colours=colours: grid(side, colours)
    sizes = ((50, 4), (75, 4), (100, 4), (125, 4), (150, 4), (50, 3), (60, 3), (75, 3), (90, 3), (100, 3), (40, 2), (50, 2), (60, 2), (70, 2))
    for variables, ratio in sizes:
        for seed in (1, 2):
            make = lambda variables=variables, ratio=ratio, seed=seed: random_3sat(variables, ratio, seed)
            yield f"random r={ratio}", f"random-{variables}-{ratio}-{seed}", make
    for count, bits in ((12, 8), (16, 8), (20, 8), (24, 8), (16, 16), (20, 16), (24, 16)):
        yield "subset", f"subset-{count}-{bits}", lambda count=count, bits=bits: subset_sum(count, bits, 1)
    for bits, number in ((8, 60491), (10, 1030189), (12, 16687189), (14, 267845947), (8, 27720), (10, 332640), (12, 2042040)):
        yield "product", f"product-{bits}-{number}", lambda bits=bits, number=number: product(bits, number)
