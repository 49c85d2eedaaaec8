"""Telling whether a call has the arguments of an earlier one, cheaply.

Values are told by their hash; sequences and arrays by their length and a sample of their items; other objects by
their identity, and only where the object cannot have been freed since: where it was passed on from the caller, or
is held here. An argument that cannot be told makes the whole call one that cannot be told (key 0).
"""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any, Final

UNTOLD: Final = 0
_PLAIN: Final = frozenset({int, str, bytes, float, bool, complex, type(None), range, frozenset})
_SAMPLE: Final = 64
_MOST_HELD: Final = 1 << 16


class Fingerprints:
    """Keys of calls: equal keys mean the same arguments, but for chance (64 bits) and what the sample leaves out."""

    def __init__(self) -> None:
        self._held: dict[int, object] = {}

    def of(self, values: Iterable[Any]) -> int:
        """The key of a call with these arguments; `UNTOLD` where there is none."""
        parts = []
        for value in values:
            kind = type(value)
            try:
                if kind in _PLAIN:
                    parts.append(hash((kind, value)))
                    continue
                part = self._other(value)
            except Exception:  # a __hash__ or an item of the user's own may raise anything
                return UNTOLD
            if part is None:
                return UNTOLD
            parts.append(part)
        return hash(tuple(parts)) or 1

    def _other(self, value: Any) -> int | None:
        kind = type(value)
        if kind is list or kind is tuple:
            return self._sequence(value)
        if hasattr(value, "shape") and hasattr(value, "item"):
            return _array(value)
        if getattr(kind, "__hash__", None) not in (None, object.__hash__):
            return hash((kind, value))
        if id(value) not in self._held:
            if len(self._held) >= _MOST_HELD:
                return None
            self._held[id(value)] = value
        return id(value)

    def _sequence(self, value: Any) -> int | None:
        count = len(value)
        sample = value if count <= _SAMPLE else value[:: count // _SAMPLE]
        try:
            return hash((type(value), count, tuple(sample)))
        except TypeError:  # an item that has no hash
            return hash((type(value), count, self.of(sample)))


def _array(value: Any) -> int:
    count = 1
    for length in value.shape:
        count *= length
    step = max(1, count // _SAMPLE) | 1  # odd, so that the sample does not keep to one column
    return hash((tuple(value.shape), *[value.item(place) for place in range(0, count, step)]))
