"""What an audit leaves in the records: what the shipped schema describes, and nothing else."""

from __future__ import annotations

import random
from typing import Any

import jsonschema
import pytest

from pytest_growthbudget import audit
from pytest_growthbudget.auditing.wire import not_made, to_wire
from pytest_growthbudget.reporting.schema import schema
from tests.auditing.recursions.others import fibonacci, hanoi
from tests.auditing.recursions.sorting import merge_sort, quicksort_first

WHOLE = schema()
AUDIT: dict[str, Any] = WHOLE["$defs"]["audit"]


def shuffled(n: int) -> list[int]:
    return random.Random(3).sample(range(n), n)


@pytest.mark.parametrize(
    "wire",
    [
        lambda: to_wire(audit(merge_sort, shuffled(500), bound="T(n) = 2 T(n/2) + n")),
        lambda: to_wire(audit(merge_sort, shuffled(500))),
        lambda: to_wire(audit(quicksort_first, list(range(100)), bound="T(n) = 2 T(n/2) + n")),
        lambda: to_wire(audit(fibonacci, 12, bound="T(n) = T(n - 1) + 1")),
        lambda: to_wire(audit(hanoi, 8, list(range(8, 0, -1)), [], [])),
        lambda: to_wire(audit(fibonacci, 1)),
        lambda: not_made("fibonacci", "the hooks are taken"),
    ],
    ids=["kept", "no bound", "broken", "overlapping", "exponential", "no calls", "not made"],
)
def test_an_audit_on_record_is_what_the_schema_describes(wire: Any) -> None:
    made = wire()
    jsonschema.Draft202012Validator({"$ref": "#/$defs/audit", "$defs": WHOLE["$defs"]}).validate(made)
    assert set(made) == set(AUDIT["properties"])
    for check in made["checks"]:
        assert set(check) == set(AUDIT["properties"]["checks"]["items"]["properties"])
