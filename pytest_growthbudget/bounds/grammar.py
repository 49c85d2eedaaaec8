"""From tokens to a tree. Nothing is evaluated here, and nothing is ever passed to `eval`.

    statement = expression | call "=" expression { ";" clause }
    sum       = ["-"] product { ("+" | "-") product }
    product   = power { ["*" | "/" | "//"] power }           (no sign: juxtaposition)
    power     = postfix [ "^" exponent ]                     (a second "^" is refused)
    postfix   = primary { "!" | superscript }
    primary   = number | name | "(" sum ")" | "|" name "|" | function | call | root
    function  = name [ "^" exponent ] ( "(" sum { "," sum } ")" | plain argument )
    root      = "{" "p" ":" sum "=" "1" "}" | "{" "x" ":" sum "=" sum "}"

Where usage disagrees about a spelling and the readings differ in growth, it is refused with a hint.
"""

from __future__ import annotations

from fractions import Fraction
from itertools import pairwise
from typing import NoReturn

from pytest_growthbudget.bounds import names
from pytest_growthbudget.bounds.doubts import Doubts
from pytest_growthbudget.bounds.language import Token, number_value
from pytest_growthbudget.bounds.tree import (
    Apply,
    Call,
    Factorial,
    Name,
    Node,
    Num,
    Power,
    Product,
    RootOf,
    Sum,
)

MAX_DEPTH = 30
MAX_ITEMS = 200


_STARTS = ("number", "name", "(", "sqrt", "⌈", "⌊", "{", "|")


class Parser(Doubts):
    """One pass over the tokens; one method a rule. `function` is the recurrence's name, "" in a bound."""

    def __init__(self, text: str, tokens: list[Token], function: str = "") -> None:
        self.text = text
        self.tokens = tokens
        self.function = function
        self.at = 0
        self.depth = 0
        self.unknown = ""
        self.sizes: set[str] = set()
        self.plain = {t.value for t, after in pairwise(tokens) if t.kind == "name" and after.kind != "("}

    def take(self) -> Token:
        token = self.tokens[self.at]
        self.at += 1
        return token

    def expect(self, kind: str, opened: Token | None = None) -> Token:
        if self.token.kind == kind:
            return self.take()
        if opened is not None and self.token.kind == "end":
            self.fail(f"this {opened.value!r} is never closed", opened.start, opened.end)
        expected = "a name" if kind == "name" else repr(kind)
        raise self.fault(f"expected {expected} here{self._found()}", self.token.start, self.token.end)

    def _found(self) -> str:
        return "" if self.token.kind == "end" else f", found {self.token.value!r}"

    def size(self, token: Token) -> str:
        """The name of a size, checked once."""
        if token.value not in self.sizes:
            self.sizes.add(names.checked_size(self.text, token, self.plain))
        return token.value

    def finish(self) -> None:
        """Checks that everything was read."""
        token = self.token
        if token.kind == "end":
            return
        if token.kind in (")", "}", "⌉", "⌋"):
            self.fail(f"this {token.value!r} closes nothing", token.start, token.end)
        if token.kind == ",":
            self.fail("a comma has no meaning here", token.start, token.end, "write 1000 for one thousand")
        self.fail(f"{token.value!r} was not expected here", token.start, token.end)

    def sum(self) -> Node:
        self.depth += 1
        if self.depth > MAX_DEPTH:
            self.fail("the expression is nested too deeply", self.token.start, self.token.end)
        start = self.token.start
        sign = 1
        if self.token.kind in ("+", "-"):
            sign = -1 if self.take().kind == "-" else 1
        items = [(sign, self.product())]
        while self.token.kind in ("+", "-"):
            sign = -1 if self.take().kind == "-" else 1
            items.append((sign, self.product()))
        self.depth -= 1
        if len(items) > MAX_ITEMS:
            self.fail(f"a sum of {len(items)} parts is too long", start)
        if len(items) == 1 and items[0][0] == 1:
            return items[0][1]
        return Sum(tuple(items), start, self.tokens[self.at - 1].end, any(n.recursive for _, n in items))

    def product(self) -> Node:
        first = self.power()
        items: list[tuple[str, Node]] = [("*", first)]
        while True:
            kind = self.token.kind
            if kind in ("*", "/", "//"):
                sign = self.take()
                right = self.power()
                if kind == "/":
                    self._check_fraction(items[-1][1], sign, right)
                items.append((kind, right))
            elif kind in _STARTS:
                self._check_juxtaposition(items)
                items.append(("*", self.power()))
            else:
                break
        if len(items) == 1:
            return first
        if len(items) > MAX_ITEMS:
            self.fail(f"a product of {len(items)} parts is too long", first.start)
        return Product(tuple(items), first.start, self.tokens[self.at - 1].end, any(n.recursive for _, n in items))

    def power(self) -> Node:
        base = self.postfix()
        if self.token.kind != "^":
            return base
        if isinstance(base, Apply) and base.bare:
            self._ambiguous_argument(base)
        self.take()
        exponent = self.exponent()
        if self.token.kind in ("^", "power", "!"):
            self.fail(
                "a power of a power, or a factorial in an exponent, needs brackets",
                base.start,
                self.token.end,
                "write (a^b)^c or a^(b^c)",
            )
        end = self.tokens[self.at - 1].end
        return Power(base, exponent, base.start, end, base.recursive or exponent.recursive)

    def _ambiguous_argument(self, base: Apply) -> NoReturn:
        name, inner = self._written(base)
        short = f"{name}^2 {inner} or " if names.is_log(base.function) and base.function != "log_power" else ""
        self.fail(
            f"this can mean ({self.text[base.start : base.end]})^… or {name}({inner}^…)",
            base.start,
            self.token.end,
            f"write {short}({name} {inner})^2 for the power, {name}({inner}^2) for the other",
        )

    def exponent(self) -> Node:
        """What may stand right of ^ without brackets: one signed number, name, function or bracket."""
        token = self.token
        if token.kind in ("-", "+"):
            self.take()
            inner = self.primary()
            if token.kind == "+":
                return inner
            return Sum(((-1, inner),), token.start, inner.end, inner.recursive)
        if token.kind == "{" and ":" not in [t.kind for t in self.tokens[self.at + 1 : self.at + 3]]:
            node, closed = self.bracket("}")
            return Sum(((1, node),), token.start, closed.end, node.recursive)
        node = self.primary()
        if isinstance(node, Name) and self.token.kind == "(" and self.token.start == node.end:
            self.fail("it is not clear where the exponent ends", node.start, self.token.end, "write brackets or *")
        return node

    def postfix(self) -> Node:
        node = self.primary()
        while self.token.kind in ("!", "power"):
            token = self.token
            if token.kind == "!":
                if isinstance(node, (Factorial, Power)):
                    self.fail("a factorial of this needs brackets", node.start, token.end, "write (n!)! or (n^2)!")
                self.take()
                node = Factorial(node, node.start, token.end, node.recursive)
                continue
            if isinstance(node, Apply) and node.bare:
                self._ambiguous_argument(node)
            if isinstance(node, Power):
                self.fail("a power of a power needs brackets", node.start, token.end)
            self.take()
            node = Power(node, self._superscript(token), node.start, token.end, node.recursive)
            if self.token.kind == "^":
                self.fail("a power of a power needs brackets", node.start, self.token.end)
        return node

    def _superscript(self, token: Token) -> Node:
        digits = token.value
        negative = digits.startswith("-")
        body = digits[1:] if negative else digits
        if body == "n":
            inner: Node = Name("n", token.start, token.end)
        elif body.isdecimal() and len(body) <= 6:
            inner = Num(Fraction(int(body)), token.start, token.end)
        else:
            self.fail("this superscript is not understood", token.start, token.end, "write ^(…)")
        return Sum(((-1, inner),), token.start, token.end, False) if negative else inner

    def bracket(self, close: str) -> tuple[Node, Token]:
        opened = self.take()
        if self.token.kind == close:
            self.fail("nothing stands between these brackets", opened.start, self.token.end)
        node = self.sum()
        return node, self.expect(close, opened)

    def primary(self) -> Node:
        token = self.token
        if token.kind == "number":
            self.take()
            return Num(number_value(token.value), token.start, token.end)
        if token.kind == "(":
            node, closed = self.bracket(")")
            return Sum(((1, node),), token.start, closed.end, node.recursive)
        if token.kind in ("⌈", "⌊"):
            node, closed = self.bracket("⌉" if token.kind == "⌈" else "⌋")
            function = "ceil" if token.kind == "⌈" else "floor"
            return Apply(function, (node,), token.start, closed.end, node.recursive)
        if token.kind == "|":
            self.take()
            inner = self.expect("name")
            closed = self.expect("|")
            return Name(self.size(inner), token.start, closed.end)
        if token.kind == "{":
            return self.root()
        if token.kind == "sqrt":
            self.take()
            return self.application("sqrt", token)
        if token.kind == "name":
            return self.named()
        if token.kind in ("+", "-"):
            self.fail("two signs in a row", token.start, token.end)
        if token.kind == "end":
            self.fail("the expression ends too early: a number, a size or a bracket was expected", token.start)
        if token.kind == "power":
            self.fail("this superscript stands on nothing", token.start, token.end)
        raise self.fault(f"{token.value!r} was not expected: a number, a size or a bracket was", token.start, token.end)

    def named(self) -> Node:
        token = self.take()
        if self._is_call(token):
            if self.token.kind != "(":
                self.fail(
                    f"{token.value} is the recurrence's function and needs an argument",
                    token.start,
                    token.end,
                )
            node, closed = self.bracket(")")
            if node.recursive:
                self.fail("a call inside the argument of a call is not solved", token.start, closed.end)
            return Call(node, token.start, closed.end)
        if token.value == self.unknown:
            return Name(token.value, token.start, token.end)
        bracketed = self.token.kind == "("
        names.refuse_function(self.text, token, bracketed)
        function = names.function(token.value)
        if function and (function not in names.WRAPPERS or bracketed):
            return self.application(function, token)
        return Name(self.size(token), token.start, token.end)

    def application(self, function: str, named: Token) -> Node:
        """The power, if any, and the argument of a known function."""
        raised: Node | None = None
        if self.token.kind in ("^", "power"):
            if not names.is_log(function):
                self.fail(
                    "only a logarithm takes a power before its argument",
                    named.start,
                    self.token.end,
                    f"write {named.value}(…)^2",
                )
            token = self.take()
            raised = self._superscript(token) if token.kind == "power" else self.exponent()
            if isinstance(raised, Name) or (isinstance(raised, Apply) and raised.bare):
                self.fail("the power of a logarithm must be a number", raised.start, raised.end)
        if self.token.kind == "(":
            opened = self.take()
            arguments = [self.sum()]
            while self.token.kind == ",":
                self.take()
                arguments.append(self.sum())
            end = self.expect(")", opened).end
            bare = False
        else:
            arguments, end, bare = [self.plain_argument(function, named)], self.tokens[self.at - 1].end, True
        recursive = any(a.recursive for a in arguments)
        names.check_count(self.text, function, named, len(arguments), end)
        node = Apply(function, tuple(arguments), named.start, end, recursive, bare)
        if raised is None:
            return node
        inner = Apply(function, tuple(arguments), named.start, end, recursive)
        power = Power(inner, raised, named.start, end, recursive)
        # Wrapped as an application so that the rules for arguments without brackets still see it.
        return Apply("log_power", (power,), named.start, end, recursive, bare)

    def plain_argument(self, function: str, named: Token) -> Node:
        token = self.token
        if token.kind not in ("name", "number", "sqrt", "⌈", "⌊", "|") or function in names.BRACKETS_NEEDED:
            hint = "the iterated logarithm is outside the class of growths" if token.kind == "*" else ""
            self.fail(
                f"{named.value} needs an argument" + (" in brackets" if token.kind != "end" else ""),
                named.start,
                named.end,
                hint,
            )
        self.depth += 1
        if self.depth > MAX_DEPTH:
            self.fail("the expression is nested too deeply", token.start, token.end)
        node = self.primary()
        self.depth -= 1
        if self.token.kind == "!" and names.is_log(function) and isinstance(node, (Name, Num)):
            end = self.take().end
            node = Factorial(node, node.start, end, False)
        return node

    def root(self) -> Node:
        opened = self.take()
        name = self.expect("name")
        if name.value not in ("p", "x") or self.unknown:
            self.fail("expected p or x, as in {x: x^2 = x + 1}", name.start, name.end)
        self.expect(":")
        self.unknown = name.value
        left = self.sum()
        self.expect("=")
        right = self.sum()
        closed = self.expect("}", opened)
        self.unknown = ""
        return RootOf(name.value, left, right, opened.start, closed.end)
