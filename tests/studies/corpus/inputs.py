"""Fresh inputs of n things, all drawn from a `random.Random`; bulk ones seed numpy's generator from it."""

from __future__ import annotations

import random
import string
from collections.abc import Callable
from typing import Any

import numpy as np
import numpy.typing as npt

Arguments = tuple[Any, ...]
Floats = npt.NDArray[np.float64]


def bulk(rng: random.Random) -> np.random.Generator:
    """A numpy generator seeded from `rng`."""
    return np.random.default_rng(rng.getrandbits(64))


def floats(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).random(n).tolist(),)


def two_float_lists(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    return draw.random(n).tolist(), draw.random(n).tolist()


def integers(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).integers(0, 1 << 40, n).tolist(),)


def small_integers(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).integers(-100, 100, n).tolist(),)


def two_symbol_lists(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    return draw.integers(0, 4, n).tolist(), draw.integers(0, 4, n).tolist()


def ascending(n: int, rng: random.Random) -> Arguments:
    return (np.sort(bulk(rng).random(n)).tolist(),)


def scattered_floats(n: int, rng: random.Random) -> Arguments:
    """Boxed floats whose order in the list is not their order in memory."""
    values = bulk(rng).random(n).tolist()
    order = bulk(rng).permutation(n).tolist()
    return ([values[i] for i in order],)


def number_words(n: int, rng: random.Random) -> Arguments:
    return ([str(value) for value in bulk(rng).integers(0, 1 << 40, n).tolist()],)


def repeated_words(n: int, rng: random.Random) -> Arguments:
    return ([f"quay{value}" for value in bulk(rng).integers(0, 500, n).tolist()],)


def letters(n: int, rng: random.Random) -> Arguments:
    codes = bulk(rng).integers(97, 123, n).astype(np.uint8)
    return (codes.tobytes().decode("ascii"),)


def prose(n: int, rng: random.Random) -> Arguments:
    """About n characters: lower-case words of 1 to 9 letters, with spaces between."""
    draw = bulk(rng)
    codes = draw.integers(97, 123, n).astype(np.uint8)
    gaps = np.cumsum(draw.integers(2, 11, n // 2 + 1))
    codes[gaps[gaps < n]] = 32
    return (codes.tobytes().decode("ascii"),)


def random_bytes(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).bytes(n),)


def bytes_below_255(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).integers(0, 255, n, dtype=np.uint8).tobytes(),)


def bytes_and_floats(n: int, rng: random.Random) -> Arguments:
    return bytes_below_255(n, rng) + floats(n, rng)


def array(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).random(n),)


def two_arrays(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    return draw.random(n), draw.random(n)


def square_array(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).random((n, n)),)


def two_square_arrays(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    return draw.random((n, n)), draw.random((n, n))


def square_lists(n: int, rng: random.Random) -> Arguments:
    return (bulk(rng).random((n, n)).tolist(),)


def two_square_lists(n: int, rng: random.Random) -> Arguments:
    draw = bulk(rng)
    return draw.random((n, n)).tolist(), draw.random((n, n)).tolist()


def points(n: int, rng: random.Random) -> Arguments:
    return ([tuple(pair) for pair in bulk(rng).random((n, 2)).tolist()],)


def the_size(n: int, rng: random.Random) -> Arguments:
    del rng
    return (n,)


def with_queries(
    build: Callable[[int, random.Random], Arguments], count: int
) -> Callable[[int, random.Random], Arguments]:
    """`build`'s arguments and a list of `count` floats in [0, 1)."""

    def build_both(n: int, rng: random.Random) -> Arguments:
        return (*build(n, rng), bulk(rng).random(count).tolist())

    return build_both


def sparse_graph(degree: int) -> Callable[[int, random.Random], Arguments]:
    """Adjacency lists of n vertices with `degree`·n/2 weighted random edges; a vertex may be isolated."""

    def build(n: int, rng: random.Random) -> Arguments:
        draw = bulk(rng)
        count = degree * n // 2
        neighbours: list[list[tuple[int, float]]] = [[] for _ in range(n)]
        ends = draw.integers(0, n, (count, 2)).tolist()
        for (one, other), weight in zip(ends, draw.random(count).tolist(), strict=True):
            neighbours[one].append((other, weight))
            neighbours[other].append((one, weight))
        return (neighbours,)

    return build


def labels(n: int, rng: random.Random) -> list[str]:
    """n labels of eight letters."""
    codes = bulk(rng).integers(0, 26, (n, 8)).tolist()
    alphabet = string.ascii_lowercase
    return ["".join([alphabet[code] for code in row]) for row in codes]
