"""Real function bodies with known growth, on which the verdict's error rates are measured."""

from __future__ import annotations

from . import (
    arrays,
    between,
    cubes,
    divided,
    explosive,
    flat,
    graphs,
    hidden,
    library,
    loops,
    ordered,
    primitives,
    scattered,
    squares,
    structures,
    wide,
)
from .entry import Entry

ROOMS = (
    flat,
    loops,
    structures,
    primitives,
    scattered,
    library,
    arrays,
    graphs,
    ordered,
    divided,
    between,
    squares,
    wide,
    hidden,
    cubes,
    explosive,
)
CORPUS: tuple[Entry, ...] = tuple(entry for room in ROOMS for entry in room.shelf)

__all__ = ["CORPUS", "Entry"]
