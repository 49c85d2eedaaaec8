"""A suite whose workload is a list of numbers, for runs in which something goes wrong."""

from __future__ import annotations

import pytest

from tests.faults.runs import CONFTEST


@pytest.fixture
def suite(pytester: pytest.Pytester) -> pytest.Pytester:
    pytester.makeconftest(CONFTEST)
    return pytester
