"""Ground expressions: what is left of a `.tally` file when every row, name and index is written out.

A `Ground` is an operation over other grounds, a constant, or a variable. It carries its type, the least and the
greatest value it could take (by interval arithmetic, checked to fit 64 bits), and the variables it reads.
`evaluate` gives its value for many assignments at once: a variable is a NumPy array with one entry for each
assignment; yes/no are Boolean arrays, all else is int64. The range check makes int64 exact.
"""

import numpy as np

from tally_syntax import OutOfRange, TallyError

YESNO, INTEGER = "yes/no", "integer"
LOWEST, HIGHEST = -(2**63), 2**63 - 1

# Index expressions over more assignments than this are judged by their interval alone.
EXACT_INDEX_ASSIGNMENTS = 1 << 20


class Ground:
    """One operation. `value` is the value of a constant (an int), else None."""

    __slots__ = ("op", "args", "type", "low", "high", "reads", "value")

    def __init__(self, op, args, type, low, high, reads, value=None):
        self.op, self.args, self.type = op, args, type
        self.low, self.high, self.reads, self.value = low, high, reads, value


def constant(value, type):
    """A constant of a type; yes/no is 0 or 1, a value of a kind is its place."""
    return Ground("constant", (), type, int(value), int(value), frozenset(), int(value))


def variable(index, type, low, high):
    """The variable of a number; it reads itself."""
    made = Ground("variable", (index,), type, low, high, frozenset())
    made.reads = frozenset([made])
    return made


def make(pos, op, type, low, high, *args):
    """An operation over grounds; folded when all of them are constants."""
    if type == INTEGER and not (LOWEST <= low and high <= HIGHEST):
        raise OutOfRange(pos, f"this could reach {low} to {high}, which does not fit 64 bits")
    reads = frozenset().union(*(arg.reads for arg in flat(args)))
    made = Ground(op, args, type, low, high, reads)
    if all(arg.value is not None for arg in flat(args)):
        return constant(int(evaluate(made, {}, {})), type)
    return made


def flat(args):
    """The grounds among the arguments of an operation."""
    for arg in args:
        if isinstance(arg, Ground):
            yield arg
        elif isinstance(arg, (list, tuple)):
            yield from flat(arg)


def as_integer(pos, ground):
    """The same as a number: yes/no counts as 1/0, a value of a kind does not count."""
    if ground.type == INTEGER:
        return ground
    if ground.type != YESNO:
        raise TallyError(pos, f"expected a number, found a value of {ground.type}")
    return make(pos, "integer", INTEGER, 0, 1, ground)


def as_yesno(pos, ground):
    """The same, refused unless it is a yes/no: an integer is never one."""
    if ground.type != YESNO:
        raise TallyError(pos, f"expected a yes/no, found a value of type {ground.type}")
    return ground


def yesno(pos, op, *args):
    """An operation whose value is a yes/no."""
    return make(pos, op, YESNO, 0, 1, *args)


def total(pos, grounds):
    """The sum of grounds, yes/no counted as 1/0."""
    items = [as_integer(pos, ground) for ground in grounds]
    if not items:
        return constant(0, INTEGER)
    return make(pos, "sum", INTEGER, sum(i.low for i in items), sum(i.high for i in items), items)


def difference(pos, left, right):
    left, right = as_integer(pos, left), as_integer(pos, right)
    return make(pos, "-", INTEGER, left.low - right.high, left.high - right.low, left, right)


def product(pos, left, right):
    left, right = as_integer(pos, left), as_integer(pos, right)
    corners = [a * b for a in (left.low, left.high) for b in (right.low, right.high)]
    return make(pos, "*", INTEGER, min(corners), max(corners), left, right)


def quotient(pos, op, left, right):
    """`/` and `mod`, both rounding down, by a positive constant."""
    left, right = as_integer(pos, left), as_integer(pos, right)
    by = right.value
    if by is None or by < 1:
        raise TallyError(pos, f"'{op}' needs a positive constant on its right")
    if op == "/":
        return make(pos, "/", INTEGER, left.low // by, left.high // by, left, right)
    same = left.low // by == left.high // by
    low, high = (left.low % by, left.high % by) if same else (0, by - 1)
    return make(pos, "mod", INTEGER, low, high, left, right)


def negative(pos, inner):
    inner = as_integer(pos, inner)
    return make(pos, "negate", INTEGER, -inner.high, -inner.low, inner)


def absolute(pos, inner):
    inner = as_integer(pos, inner)
    low = 0 if inner.low <= 0 <= inner.high else min(abs(inner.low), abs(inner.high))
    return make(pos, "abs", INTEGER, low, max(abs(inner.low), abs(inner.high)), inner)


def extreme(pos, word, grounds):
    """The smallest or the largest of a row."""
    items = [as_integer(pos, ground) for ground in grounds]
    if not items:
        raise OutOfRange(pos, f"the {word} of nothing")
    choose = min if word == "smallest" else max
    low, high = choose(i.low for i in items), choose(i.high for i in items)
    return make(pos, word, INTEGER, low, high, items)


def compare(pos, sign, left, right):
    """One comparison of two neighbours."""
    if sign in (">", ">="):
        sign, left, right = {">": "<", ">=": "<="}[sign], right, left
    if left.type != right.type:
        if {left.type, right.type} != {YESNO, INTEGER}:
            raise TallyError(pos, f"cannot compare a value of {left.type} with one of {right.type}")
        left, right = as_integer(pos, left), as_integer(pos, right)
    elif left.type != INTEGER and sign in ("<", "<="):
        raise TallyError(pos, f"'{sign}' is for integers, these are of type {left.type}")
    return yesno(pos, sign, left, right)


def different(pos, grounds):
    """All pairs differ; said pair by pair, so that a search can use each pair by itself."""
    pairs = [(a, b) for n, a in enumerate(grounds) for b in grounds[n + 1 :]]
    return yesno(pos, "and", [compare(pos, "!=", a, b) for a, b in pairs])


def choice(pos, condition, yes, no):
    if yes.type != no.type:
        raise TallyError(pos, f"'then' gives {yes.type} and 'else' gives {no.type}")
    return make(pos, "if", yes.type, min(yes.low, no.low), max(yes.high, no.high), condition, yes, no)


def select(pos, index, first, items):
    """Element `index` of a row whose first index is `first`; every value the index can take must be in the row."""
    last = first + len(items) - 1
    if index.value is not None:
        if not first <= index.value <= last:
            raise OutOfRange(pos, f"index {index.value} is outside {first} to {last}")
        return items[index.value - first]
    low, high = index.low, index.high
    if low < first or high > last:
        low, high = exact_range(index)
        if low < first or high > last:
            raise OutOfRange(pos, f"an index of {low} to {high} could fall outside {first} to {last}")
    reach = items[low - first : high - first + 1]
    lows, highs = [i.low for i in reach], [i.high for i in reach]
    return make(pos, "select", reach[0].type, min(lows), max(highs), index, low, reach)


def exact_range(ground):
    """The least and greatest value over every assignment of the variables read, if they are few enough."""
    number = 1
    for var in ground.reads:
        number *= var.high - var.low + 1
    if number > EXACT_INDEX_ASSIGNMENTS:
        return ground.low, ground.high
    columns, code = {}, np.arange(number, dtype=np.int64)
    for var in ground.reads:
        column = code % (var.high - var.low + 1) + var.low
        code //= var.high - var.low + 1
        columns[var.args[0]] = column.astype(bool) if var.type == YESNO else column
    values = evaluate(ground, columns, {})
    return int(values.min()), int(values.max())


def all_of(values):
    result = np.True_
    for value in values:
        result = result & value
    return result


def any_of(values):
    result = np.False_
    for value in values:
        result = result | value
    return result


def add_up(values):
    result = np.int64(0)
    for value in values:
        result = result + value
    return result


def fold_with(function, values):
    result = values[0]
    for value in values[1:]:
        result = function(result, value)
    return result


def chosen(index, low, items):
    """Row elements picked by an array of indices."""
    shape = np.shape(index)
    if all(np.ndim(item) == 0 for item in items):
        return np.array([item[()] for item in items])[index - low]
    table = np.stack([np.broadcast_to(item, shape) for item in items])
    return table[index - low, np.arange(shape[0])] if shape else table[index - low]


RULES = {
    "integer": lambda a: np.asarray(a).astype(np.int64),
    "sum": add_up,
    "-": lambda a, b: a - b,
    "*": lambda a, b: a * b,
    "/": lambda a, b: a // b,
    "mod": lambda a, b: a % b,
    "negate": lambda a: -a,
    "abs": np.abs,
    "smallest": lambda items: fold_with(np.minimum, items),
    "largest": lambda items: fold_with(np.maximum, items),
    "=": lambda a, b: a == b,
    "!=": lambda a, b: a != b,
    "<": lambda a, b: a < b,
    "<=": lambda a, b: a <= b,
    "not": np.logical_not,
    "and": all_of,
    "or": any_of,
    "if": np.where,
    "select": chosen,
}


def evaluate(ground, columns, seen):
    """The value of a ground for the assignments in `columns`; `seen` remembers shared parts of one evaluation."""
    if ground.value is not None:
        return np.bool_(ground.value) if ground.type == YESNO else np.int64(ground.value)
    if ground.op == "variable":
        return columns[ground.args[0]]
    known = seen.get(id(ground))
    if known is None:
        args = []
        for arg in ground.args:
            if isinstance(arg, Ground):
                args.append(evaluate(arg, columns, seen))
            elif isinstance(arg, list):
                args.append([evaluate(item, columns, seen) for item in arg])
            else:
                args.append(arg)
        known = seen[id(ground)] = RULES[ground.op](*args)
    return known
