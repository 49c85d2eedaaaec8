"""What leaves a worker is exact builtins, and comes back as what it was."""

from __future__ import annotations

import json
import math
from dataclasses import fields
from typing import Any

import numpy as np
import pytest

from pytest_growthbudget.fitting.judgement import ForecastRow, Interval, Judgement, SizeRow
from pytest_growthbudget.reporting.schema import schema
from pytest_growthbudget.reporting.wire import from_wire, plain, to_wire


def judgement(**changed: Any) -> Judgement:
    values: dict[str, Any] = {
        "verdict": "exceeded",
        "reason": "because",
        "excess": Interval(estimate=0.9, low=0.8, high=1.0),
        "exponent": Interval(estimate=1.9, low=1.8, high=2.0),
        "resolution": 0.2,
        "nearest": "n^2",
        "sizes": (SizeRow(size=10, cost=100.0, readings=5), SizeRow(size=20, cost=400.0, readings=5)),
        "forecast": (ForecastRow(size=40, cost=Interval(estimate=1600.0, low=1500.0, high=1700.0), allowed=400.0),),
        "bends_at": 20,
        "confirmed": True,
        "stage": "A",
        "bound": "n",
        "theta": "n",
        "steps": ("one", "two"),
        "allowed": (100.0, 200.0),
        "yardstick": (50.0, 100.0),
        "ceiling": ForecastRow(size=99, cost=Interval(estimate=1.0, low=0.5, high=2.0), allowed=3.0),
        "rays": (("V alone, E = 100", "within"),),
    }
    return Judgement(**{**values, **changed})


def exact(value: Any) -> bool:
    if type(value) is dict:
        return all(type(key) is str and exact(item) for key, item in value.items())
    if type(value) is list:
        return all(map(exact, value))
    return value is None or type(value) in (bool, int, float, str)


def test_there_and_back() -> None:
    before = judgement()
    assert from_wire(json.loads(json.dumps(to_wire(before)))) == before


def test_everything_on_the_wire_is_an_exact_builtin() -> None:
    wire = to_wire(
        judgement(
            resolution=np.float64(0.2),
            bends_at=np.int64(20),
            confirmed=np.bool_(True),
            theta=np.str_("n"),
            excess=Interval(estimate=np.float64(0.9), low=np.float32(0.5), high=1.0),
        ),
        undecided="warn",
    )
    assert exact(wire)
    assert wire["undecided"] == "warn"
    assert wire["bends_at"] == 20


def test_numbers_that_are_not_finite_become_none() -> None:
    assert plain([math.inf, -math.inf, math.nan, 1.5]) == [None, None, None, 1.5]


def test_what_cannot_leave_is_refused() -> None:
    with pytest.raises(TypeError, match="object cannot leave the process"):
        plain({"a": object()})


def test_all_that_a_judgement_holds_is_in_the_schema_of_records() -> None:
    known = schema()["properties"]["judgement"]["properties"]
    assert [item.name for item in fields(Judgement) if item.name not in known] == []
