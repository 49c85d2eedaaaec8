"""Tallies: counts that the test itself decides on.

`tally.add("queries")` counts anything. `tally.keys(values)` wraps values so that their comparisons, equality
tests and hashes are counted, also those that sort, bisect, heapq, dict and set make from C.
"""

from __future__ import annotations

import copy
import operator
from collections.abc import Callable, Iterable, Iterator
from typing import Any, Final, Generic, TypeVar

from pytest_growthbudget.meters.protocol import MeterError

T = TypeVar("T")

COMPARISONS: Final = "comparisons"
EQUALITIES: Final = "equalities"
HASHES: Final = "hashes"


class Key(Generic[T]):
    """A value whose comparisons (<, <=, >, >=), equality tests (==, !=) and hashes are counted.

    In all else it behaves as its value: it prints, hashes, compares, indexes, iterates and calculates as the
    value does, and has its attributes. What a calculation returns is a plain value, and no longer counted.
    `isinstance` tells it apart; `Tally.unwrap` gives the value back.

    A comparison counts once, whether the other side is a key or a plain value. As with plain values, a
    look-up in a list, dict or set takes an object to be equal to itself without asking, so that costs no
    equality test.
    """

    __slots__ = ("_counts", "_value")

    def __init__(self, value: T, counts: dict[str, int]) -> None:
        self._value = value
        self._counts = counts

    def __lt__(self, other: Any) -> Any:
        self._counts[COMPARISONS] += 1
        return self._value < _plain(other)

    def __le__(self, other: Any) -> Any:
        self._counts[COMPARISONS] += 1
        return self._value <= _plain(other)

    def __gt__(self, other: Any) -> Any:
        self._counts[COMPARISONS] += 1
        return self._value > _plain(other)

    def __ge__(self, other: Any) -> Any:
        self._counts[COMPARISONS] += 1
        return self._value >= _plain(other)

    def __eq__(self, other: object) -> Any:
        self._counts[EQUALITIES] += 1
        return self._value == _plain(other)

    def __ne__(self, other: object) -> Any:
        self._counts[EQUALITIES] += 1
        return self._value != _plain(other)

    def __hash__(self) -> int:
        self._counts[HASHES] += 1
        return hash(self._value)

    def __repr__(self) -> str:
        return repr(self._value)

    def __str__(self) -> str:
        return str(self._value)

    def __format__(self, spec: str) -> str:
        return format(self._value, spec)

    def __bool__(self) -> bool:
        return bool(self._value)

    def __iter__(self) -> Iterator[Any]:
        return iter(self._value)  # type: ignore[call-overload, no-any-return]

    def __getattr__(self, name: str) -> Any:
        # Special names are looked up by the machinery (numpy, copy, pickle) to learn what an object is.
        if name.startswith("__") or name in Key.__slots__:
            raise AttributeError(f"{type(self).__name__!r} object has no attribute {name!r}")
        return getattr(self._value, name)

    def __copy__(self) -> Key[T]:
        return Key(copy.copy(self._value), self._counts)

    def __deepcopy__(self, memo: dict[int, Any]) -> Key[T]:
        return Key(copy.deepcopy(self._value, memo), self._counts)

    def __reduce__(self) -> str | tuple[Any, ...]:
        raise TypeError(
            "a counted key cannot be pickled: what another process does with it would not be counted. "
            "Unwrap it first, with tally.unwrap(key)."
        )


def _plain(value: Any) -> Any:
    return value._value if isinstance(value, Key) else value


def _one_sided(function: Callable[..., Any]) -> Callable[..., Any]:
    def method(self: Key[Any], *others: Any) -> Any:
        return function(self._value, *map(_plain, others))

    return method


def _reflected(function: Callable[..., Any]) -> Callable[..., Any]:
    def method(self: Key[Any], other: Any) -> Any:
        return function(_plain(other), self._value)

    return method


# Special methods are looked up on the class, so that __getattr__ cannot supply them.
_ONE_SIDED: dict[str, Callable[..., Any]] = {
    "abs": abs,
    "contains": operator.contains,
    "float": float,
    "getitem": operator.getitem,
    "index": operator.index,
    "int": int,
    "invert": operator.invert,
    "len": len,
    "neg": operator.neg,
    "pos": operator.pos,
    "round": round,
}
_TWO_SIDED: dict[str, Callable[..., Any]] = {
    "add": operator.add,
    "and": operator.and_,
    "divmod": divmod,
    "floordiv": operator.floordiv,
    "lshift": operator.lshift,
    "matmul": operator.matmul,
    "mod": operator.mod,
    "mul": operator.mul,
    "or": operator.or_,
    "pow": pow,
    "rshift": operator.rshift,
    "sub": operator.sub,
    "truediv": operator.truediv,
    "xor": operator.xor,
}
for _name, _function in _ONE_SIDED.items():
    setattr(Key, f"__{_name}__", _one_sided(_function))
for _name, _function in _TWO_SIDED.items():
    setattr(Key, f"__{_name}__", _one_sided(_function))
    setattr(Key, f"__r{_name}__", _reflected(_function))


class Tally:
    """Named counts. The `tally` fixture hands one to a test; `meter="tally:NAME"` reads one of its counts.

    A name exists once something was added to it, be it 0; `keys` makes `comparisons`, `equalities` and
    `hashes` exist.
    """

    def __init__(self) -> None:
        self._counts: dict[str, int] = {}

    def keys(self, values: Iterable[T]) -> list[Key[T]]:
        """Wrap `values`, in order; a value that is wrapped already is wrapped anew, for this tally."""
        for name in (COMPARISONS, EQUALITIES, HASHES):
            self._counts.setdefault(name, 0)
        return [Key(_plain(value), self._counts) for value in values]

    @staticmethod
    def unwrap(value: Any) -> Any:
        """The value inside a key; anything else as it is."""
        return _plain(value)

    def add(self, name: str, amount: int = 1) -> None:
        """Count `amount` more of `name`. Raises ValueError where the amount is negative or the name empty."""
        if amount < 0:
            raise ValueError(f"tally.add({name!r}, {amount}): a tally only grows; add 0 or more")
        if not name or name != name.strip():
            raise ValueError(f"tally.add({name!r}): a name must be given, without blanks around it")
        self._counts[name] = self._counts.get(name, 0) + amount

    def count(self, name: str) -> int:
        """What was added to `name` since the tally was made or reset; 0 for a name that does not exist."""
        return self._counts.get(name, 0)

    @property
    def names(self) -> tuple[str, ...]:
        """The names that something was added to, in order of first use."""
        return tuple(self._counts)

    def reset(self) -> None:
        """Set every count to 0. Names stay, and so do the keys, which go on counting here."""
        for name in self._counts:
            self._counts[name] = 0


class TallyMeter:
    """Reads one count of a tally: what was added to it between `start` and `stop`."""

    deterministic: Final = True

    def __init__(self, counted: str, tally: Tally) -> None:
        self.name = f"tally:{counted}"
        self.unit = counted
        self.tally = tally
        self._counted = counted
        self._before = 0

    def start(self) -> None:
        self._before = self.tally.count(self._counted)

    def stop(self) -> float:
        """Raises MeterError where nothing was ever added to the name, or the body reset the tally."""
        names = self.tally.names
        if self._counted not in names:
            raise MeterError(
                f"the meter {self.name!r} has nothing to read: nothing was added to {self._counted!r}. "
                + _remedy(self._counted, names)
            )
        now = self.tally.count(self._counted)
        if now < self._before:
            raise MeterError(
                f"the meter {self.name!r} went backwards, from {self._before} to {now}: "
                "the body reset the tally. Take tally.reset() out of the body; readings do not need it."
            )
        return float(now - self._before)


def _remedy(counted: str, names: tuple[str, ...]) -> str:
    if names:
        return f"This test's tally has {', '.join(map(repr, names))}: name one of these in the marker."
    if counted in (COMPARISONS, EQUALITIES, HASHES):
        return "Take the fixture `tally` and build the workload with tally.keys(values)."
    return (
        f"Take the fixture `tally` and call tally.add({counted!r}) where one is made, "
        f"and tally.add({counted!r}, 0) beforehand if there may be none."
    )
