"""What the corpus knows of one function, and the shelf on which a module puts its functions."""

from __future__ import annotations

import hashlib
import random
from collections.abc import Callable, Iterator
from dataclasses import dataclass
from typing import Any, Literal, TypeVar

Build = Callable[[int, random.Random], tuple[Any, ...]]
Body = TypeVar("Body", bound=Callable[..., object])


@dataclass(frozen=True, slots=True, kw_only=True)
class Kind:
    """A class of growth: `too_tight` are budgets below it that a clock can tell, `loose` is one above.

    `log_tighter`: a budget too tight by one log factor, which only a count can tell.
    """

    bound: str
    loose: str
    too_tight: tuple[str, ...] = ()
    log_tighter: str = ""


CONSTANT = Kind(bound="1", loose="log n")
LOGARITHM = Kind(bound="log n", loose="sqrt(n)", log_tighter="1")
ROOT = Kind(bound="sqrt(n)", loose="n", too_tight=("log n",), log_tighter="sqrt(n) / log n")
LINEAR = Kind(bound="n", loose="n log n", too_tight=("log n",), log_tighter="n / log n")
LOGLINEAR = Kind(bound="n log n", loose="n^1.5", log_tighter="n")
ROOT_CUBED = Kind(bound="n^1.5", loose="n^2", too_tight=("n",), log_tighter="n^1.5 / log n")
THREE_HALVES = Kind(bound="n^1.585", loose="n^2", too_tight=("n",), log_tighter="n^1.585 / log n")
QUADRATIC = Kind(bound="n^2", loose="n^3", too_tight=("n log n", "n"), log_tighter="n^2 / log n")
QUADRATIC_LOG = Kind(bound="n^2 log n", loose="n^3", too_tight=("n log n",))
SEVEN_HALVES = Kind(bound="n^2.807", loose="n^3", too_tight=("n^2",), log_tighter="n^2.807 / log n")
CUBIC = Kind(bound="n^3", loose="n^4", too_tight=("n^2",), log_tighter="n^3 / log n")
GOLDEN = Kind(bound="1.618^n", loose="2^n", too_tight=("n^3",))
DOUBLING = Kind(bound="2^n", loose="3^n", too_tight=("1.5^n",))
FACTORIAL = Kind(bound="n!", loose="n n!", too_tight=("2^n",))


@dataclass(frozen=True, slots=True, kw_only=True)
class Entry:
    """A function body with its true growth.

    `build(n, rng)`: a fresh input, as the arguments of one call. `expected`: the right answer, found another
    way from the same arguments; None where it is not cheap. `dominates`: the fastest-growing term makes up most
    of the cost where a call takes some 30 ms (or at `largest`). `reusable`: a call leaves its arguments as they
    were. `log_tighter`: a budget too tight by one log factor, where the lines that the body runs show its growth.
    """

    name: str
    body: Callable[..., object]
    build: Build
    growth: str
    too_tight: tuple[str, ...]
    log_tighter: str
    loose: str
    tags: frozenset[str]
    dominates: bool
    reusable: bool
    smallest: int
    largest: int
    expected: Callable[..., object] | None

    @property
    def half(self) -> Literal["choose", "hold"]:
        """Rules are chosen on one half and checked on the other; the name alone decides which."""
        return "hold" if hashlib.sha256(self.name.encode()).digest()[0] % 2 else "choose"


class Shelf:
    """Collects the functions of one module, in the order in which they are written."""

    def __init__(self) -> None:
        self._entries: list[Entry] = []

    def __iter__(self) -> Iterator[Entry]:
        return iter(self._entries)

    def add(
        self,
        kind: Kind,
        build: Build,
        *,
        growth: str | None = None,
        expected: Callable[..., object] | None = None,
        tags: str = "",
        dominates: bool = True,
        reusable: bool = False,
        smallest: int = 8,
        largest: int = 2_000_000,
    ) -> Callable[[Body], Body]:
        """Decorates a body; `growth` says in other words (a recurrence) what `kind` says. The tag `counted` says that
        the lines executed grow as the cost does, and that a log factor shows: over sizes near 10^9 its share of the
        exponent, 1 / ln n, is below any slack.
        """

        marks = frozenset(tags.split())

        def shelve(body: Body) -> Body:
            self._entries.append(
                Entry(
                    name=body.__name__,
                    body=body,
                    build=build,
                    growth=growth or kind.bound,
                    too_tight=kind.too_tight,
                    log_tighter=kind.log_tighter if "counted" in marks else "",
                    loose=kind.loose,
                    tags=marks,
                    dominates=dominates,
                    reusable=reusable,
                    smallest=smallest,
                    largest=largest,
                    expected=expected,
                )
            )
            return body

        return shelve
