"""A judgement as plain builtins, the only form that leaves a worker, and back.

A numpy scalar or a dataclass on a report is lost between xdist's processes and turns a failing run green, so the
values are made exact builtins here, and nowhere else.
"""

from __future__ import annotations

import math
from dataclasses import fields
from typing import Any

from pytest_growthbudget.fitting.judgement import ForecastRow, GrownLine, Interval, Judgement, SizeRow


def plain(value: Any) -> Any:
    """`value` with every number, text and container an exact builtin; numbers that are not finite become None."""
    if value is None or isinstance(value, bool):
        return value
    if isinstance(value, str):
        return str(value)
    if isinstance(value, int):
        return int(value)
    if isinstance(value, float):
        return float(value) if math.isfinite(value) else None
    if isinstance(value, dict):
        return {str(key): plain(item) for key, item in value.items()}
    if isinstance(value, (list, tuple)):
        return [plain(item) for item in value]
    if hasattr(value, "__dataclass_fields__"):
        return {item.name: plain(getattr(value, item.name)) for item in fields(value)}
    if hasattr(value, "item"):  # a numpy scalar
        return plain(value.item())
    raise TypeError(f"{type(value).__name__} cannot leave the process")


def to_wire(judgement: Judgement, **extra: object) -> dict[str, Any]:
    """`judgement` and the `extra` entries as a dict of exact builtins."""
    wire = plain(judgement)
    wire.update(plain(extra))
    result: dict[str, Any] = wire
    return result


def from_wire(wire: dict[str, Any]) -> Judgement:
    """The judgement that `to_wire` was given; entries that a Judgement does not have are left out.

    Raises KeyError where a required entry is missing.
    """
    known = {item.name for item in fields(Judgement)}
    values = {name: value for name, value in wire.items() if name in known}
    for name in ("excess", "exponent"):
        values[name] = _interval(values.get(name))
    values["sizes"] = tuple(SizeRow(**row) for row in values.get("sizes", ()))
    values["forecast"] = tuple(_forecast_row(row) for row in values.get("forecast", ()))
    values["ceiling"] = None if values.get("ceiling") is None else _forecast_row(values["ceiling"])
    for name in ("steps", "notes", "allowed", "yardstick"):
        values[name] = tuple(values.get(name, ()))
    values["rays"] = tuple((ray, verdict) for ray, verdict in values.get("rays", ()))
    values["lines"] = tuple(GrownLine(**{**line, "sizes": tuple(line["sizes"])}) for line in values.get("lines", ()))
    return Judgement(**values)


def _interval(value: dict[str, float] | None) -> Interval | None:
    return None if value is None else Interval(**value)


def _forecast_row(row: dict[str, Any]) -> ForecastRow:
    return ForecastRow(size=row["size"], cost=Interval(**row["cost"]), allowed=row["allowed"])
