"""Textbook recursions, and twins with a planted fault: what is found against what is known."""

from __future__ import annotations

import random

import pytest

from pytest_growthbudget.auditing.audit import Audit, audit
from tests.auditing.examples import FAULTY, LARGE, SOUND, Example

EXAMPLES = [
    pytest.param(example, id=example.name, marks=[pytest.mark.slow] if example.name in LARGE else [])
    for example in (*SOUND, *FAULTY)
]


def audited(example: Example) -> Audit:
    arguments = example.build(random.Random(3))
    return audit(example.call, *arguments, of=example.of, size_of=example.size_of, bound=example.declared)


@pytest.mark.parametrize("example", EXAMPLES)
def test_the_faults_and_only_they_are_named(example: Example) -> None:
    found = audited(example)
    assert tuple(dict.fromkeys(check.about for check in found.broken)) == example.broken
    assert found.observed is not None
    if example.implies:
        assert found.observed.theta == example.implies
    assert found.calls < 150_000
    assert found.notes == ()
