"""From the statements of a `.tally` file to ground constraints over numbered variables.

In:   statements of `tally_syntax`, and the values given with `--set`.
Out:  a `Problem`: variables in source order, the conjuncts that must hold, the objective.
How:  one walk in source order. Names map to a constant, a variable, a `let`, a `Row` of these, or a `Kind`; every
      comprehension is written out; conditions that are constant choose a branch, and the other is not looked at.
"""

from itertools import product as cartesian

import tally_ground as ground
from tally_ground import INTEGER, YESNO
from tally_syntax import OutOfRange, Parser, TallyError

# More things than this in one row or comprehension is refused (this is a checker for small problems).
MOST_ELEMENTS = 200_000


class Kind:
    """A declared kind: its name and the names of its values, whose places are the values."""

    def __init__(self, name, values):
        self.name, self.values = name, values
        self.type = f"kind {name}"


class Axis:
    """One index of a row: a type, and consecutive values from `first`."""

    def __init__(self, type, first, size):
        self.type, self.first, self.size = type, first, size

    def values(self):
        return range(self.first, self.first + self.size)


class Row:
    """Things by index: `items` in index order, the last index running fastest."""

    def __init__(self, axes, items, constant):
        self.axes, self.items, self.constant = axes, items, constant


class Variable:
    """One variable: what it is called, and its domain of `size` consecutive values from `first`."""

    def __init__(self, name, type, first, size):
        self.name, self.type, self.first, self.size = name, type, first, size

    @property
    def bits(self):
        return (self.size - 1).bit_length()


class Problem:
    """What a file says."""

    def __init__(self):
        self.title, self.variables, self.conjuncts, self.objective = None, [], [], None

    @property
    def bits(self):
        return sum(variable.bits for variable in self.variables)


def read(text, settings=None):
    """The problem that a text says; `settings` maps names of `known`s to texts of constants."""
    reader = Reader(dict(settings or {}))
    for statement in Parser(text).file():
        reader.statement(statement)
    for name in reader.settings:
        raise TallyError(None, f"--set {name}: the file has no 'known {name}'")
    return reader.problem


class Reader:
    """The names seen so far, and the problem being built."""

    def __init__(self, settings):
        self.settings = settings
        self.names = {}
        self.problem = Problem()

    # Statements.

    def statement(self, node):
        getattr(self, "say_" + node.op)(node)

    def declare(self, token, meaning):
        if token.text in self.names:
            raise TallyError(token.pos, f"the name '{token.text}' is taken")
        self.names[token.text] = meaning

    def say_title(self, node):
        if self.problem.title is not None:
            raise TallyError(node.pos, "a second title")
        self.problem.title = node.args[0]

    def say_kind(self, node):
        name, values = node.args
        kind = Kind(name.text, [value.text for value in values])
        self.declare(name, kind)
        for place, value in enumerate(values):
            self.declare(value, ground.constant(place, kind.type))

    def say_known(self, node):
        name, axes, value = node.args
        if name.text in self.settings:
            value = Parser(self.settings.pop(name.text)).whole_constant()
        found = self.row_of_constants(node.pos, axes, value) if axes else self.plain_known(value)
        items = found.items if isinstance(found, Row) else [found]
        if any(item.value is None for item in items):
            raise TallyError(node.pos, f"'{name.text}' is not a constant")
        if len({item.type for item in items}) > 1:
            raise TallyError(node.pos, f"the values of '{name.text}' are of several types")
        self.declare(name, found)

    def plain_known(self, value):
        """A `known` with no index named: a constant, or a row indexed from 1."""
        if value.op == "comprehension":
            items = self.entries(value, {}, self.value)
            return Row([Axis(INTEGER, 1, len(items))], items, True)
        if value.op != "list":
            return self.value(value, {})
        axes, items = self.shape(value)
        return Row([Axis(INTEGER, 1, size) for size in axes], items, True)

    def shape(self, node):
        """The sizes and the items of nested lists, which must be of one shape."""
        if node.op != "list":
            return [], [self.value(node, {})]
        parts = [self.shape(entry) for entry in node.args[0]]
        if not parts:
            return [0], []
        if any(sizes != parts[0][0] for sizes, _ in parts):
            raise TallyError(node.pos, "the lists inside are of several sizes")
        return [len(parts), *parts[0][0]], [item for _, items in parts for item in items]

    def row_of_constants(self, pos, axes, value):
        """A `known` with its indices named: a list in index order (flat or nested), or one expression of them."""
        if value.op not in ("list", "comprehension"):
            return self.row(axes, lambda scope: self.value(value, scope), True)
        listed = self.plain_known(value)
        spans, _ = self.axes(axes)
        sizes = [axis.size for axis in spans]
        if [axis.size for axis in listed.axes] not in (sizes, [len(listed.items)]):
            raise TallyError(pos, f"the lists are not of the sizes {sizes}")
        if len(listed.items) != count_of(sizes):
            raise TallyError(pos, f"{len(listed.items)} values for {count_of(sizes)} places")
        return Row(spans, listed.items, True)

    def say_pick(self, node):
        name, axes, domain = node.args
        if not axes:
            self.declare(name, self.new_variable(name.text, domain, {}))
            return
        declared = []

        def one(scope):
            label = ",".join(self.show(value) for value in scope.values())
            declared.append(f"{name.text}[{label}]")
            return self.new_variable(declared[-1], domain, scope)

        self.declare(name, self.row(axes, one, False))

    def show(self, value):
        kinds = [k for k in self.names.values() if isinstance(k, Kind) and k.type == value.type]
        return kinds[0].values[value.value] if kinds else str(value.value)

    def new_variable(self, label, domain, scope):
        if domain is None:
            type, first, size = YESNO, 0, 2
        else:
            axis = self.span(domain, scope)
            type, first, size = axis.type, axis.first, axis.size
        if size < 1:
            raise TallyError(domain.pos, f"'{label}' has nothing to be")
        self.problem.variables.append(Variable(label, type, first, size))
        return ground.variable(len(self.problem.variables) - 1, type, first, first + size - 1)

    def say_let(self, node):
        name, axes, value = node.args
        if axes:
            self.declare(name, self.row(axes, lambda scope: self.value(value, scope), False))
        elif value.op in ("list", "comprehension"):
            items = self.entries(value, {}, self.value)
            if len({item.type for item in items}) > 1:
                raise TallyError(node.pos, f"the values of '{name.text}' are of several types")
            self.declare(name, Row([Axis(INTEGER, 1, len(items))], items, False))
        else:
            self.declare(name, self.value(value, {}))

    def say_must(self, node):
        self.problem.conjuncts += conjuncts(ground.as_yesno(node.pos, self.value(node.args[0], {})))

    def say_least(self, node):
        if self.problem.objective:
            raise TallyError(node.pos, "a second objective")
        self.problem.objective = (node.op, ground.as_integer(node.pos, self.value(node.args[0], {})))

    say_most = say_least

    # Rows, ranges and generators.

    def row(self, axes, one, constant):
        """A row with one thing made for each combination of its indices."""
        spans, names = self.axes(axes)
        if count_of([axis.size for axis in spans]) > MOST_ELEMENTS:
            raise TallyError(axes[0][0].pos, "a row of too many elements")
        items = []
        for place in cartesian(*(axis.values() for axis in spans)):
            scope = {n: ground.constant(v, a.type) for n, v, a in zip(names, place, spans)}
            items.append(one(scope))
        if len({item.type for item in items}) > 1:
            raise TallyError(axes[0][0].pos, "the elements of this row are of several types")
        return Row(spans, items, constant)

    def axes(self, axes):
        spans, names = [], []
        for token, domain in axes:
            self.fresh_index(token, names)
            spans.append(self.span(domain, {}))
            names.append(token.text)
        return spans, names

    def fresh_index(self, token, scope):
        if token.text in self.names or token.text in scope:
            raise TallyError(token.pos, f"the index name '{token.text}' is taken")

    def span(self, domain, scope):
        """A range or a kind, as consecutive values."""
        if domain.op in ("list", "comprehension"):
            raise TallyError(domain.pos, "expected a range 'a to b' or a kind")
        if domain.op == "range":
            low, high = (self.constant_integer(bound, scope) for bound in domain.args)
            return Axis(INTEGER, low, max(0, high - low + 1))
        kind = self.names.get(domain.args[0])
        if not isinstance(kind, Kind):
            raise TallyError(domain.pos, f"'{domain.args[0]}' is not a kind")
        return Axis(kind.type, 0, len(kind.values))

    def constant_integer(self, node, scope):
        found = self.value(node, scope)
        if found.value is None or found.type != INTEGER:
            raise TallyError(node.pos, "expected a constant integer")
        return found.value

    def generated(self, domain, scope):
        """The constants that a generator runs over: a range, a kind, or a row of constants."""
        if domain.op in ("list", "comprehension"):
            items = self.entries(domain, scope, self.value)
            if any(item.value is None for item in items):
                raise TallyError(domain.pos, "a generator runs over constants")
            return items
        if domain.op == "name":
            row = self.names.get(domain.args[0])
            if isinstance(row, Row) and row.constant:
                return row.items
        axis = self.span(domain, scope)
        if axis.size > MOST_ELEMENTS:
            raise TallyError(domain.pos, "a range of too many values")
        return [ground.constant(value, axis.type) for value in axis.values()]

    def entries(self, node, scope, one):
        """What stands in `[ … ]`: `one(entry, scope)` for each entry of a list or of a comprehension."""
        if node.op == "list":
            return [one(entry, scope) for entry in node.args[0]]
        item, generators, condition = node.args
        scopes = [scope]
        for token, domain in generators:
            longer = []
            for inner in scopes:
                self.fresh_index(token, inner)
                longer += [{**inner, token.text: value} for value in self.generated(domain, inner)]
                if len(longer) > MOST_ELEMENTS:
                    raise TallyError(token.pos, "a comprehension of too many elements")
            scopes = longer
        if condition is not None:
            scopes = [inner for inner in scopes if self.kept(condition, inner)]
        return [one(item, inner) for inner in scopes]

    def kept(self, condition, scope):
        found = ground.as_yesno(condition.pos, self.value(condition, scope))
        if found.value is None:
            raise TallyError(condition.pos, "what follows 'with' must be constant")
        return bool(found.value)

    # Expressions: each method gives the ground of one construct.

    def value(self, node, scope):
        return EXPRESSIONS[node.op](self, node, scope)

    def integer(self, node, scope):
        return ground.as_integer(node.pos, self.value(node, scope))

    def yesno(self, node, scope):
        return ground.as_yesno(node.pos, self.value(node, scope))

    def of_number(self, node, scope):
        value = node.args[0]
        if not ground.LOWEST <= value <= ground.HIGHEST:
            raise TallyError(node.pos, f"{value} does not fit 64 bits")
        return ground.constant(value, INTEGER)

    def of_yesno(self, node, scope):
        return ground.constant(node.args[0], YESNO)

    def of_name(self, node, scope):
        name = node.args[0]
        found = scope[name] if name in scope else self.names.get(name)
        if found is None:
            raise TallyError(node.pos, f"'{name}' is not declared before")
        if isinstance(found, (Row, Kind)):
            raise TallyError(node.pos, f"'{name}' is not a single value")
        return found

    def of_element(self, node, scope):
        name, indices = node.args
        row = self.names.get(name)
        if not isinstance(row, Row):
            raise TallyError(node.pos, f"'{name}' is not a row")
        if len(indices) != len(row.axes):
            raise TallyError(node.pos, f"'{name}' has {len(row.axes)} indices, not {len(indices)}")
        places = [self.value(index, scope) for index in indices]
        for place, axis, index in zip(places, row.axes, indices):
            if place.type != axis.type:
                raise TallyError(index.pos, f"this index is of type {place.type}, the row wants {axis.type}")
        return self.element(node.pos, places, row.axes, row.items)

    def element(self, pos, places, axes, items):
        if not places:
            return items[0]
        step = len(items) // axes[0].size if axes[0].size else 0
        value = places[0].value
        if value is not None:  # a constant index: the other slices play no part
            if value not in axes[0].values():
                raise OutOfRange(pos, f"index {value} is outside the row")
            at = (value - axes[0].first) * step
            return self.element(pos, places[1:], axes[1:], items[at : at + step])
        slices = [items[at * step : (at + 1) * step] for at in range(axes[0].size)]
        each = [self.element(pos, places[1:], axes[1:], part) for part in slices]
        return ground.select(pos, places[0], axes[0].first, each)

    def unless_decided(self, decides, makers):
        """The conditions that the makers give; or None if one of them is the constant `decides`, whatever the others.

        A value out of range in one of them counts only if no constant condition beside it kills that part.
        """
        items, fault = [], None
        for maker in makers:
            try:
                items.append(maker())
            except OutOfRange as error:
                fault = fault or error
        if any(item.value == decides for item in items):
            return None
        if fault:
            raise fault
        return items

    def of_needs(self, node, scope):
        left, right = node.args
        no_left = lambda: ground.yesno(node.pos, "not", self.yesno(left, scope))
        items = self.unless_decided(1, [no_left, lambda: self.yesno(right, scope)])
        return ground.constant(1, YESNO) if items is None else ground.yesno(node.pos, "or", items)

    def of_junction(self, node, scope):
        decides = 0 if node.op == "and" else 1
        items = self.unless_decided(decides, [lambda arg=arg: self.yesno(arg, scope) for arg in node.args[0]])
        return ground.constant(decides, YESNO) if items is None else ground.yesno(node.pos, node.op, items)

    def of_not(self, node, scope):
        return ground.yesno(node.pos, "not", self.yesno(node.args[0], scope))

    def of_compare(self, node, scope):
        nodes, signs = node.args
        items = [self.value(item, scope) for item in nodes]
        pairs = [ground.compare(node.pos, sign, items[n], items[n + 1]) for n, sign in enumerate(signs)]
        return pairs[0] if len(pairs) == 1 else ground.yesno(node.pos, "and", pairs)

    def of_one_of(self, node, scope):
        left = self.tuple(node.args[0], scope)
        found = []
        for entry in self.entries(node.args[1], scope, self.tuple):
            if len(entry) != len(left):
                raise TallyError(node.pos, f"an entry of {len(entry)} values where {len(left)} are wanted")
            found.append(ground.yesno(node.pos, "and", [ground.compare(node.pos, "=", *p) for p in zip(left, entry)]))
        return ground.yesno(node.pos, "or", found)

    def tuple(self, node, scope):
        return [self.value(item, scope) for item in node.args[0]] if node.op == "tuple" else [self.value(node, scope)]

    def of_tuple(self, node, scope):
        raise TallyError(node.pos, "a tuple stands only left of 'one of' and in its list")

    def of_plus(self, node, scope):
        return ground.total(node.pos, [self.integer(arg, scope) for arg in node.args])

    def of_minus(self, node, scope):
        return ground.difference(node.pos, *(self.integer(arg, scope) for arg in node.args))

    def of_times(self, node, scope):
        return ground.product(node.pos, *(self.integer(arg, scope) for arg in node.args))

    def of_quotient(self, node, scope):
        return ground.quotient(node.pos, node.op, *(self.integer(arg, scope) for arg in node.args))

    def of_negate(self, node, scope):
        return ground.negative(node.pos, self.integer(node.args[0], scope))

    def of_abs(self, node, scope):
        return ground.absolute(node.pos, self.integer(node.args[0], scope))

    def of_if(self, node, scope):
        condition = self.yesno(node.args[0], scope)
        if condition.value is not None:
            return self.value(node.args[1 if condition.value else 2], scope)
        return ground.choice(node.pos, condition, *(self.value(arg, scope) for arg in node.args[1:]))

    def of_row_word(self, node, scope):
        word, bound, row = node.args
        if word in ("sum", "smallest", "largest"):
            items = self.entries(row, scope, self.integer)
            return ground.total(node.pos, items) if word == "sum" else ground.extreme(node.pos, word, items)
        if word == "different":
            return ground.different(node.pos, self.entries(row, scope, self.value))
        if word in ("all", "some", "none"):
            return self.of_all_or_some(node.pos, word, self.entries(row, scope, self.later))
        items = self.entries(row, scope, self.yesno)
        number = ground.total(node.pos, items)
        if word == "number":
            return number
        if word in ("odd", "even"):
            rest = ground.quotient(node.pos, "mod", number, ground.constant(2, INTEGER))
            return ground.compare(node.pos, "=", rest, ground.constant(word == "odd", INTEGER))
        sign = {"exactly": "=", "at least": ">=", "at most": "<="}[word]
        return ground.compare(node.pos, sign, number, self.integer(bound, scope))


    def later(self, node, scope):
        return lambda: self.yesno(node, scope)

    def of_all_or_some(self, pos, word, makers):
        if word == "none":
            makers = [lambda maker=maker: ground.yesno(pos, "not", maker()) for maker in makers]
        decides = 1 if word == "some" else 0
        items = self.unless_decided(decides, makers)
        return ground.constant(decides, YESNO) if items is None else ground.yesno(pos, "or" if decides else "and", items)


def count_of(sizes):
    number = 1
    for size in sizes:
        number *= size
    return number


def conjuncts(condition):
    """The parts of a condition that must each hold."""
    if condition.op == "and" and condition.value is None:
        return [part for item in condition.args[0] for part in conjuncts(item)]
    return [condition]


EXPRESSIONS = {
    "number": Reader.of_number,
    "yesno": Reader.of_yesno,
    "name": Reader.of_name,
    "element": Reader.of_element,
    "needs": Reader.of_needs,
    "and": Reader.of_junction,
    "or": Reader.of_junction,
    "not": Reader.of_not,
    "compare": Reader.of_compare,
    "one of": Reader.of_one_of,
    "tuple": Reader.of_tuple,
    "+": Reader.of_plus,
    "-": Reader.of_minus,
    "*": Reader.of_times,
    "/": Reader.of_quotient,
    "mod": Reader.of_quotient,
    "negate": Reader.of_negate,
    "abs": Reader.of_abs,
    "if": Reader.of_if,
    "row word": Reader.of_row_word,
}
