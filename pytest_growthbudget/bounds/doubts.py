"""Products and quotients that can be read in two ways."""

from __future__ import annotations

from fractions import Fraction
from typing import NoReturn

from pytest_growthbudget.bounds import names
from pytest_growthbudget.bounds.language import SUPERSCRIPTS, BoundError, Token
from pytest_growthbudget.bounds.tree import Apply, Name, Node, Num, Power


class Doubts:
    """The state of a parser, and the checks of what stands side by side. Doubtful readings are refused."""

    text: str
    tokens: list[Token]
    function: str
    at: int
    plain: set[str]

    @property
    def token(self) -> Token:
        return self.tokens[self.at]

    def fault(self, message: str, start: int, end: int | None = None, hint: str = "") -> BoundError:
        return BoundError(message, self.text, start, end, hint)

    def fail(self, message: str, start: int, end: int | None = None, hint: str = "") -> NoReturn:
        raise self.fault(message, start, end, hint)

    def _written(self, bare: Apply) -> tuple[str, str]:
        """A function and its argument without brackets, as they stand in the text: `log^2` and `n`."""
        argument = bare.arguments[-1]
        if isinstance(argument, Power) and isinstance(argument.base, Apply) and bare.function == "log_power":
            argument = argument.base.arguments[-1]
        return self.text[bare.start : argument.start].rstrip(), self.text[argument.start : argument.end]

    def _check_fraction(self, left: Node, sign: Token, right: Node) -> None:
        """Refuses `n^1/2`, where n^(1/2) may be meant; `n^2/2` and `n^2/n` leave no doubt."""
        if not (isinstance(left, Power) and left.end == sign.start and sign.end == right.start):
            return
        if self.text[left.end - 1] in ")}" or self.text[left.end - 1] in SUPERSCRIPTS:
            return
        exponent = left.exponent
        if isinstance(right, Num) and isinstance(exponent, Num) and right.value.denominator == 1:
            value = exponent.value
            reduced = value.denominator == 1 and Fraction(value, right.value).denominator == right.value
            doubtful = right.value > 1 and (reduced or value.denominator != 1)
        else:
            doubtful = isinstance(right, Num) and right.value != 1 and not isinstance(exponent, Num)
        if doubtful:
            base, whole = self.text[left.start : left.end], self.text[left.start : right.end]
            over = self.text[right.start : right.end]
            inner = self.text[exponent.start : exponent.end]
            outer = self.text[left.start : left.base.end]
            self.fail(
                f"{whole!r} can mean ({base})/{over} or {outer}^({inner}/{over})",
                left.start,
                right.end,
                f"write {outer}^({inner}/{over}) or ({base})/{over}",
            )

    def _is_call(self, token: Token) -> bool:
        return bool(self.function) and token.kind == "name" and token.value == self.function

    def _check_juxtaposition(self, items: list[tuple[str, Node]]) -> None:
        """Refuses products without a sign that can be read in two ways."""
        sign, last = items[-1]
        token = self.token
        close = last.end == token.start
        call = self._is_call(token)
        if sign in ("/", "//") and not call:
            self.fail(
                "it is not clear whether this belongs below the fraction bar",
                token.start,
                token.end,
                "write brackets, as in 1/(2 n) or (1/2) n",
            )
        after = self.tokens[self.at + 1] if token.kind == "(" and not close else token
        log_next = after.kind == "name" and names.is_log(after.value)
        if isinstance(last, Apply) and last.bare and not call and not (names.is_log(last.function) and log_next):
            function, _ = self._written(last)
            self.fail(
                f"it is not clear where the argument of {function} ends",
                last.start,
                token.end,
                f"write {function}(…) with brackets around the argument",
            )
        if isinstance(last, Power) and self.text[last.end - 1] not in ")}":
            exponent = last.exponent
            if isinstance(exponent, Apply) and exponent.bare and not call:
                self.fail("it is not clear where this exponent ends", exponent.start, token.end, "write brackets")
            constant = isinstance(last.base, Num)
            if close and not call and (constant or not log_next):
                whole = self.text[last.start : token.end]
                self.fail(
                    f"it is not clear where the exponent ends in {whole!r}",
                    last.start,
                    token.end,
                    "write brackets around the exponent, or * after it",
                )
        if token.kind == "number":
            following = self.tokens[self.at + 1].kind
            if isinstance(last, Num) or following not in ("^", "power"):
                self.fail(
                    "a number after another factor needs a sign between them",
                    token.start,
                    token.end,
                    "write * for a product, ^ for a power",
                )
        if isinstance(last, Name) and token.kind == "(" and last.name not in self.plain:
            self.fail(
                f"unknown function {last.name!r}",
                last.start,
                last.end,
                f"known are {names.KNOWN}; a product with a size is written {last.name} * (…)",
            )
