"""Numbers as people read them, in plain ASCII."""

from __future__ import annotations

_TIME = (
    ("ns", 1.0),
    ("us", 1e3),
    ("ms", 1e6),
    ("s", 1e9),
    ("min", 60e9),
    ("h", 3600e9),
    ("d", 86400e9),
    ("y", 3.156e16),
)
_BYTES = (("B", 1.0), ("KiB", 2.0**10), ("MiB", 2.0**20), ("GiB", 2.0**30), ("TiB", 2.0**40))


def cost(value: float | None, unit: str) -> str:
    """`value` in `unit` with three figures and a fitting prefix: `12.3 ms`, `1.25 MiB`, `4,096`."""
    if value is None:
        return "beyond counting"
    scale = {"ns": _TIME, "bytes": _BYTES, "B": _BYTES}.get(unit)
    if scale is None:
        return count(value)
    name, size = scale[0]
    for name_, size_ in scale:
        if value >= size_:
            name, size = name_, size_
    return f"{three_figures(value / size)} {name}"


def three_figures(value: float) -> str:
    if value >= 1e6:
        return f"{value:.2g}"
    if value >= 100:
        return f"{value:,.0f}"
    return f"{value:.3g}" if value < 10 else f"{value:.1f}"


def count(value: float) -> str:
    """A count or a size, with a comma at the thousands."""
    if abs(value) >= 1e15:
        return f"{value:.3g}"
    return f"{value:,.0f}" if value == int(value) or value >= 100 else f"{value:.3g}"


def seconds(value: float) -> str:
    return cost(value * 1e9, "ns")
