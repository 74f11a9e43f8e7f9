"""Random small `.tally` texts that are well typed and in range, from a seed.

Every text is a whole problem of at most `MOST_BITS` bits. Brackets are written only where the language needs them (and
sometimes where it does not), so that binding is tried too. All operators of the language occur; what could be an error
(an index outside its row, a range that outgrows 64 bits, the smallest of nothing) is avoided by construction.
"""

import random
from collections import namedtuple

MOST_BITS = 10

# How tightly a text binds, loosest first; brackets go around a text that binds more loosely than its place.
NEEDS, JUNCTION, NOT, COMPARE, SUM, PRODUCT, MINUS, ATOM = range(8)

# `open`: the text ends in an `if`, which would swallow whatever follows.
Text = namedtuple("Text", "words level open")
Row = namedtuple("Row", "name size kind first")  # a row: `kind` is the type of its index or None for a range from `first`


def atom(words):
    return Text(str(words), ATOM, False)


class Generator:
    """One problem."""

    def __init__(self, seed):
        self.random = random.Random(seed)
        self.lines = [f"# seed {seed}"]
        self.bits = 0
        self.kinds = {}  # name -> its values
        self.pools = {"yesno": [], "integer": []}  # texts of each type; kinds join by name
        self.rows = {"yesno": [], "integer": []}
        self.known_rows = []
        self.constants = [atom(n) for n in range(4)]
        self.settings = {}
        self.indices = 0

    # Choices.

    def chance(self, probability):
        return self.random.random() < probability

    def between(self, low, high):
        return self.random.randint(low, high)

    def pick_one(self, items):
        return self.random.choice(items)

    # The declarations.

    def text(self):
        """The whole problem."""
        if self.chance(0.3):
            self.lines.append('title "A made up problem"')
        self.declare_kinds()
        self.declare_constants()
        while self.bits < 3 or self.chance(0.75):
            if not self.declare_variable():
                break
        for number in range(self.between(0, 2)):
            self.declare_let(number)
        for _ in range(self.between(1, 3)):
            self.lines.append("must " + self.yesno(self.between(1, 3)).words + self.comment())
        if self.chance(0.3):
            self.lines.append(self.pick_one(["least ", "most "]) + self.integer(2).words)
        return "\n".join(self.lines) + "\n"

    def comment(self):
        return "  # must hold" if self.chance(0.1) else ""

    def declare_kinds(self):
        names = [["red", "green", "blue"], ["north", "south"], ["oak", "elm", "ash", "fir"]]
        for number, values in enumerate(self.random.sample(names, self.between(0, 2))):
            name = "KL"[number]
            self.kinds[name] = values
            self.pools[name] = [atom(value) for value in values]
            self.rows[name] = []
            self.lines.append(f"kind {name} = {' | '.join(values)}")

    def declare_constants(self):
        value = self.between(1, 5)
        self.lines.append(f"known c = {value}")
        if self.chance(0.3):
            self.settings["c"] = str(self.between(1, 5))
        self.constants.append(atom("c"))
        if self.chance(0.5):
            self.lines.append("known d = 2 * c - 1")
            self.constants.append(atom("d"))
        for name in ("w", "v")[: self.between(0, 2)]:
            values = [self.between(-3, 6) for _ in range(self.between(1, 4))]
            self.lines.append(f"known {name} = [{', '.join(map(str, values))}]")
            self.known_rows.append(Row(name, len(values), None, 1))
        for kind in self.kinds:
            if self.chance(0.5):
                values = [self.between(0, 6) for _ in self.kinds[kind]]
                self.lines.append(f"known of{kind}[x in {kind}] = [{', '.join(map(str, values))}]")
                self.known_rows.append(Row(f"of{kind}", len(values), kind, 0))

    def declare_variable(self):
        """One more pick, if the bits allow it."""
        number = len([line for line in self.lines if line.startswith("pick")])
        type = self.pick_one(["yesno", "yesno", "integer", *self.kinds])
        name = f"p{number}"
        low, high = self.between(-2, 3), 0
        if type == "yesno":
            domain, each = "", 1
        elif type == "integer":
            high = low + self.between(0, 6)
            domain, each = f" in {low} to {high}", (high - low).bit_length()
        else:
            domain, each = f" in {type}", (len(self.kinds[type]) - 1).bit_length()
        row = self.row_shape() if self.chance(0.5) else None
        bits = each * (row.size if row else 1)
        if self.bits + bits > MOST_BITS:
            return False
        self.bits += bits
        if row is None:
            self.lines.append(f"pick {name}{domain}")
            self.pools[type].append(atom(name))
            return True
        row = row._replace(name=name)
        span = row.kind or f"{row.first} to {row.first + row.size - 1}"
        self.lines.append(f"pick {name}[x in {span}]{domain}")
        self.rows[type].append(row)
        for place in range(row.size):
            index = self.kinds[row.kind][place] if row.kind else row.first + place
            self.pools[type].append(atom(f"{name}[{index}]"))
        return True

    def row_shape(self):
        if self.kinds and self.chance(0.3):
            kind = self.pick_one(sorted(self.kinds))
            return Row("", len(self.kinds[kind]), kind, 0)
        return Row("", self.between(1, 4), None, self.between(0, 2))

    def declare_let(self, number):
        name = f"l{number}"
        type = self.pick_one(["yesno", "integer"])
        if self.chance(0.6):
            self.lines.append(f"let {name} = {self.make(type, 2).words}")
            self.pools[type].append(atom(name))
        else:
            index = self.new_index()
            body = self.entry(type, Row("", 2, None, 1), index, 1)
            self.lines.append(f"let {name}[{index} in 1 to 2] = {body.words}")
            self.rows[type].append(Row(name, 2, None, 1))
            self.pools[type] += [atom(f"{name}[1]"), atom(f"{name}[2]")]

    def new_index(self):
        self.indices += 1
        return f"i{self.indices}"

    # Writing expressions.

    def at(self, text, level, last=False):
        """A text in a place that wants at least a level; `last` if nothing of the same expression follows."""
        if (text.open and not last) or text.level < level or self.chance(0.05):
            return f"({text.words})"
        return text.words

    def infix(self, left, sign, right, level, left_level, right_level):
        loose = right.open and right.level == ATOM and self.chance(0.7)  # an `if` with nothing around it
        words = right.words if loose else self.at(right, right_level, True)
        ends = right.open and not words.startswith("(")
        return Text(f"{self.at(left, left_level)} {sign} {words}", level, ends or loose)

    def make(self, type, depth):
        if type == "yesno":
            return self.yesno(depth)
        return self.integer(depth) if type == "integer" else self.value(type, depth)

    def conditional(self, type, depth):
        words = f"if {self.yesno(depth - 1).words} then {self.make(type, depth - 1).words} else "
        return Text(words + self.make(type, depth - 1).words, ATOM, True)

    def value(self, kind, depth):
        """A value of a kind."""
        if depth > 0 and self.chance(0.2):
            return self.conditional(kind, depth)
        rows = [row for row in self.rows[kind] if self.can_index(row)]
        if rows and self.chance(0.2):
            return self.element(self.pick_one(rows))
        return self.pick_one(self.pools[kind])

    def can_index(self, row):
        return row.kind is None or len(self.pools[row.kind]) > 0

    def element(self, row):
        """An element of a row, its index chosen by a variable."""
        if row.kind:
            return atom(f"{row.name}[{self.pick_one(self.pools[row.kind]).words}]")
        number = self.at(self.pick_one(self.pools["integer"] or self.constants), PRODUCT)
        shift = f" + {row.first}" if row.first else ""
        return atom(f"{row.name}[{number} mod {row.size}{shift}]")

    def integer(self, depth):
        """A number."""
        if depth <= 0:
            choices = [self.pick_one(self.constants)]
            if self.pools["integer"]:
                choices += [self.pick_one(self.pools["integer"])] * 3
            rows = [row for row in self.known_rows if self.can_index(row)]
            if rows:
                choices.append(self.element(self.pick_one(rows)))
            return self.pick_one(choices)
        return self.pick_one(INTEGERS)(self, depth - 1)

    def counted(self, depth):
        """What stands in arithmetic: a number, or a yes/no that counts as 1 or 0."""
        return self.yesno(min(depth, 1)) if self.chance(0.2) else self.integer(depth)

    def of_sum(self, depth):
        sign = self.pick_one(["+", "+", "-"])
        return self.infix(self.counted(depth), sign, self.counted(depth), SUM, SUM, PRODUCT)

    def of_product(self, depth):
        return self.infix(self.counted(depth), "*", self.counted(depth), PRODUCT, PRODUCT, MINUS)

    def of_quotient(self, depth):
        by = atom(self.pick_one([1, 2, 3, 4, "c"]))
        return self.infix(self.counted(depth), self.pick_one(["/", "mod"]), by, PRODUCT, PRODUCT, MINUS)

    def of_minus(self, depth):
        inner = self.integer(depth)
        return Text("-" + self.at(inner, ATOM), MINUS, False)

    def of_abs(self, depth):
        return atom(f"abs({self.integer(depth).words})")

    def of_if(self, depth):
        return self.conditional("integer", depth + 1)

    def of_number(self, depth):
        return atom(f"number of {self.row('yesno', depth)}")

    def of_total(self, depth):
        return atom(f"sum {self.row(self.pick_one(['yesno', 'integer']), depth)}")

    def of_extreme(self, depth):
        return atom(f"{self.pick_one(['smallest', 'largest'])} {self.row('integer', depth, True)}")

    def yesno(self, depth):
        """A condition."""
        if depth <= 0:
            choices = [self.comparison(0)]
            if self.pools["yesno"]:
                choices += [self.pick_one(self.pools["yesno"])] * 2
            return self.pick_one(choices)
        return self.pick_one(YESNOS)(self, depth - 1)

    def comparison(self, depth):
        sign = self.pick_one(["=", "!=", "<", "<=", ">", ">="])
        sides = [self.integer(depth), self.counted(depth)]
        if self.chance(0.3):
            sides.reverse()
        return self.infix(sides[0], sign, sides[1], COMPARE, SUM, SUM)

    def of_chain(self, depth):
        signs = self.pick_one([["<", "<="], [">", ">="], ["="]])
        items = [self.at(self.integer(depth), SUM) for _ in range(3)]
        return Text(f"{items[0]} {self.pick_one(signs)} {items[1]} {self.pick_one(signs)} {items[2]}", COMPARE, False)

    def of_equal(self, depth):
        type = self.pick_one(["yesno", *self.kinds])
        sign = self.pick_one(["=", "!="])
        return self.infix(self.make(type, depth), sign, self.make(type, depth), COMPARE, SUM, SUM)

    def of_mixed(self, depth):
        sign = self.pick_one(["=", "!=", "<", ">="])
        return self.infix(self.yesno(depth), sign, atom(self.pick_one([0, 1, "c"])), COMPARE, SUM, SUM)

    def of_not(self, depth):
        inner = self.yesno(depth)
        words = self.at(inner, NOT, True)
        return Text("not " + words, NOT, inner.open and not words.startswith("("))

    def of_junction(self, depth):
        word = self.pick_one(["and", "or"])
        left = self.at(self.yesno(depth), NOT)
        middle = f" {word} {self.at(self.yesno(depth - 1), NOT)}" if self.chance(0.3) else ""
        return self.infix(Text(left + middle, NOT, False), word, self.yesno(depth), JUNCTION, NOT, NOT)

    def of_needs(self, depth):
        return self.infix(self.yesno(depth), "needs", self.yesno(depth), NEEDS, JUNCTION, NEEDS)

    def of_choice(self, depth):
        return self.conditional("yesno", depth + 1)

    def of_word(self, depth):
        word = self.pick_one(["all of", "some of", "none of", "odd", "even", "exactly", "at least", "at most"])
        if word in ("exactly", "at least", "at most"):
            word = f"{word} {self.pick_one([0, 1, 2, 'c', 'c - 1'])} of"
        return atom(f"{word} {self.row('yesno', depth)}")

    def of_different(self, depth):
        return atom(f"different {self.row(self.pick_one(['integer', *self.kinds]), depth)}")

    def of_table(self, depth):
        if self.chance(0.4):
            entries = [self.pick_one(self.constants).words for _ in range(self.between(1, 3))]
            return Text(f"{self.at(self.integer(depth), SUM)} one of [{', '.join(entries)}]", COMPARE, False)
        types = [self.pick_one(["integer", *self.kinds]) for _ in range(2)]
        entries = []
        for _ in range(self.between(1, 4)):
            parts = [self.constant_of(type) for type in types]
            entries.append(f"({', '.join(parts)})")
        left = ", ".join(self.make(type, depth - 1).words for type in types)
        return Text(f"({left}) one of [{', '.join(entries)}]", COMPARE, False)

    def constant_of(self, type):
        return self.pick_one(self.constants).words if type == "integer" else self.pick_one(self.kinds[type])

    # Rows.

    def row(self, type, depth, filled=False):
        """`[ … ]` with entries of a type; `filled` if it must have one."""
        choice = self.random.random()
        if choice < 0.45:
            number = self.between(1 if filled or self.chance(0.95) else 0, 3)
            return f"[{', '.join(self.make(type, depth - 1).words for _ in range(number))}]"
        rows = self.rows[type] or [self.row_shape()]
        row = self.pick_one(rows)
        index = self.new_index()
        span = row.kind or f"{row.first} to {row.first + row.size - 1}"
        body = self.entry(type, row, index, depth)
        generators, condition = f"{index} in {span}", ""
        if row.kind is None and self.known_rows and self.chance(0.2):
            constants = [known for known in self.known_rows if known.kind is None]
            if constants:
                second = self.new_index()
                generators += f", {second} in {self.pick_one(constants).name}"
                condition = f" with {second} != {self.between(0, 3)}" if not filled and self.chance(0.5) else ""
        if row.kind is None and not filled and not condition and self.chance(0.4):
            condition = f" with {self.pick_one([f'{index} mod 2 = 0', f'{index} >= c', f'{index} != {row.first}'])}"
        return f"[{body.words} for {generators}{condition}]"

    def entry(self, type, row, index, depth):
        """The body of a comprehension over the indices of a row."""
        here = atom(f"{row.name}[{index}]") if row.name else None
        if row.kind is None:
            self.constants.append(atom(index))
        made = self.make(type, min(depth, 1))
        if here and self.chance(0.7):
            made = self.with_element(type, row, index, here, made)
        if row.kind is None:
            self.constants.pop()
        return made

    def with_element(self, type, row, index, here, other):
        """A body that uses the element at the index, and perhaps its neighbour."""
        last = row.first + row.size - 1
        if row.kind is None and self.chance(0.3):  # the neighbour does not exist for the last index
            beside = f"{row.name}[{index} + 1]"
            return Text(f"if {index} < {last} then {beside} else {other.words}", ATOM, True)
        if type == "integer":
            return self.infix(here, self.pick_one(["+", "-"]), other, SUM, SUM, PRODUCT)
        if type == "yesno":
            return self.infix(here, self.pick_one(["and", "or"]), other, JUNCTION, NOT, NOT)
        return here


INTEGERS = [
    Generator.of_sum, Generator.of_sum, Generator.of_product, Generator.of_quotient, Generator.of_quotient,
    Generator.of_minus, Generator.of_abs, Generator.of_if, Generator.of_number, Generator.of_total,
    Generator.of_extreme,
]  # fmt: skip
YESNOS = [
    Generator.comparison, Generator.comparison, Generator.of_chain, Generator.of_equal, Generator.of_mixed,
    Generator.of_not, Generator.of_junction, Generator.of_junction, Generator.of_needs, Generator.of_choice,
    Generator.of_word, Generator.of_word, Generator.of_different, Generator.of_table,
]  # fmt: skip


def problem(seed):
    """A text, and the settings it is to be read with."""
    made = Generator(seed)
    text = made.text()
    return text, made.settings
