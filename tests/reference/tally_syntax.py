"""Reading `.tally` text into a tree of nodes.

In:   the text of a `.tally` file, or one constant expression given with `--set`.
Out:  a list of statements, each a `Node`; or `TallyError` with line and column.
How:  a tokenizer of one regular expression, and a recursive-descent parser with one method for each level of
      binding, loosest first: needs, and/or, not, comparison, + -, * / mod, unary -, atoms.

Written from the description of the language alone (the design's section "The tally language"); it shares no code,
no grammar file and no table with the crate.
"""

import re
from collections import namedtuple

# `op` names the construct, `pos` is (line, column), `args` depends on `op` (see the parser's methods).
Node = namedtuple("Node", "op pos args")
Token = namedtuple("Token", "kind text pos")

RESERVED = set(
    "title known kind pick let must least most in to yes no needs and or not one of if then else abs mod "
    "all some none exactly at number sum smallest largest different odd even for with".split()
)
WORDS_WITH_OF = {"all", "some", "none", "number"}
WORDS_PLAIN = {"sum", "smallest", "largest", "different", "odd", "even"}
STATEMENTS = {"title", "known", "kind", "pick", "let", "must", "least", "most"}
COMPARISONS = {"=", "!=", "<", "<=", ">", ">="}

TOKEN = re.compile(
    r"""(?P<blank>[ \t\r\n]+|\#[^\n]*)
      | (?P<number>[0-9]+(?![A-Za-z0-9_.]))
      | (?P<word>[A-Za-z][A-Za-z0-9_]*)
      | (?P<string>"(?:\\.|[^"\\\n])*")
      | (?P<sign>!=|<=|>=|[-=<>+*/()\[\],|])""",
    re.VERBOSE,
)


class TallyError(Exception):
    """What is wrong with a file, and where."""

    def __init__(self, pos, message):
        super().__init__(f"line {pos[0]}, column {pos[1]}: {message}" if pos else message)


class OutOfRange(TallyError):
    """A value that could leave its bounds. It matters only in a part that no constant condition kills."""


def tokenize(text):
    """The tokens of a text, ending with one of kind `end`."""
    tokens, at, line, line_start = [], 0, 1, 0
    while at < len(text):
        pos = (line, at - line_start + 1)
        found = TOKEN.match(text, at)
        if not found:
            raise TallyError(pos, f"unexpected {text[at]!r}")
        if found.lastgroup != "blank":
            tokens.append(Token(found.lastgroup, found.group(), pos))
        newlines = found.group().count("\n")
        if newlines:
            line += newlines
            line_start = found.start() + found.group().rindex("\n") + 1
        at = found.end()
    tokens.append(Token("end", "end of file", (line, at - line_start + 1)))
    return tokens


class Parser:
    """Recursive descent over the tokens of one text."""

    def __init__(self, text):
        self.tokens = tokenize(text)
        self.at = 0

    # Small steps over the tokens.

    @property
    def here(self):
        return self.tokens[self.at]

    def next(self):
        token = self.here
        self.at += 1
        return token

    def sees(self, *texts):
        return self.here.kind in ("word", "sign") and self.here.text in texts

    def accept(self, *texts):
        return self.next() if self.sees(*texts) else None

    def expect(self, text):
        if not self.sees(text):
            raise TallyError(self.here.pos, f"expected '{text}', found '{self.here.text}'")
        return self.next()

    def name(self):
        token = self.here
        if token.kind != "word" or token.text in RESERVED:
            why = " (a reserved word)" if token.text in RESERVED else ""
            raise TallyError(token.pos, f"expected a name, found '{token.text}'{why}")
        return self.next()

    # Statements.

    def file(self):
        """Every statement of a file."""
        statements = []
        while self.here.kind != "end":
            token = self.here
            if token.kind != "word" or token.text not in STATEMENTS:
                raise TallyError(token.pos, f"expected a statement, found '{token.text}'")
            self.next()
            statements.append(getattr(self, "statement_" + token.text)(token.pos))
        return statements

    def statement_title(self, pos):
        token = self.next()
        if token.kind != "string":
            raise TallyError(token.pos, f"expected the title in quotes, found '{token.text}'")
        return Node("title", pos, (re.sub(r"\\(.)", r"\1", token.text[1:-1]),))

    def statement_known(self, pos):
        name, axes = self.name(), self.axes()
        self.expect("=")
        return Node("known", pos, (name, axes, self.constant()))

    def statement_kind(self, pos):
        name = self.name()
        self.expect("=")
        values = [self.name()]
        while self.accept("|"):
            values.append(self.name())
        return Node("kind", pos, (name, values))

    def statement_pick(self, pos):
        name, axes = self.name(), self.axes()
        return Node("pick", pos, (name, axes, self.domain() if self.accept("in") else None))

    def statement_let(self, pos):
        name, axes = self.name(), self.axes()
        self.expect("=")
        value = self.row(self.expression) if self.sees("[") and not axes else self.expression()
        return Node("let", pos, (name, axes, value))

    def statement_must(self, pos):
        return Node("must", pos, (self.expression(),))

    def statement_least(self, pos):
        return Node("least", pos, (self.expression(),))

    def statement_most(self, pos):
        return Node("most", pos, (self.expression(),))

    def axes(self):
        """The indices of a declared row, `[i in 1 to 3, c in Crop]`, or None for a single thing."""
        if not self.accept("["):
            return None
        axes = self.generators()
        self.expect("]")
        return axes

    def generators(self):
        found = []
        while True:
            name = self.name()
            self.expect("in")
            found.append((name, self.domain()))
            if not self.accept(","):
                return found

    def domain(self):
        """`a to b`, or the name of a kind or of a row of constants, or such a row written out."""
        if self.sees("["):
            return self.row(self.expression)
        first = self.sum()
        if self.accept("to"):
            return Node("range", first.pos, (first, self.sum()))
        if first.op != "name":
            raise TallyError(first.pos, "expected a range 'a to b' or a name")
        return first

    def constant(self):
        """The right side of a `known`: a list (of lists), a comprehension, or one expression."""
        if not self.sees("["):
            return self.expression()
        pos = self.next().pos
        if self.accept("]"):
            return Node("list", pos, ([],))
        items = [self.constant()]
        if self.accept("for"):
            return self.comprehension(pos, items[0])
        while self.accept(",") and not self.sees("]"):
            items.append(self.constant())
        self.expect("]")
        return Node("list", pos, (items,))

    def whole_constant(self):
        """A text that is one constant and nothing else, as `--set` takes it."""
        found = self.constant()
        if self.here.kind != "end":
            raise TallyError(self.here.pos, f"unexpected '{self.here.text}' after the value")
        return found

    # Expressions, loosest first.

    def expression(self):
        left = self.junction()
        token = self.accept("needs")
        return Node("needs", token.pos, (left, self.expression())) if token else left

    def junction(self):
        first = self.negation()
        token = self.accept("and", "or")
        if not token:
            return first
        items = [first, self.negation()]
        while self.sees("and", "or"):
            again = self.next()
            if again.text != token.text:
                raise TallyError(again.pos, "'and' and 'or' are mixed: put brackets")
            items.append(self.negation())
        return Node(token.text, token.pos, (items,))

    def negation(self):
        token = self.accept("not")
        return Node("not", token.pos, (self.negation(),)) if token else self.comparison()

    def comparison(self):
        first = self.sum()
        token = self.accept("one")
        if token:
            self.expect("of")
            return Node("one of", token.pos, (first, self.row(self.tuple_or_expression)))
        self.no_tuple(first)
        items, signs, pos = [first], [], self.here.pos
        while self.sees(*COMPARISONS):
            signs.append(self.next().text)
            items.append(self.no_tuple(self.sum()))
        if not signs:
            return first
        one_way = set(signs) <= {"<", "<="} or set(signs) <= {">", ">="} or set(signs) == {"="}
        if len(signs) > 1 and not one_way:
            raise TallyError(pos, f"a chain of {' '.join(signs)} does not go in one direction")
        if self.sees("one"):
            raise TallyError(self.here.pos, "'one of' does not continue a comparison: put brackets")
        return Node("compare", pos, (items, signs))

    def no_tuple(self, node):
        if node.op == "tuple":
            raise TallyError(node.pos, "a tuple stands only left of 'one of' and in its list")
        return node

    def sum(self):
        left = self.product()
        while self.sees("+", "-"):
            token = self.next()
            left = Node(token.text, token.pos, (self.no_tuple(left), self.no_tuple(self.product())))
        return left

    def product(self):
        left = self.sign()
        while self.sees("*", "/", "mod"):
            token = self.next()
            left = Node(token.text, token.pos, (self.no_tuple(left), self.no_tuple(self.sign())))
        return left

    def sign(self):
        token = self.accept("-")
        if not token:
            return self.atom()
        if self.here.kind == "number":  # at once, so that the least 64-bit number can be written
            return Node("number", token.pos, (-int(self.next().text),))
        return Node("negate", token.pos, (self.no_tuple(self.sign()),))

    def atom(self):
        token = self.here
        if token.kind == "number":
            self.next()
            return Node("number", token.pos, (int(token.text),))
        if self.accept("yes", "no"):
            return Node("yesno", token.pos, (token.text == "yes",))
        if self.accept("("):
            return self.bracket(token.pos)
        if self.accept("if"):
            condition = self.expression()
            self.expect("then")
            yes = self.expression()
            self.expect("else")
            return Node("if", token.pos, (condition, yes, self.expression()))
        if self.accept("abs"):
            self.expect("(")
            inner = self.expression()
            self.expect(")")
            return Node("abs", token.pos, (inner,))
        if token.kind == "word" and token.text in RESERVED:
            return self.word_form()
        if token.kind == "word":
            return self.reference()
        raise TallyError(token.pos, f"expected an expression, found '{token.text}'")

    def bracket(self, pos):
        items = [self.expression()]
        while self.accept(","):
            items.append(self.expression())
        self.expect(")")
        return items[0] if len(items) == 1 else Node("tuple", pos, (items,))

    def tuple_or_expression(self):
        """An entry of the list of `one of`. A tuple comes back from `atom`; nothing may be done with it."""
        start = self.here.pos
        if not self.sees("("):
            return self.expression()
        back = self.at
        self.next()
        inner = self.bracket(start)
        if inner.op == "tuple":
            return inner
        self.at = back
        return self.expression()

    def word_form(self):
        token = self.next()
        if token.text in WORDS_WITH_OF:
            self.expect("of")
            return Node("row word", token.pos, (token.text, None, self.row(self.expression)))
        if token.text in WORDS_PLAIN:
            return Node("row word", token.pos, (token.text, None, self.row(self.expression)))
        word = token.text
        if word == "at" and self.sees("least", "most"):
            word = "at " + self.next().text
        elif word != "exactly":
            raise TallyError(token.pos, f"'{word}' is a reserved word and starts no expression")
        bound = self.no_tuple(self.sum())
        self.expect("of")
        return Node("row word", token.pos, (word, bound, self.row(self.expression)))

    def row(self, entry):
        """`[a, b, c]` (a comma may follow the last) or `[e for i in …, j in … with c]`."""
        pos = self.expect("[").pos
        if self.accept("]"):
            return Node("list", pos, ([],))
        items = [entry()]
        if self.accept("for"):
            return self.comprehension(pos, items[0])
        while self.accept(",") and not self.sees("]"):
            items.append(entry())
        self.expect("]")
        return Node("list", pos, (items,))

    def comprehension(self, pos, item):
        generators = self.generators()
        condition = self.expression() if self.accept("with") else None
        self.expect("]")
        return Node("comprehension", pos, (item, generators, condition))

    def reference(self):
        token = self.name()
        if not self.accept("["):
            return Node("name", token.pos, (token.text,))
        indices = [self.expression()]
        while self.accept(","):
            indices.append(self.expression())
        self.expect("]")
        return Node("element", token.pos, (token.text, indices))
