"""What every test of the package shares: inner pytest runs that do not depend on the terminal they are run from."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.special  # noqa: F401 - an inner run must find it loaded: numpy cannot be loaded twice

from tests.suites import NUMBERS

pytest_plugins = ["pytester"]

assert np


@pytest.fixture(autouse=True)
def plain_terminal(monkeypatch: pytest.MonkeyPatch) -> None:
    """A width of 80 columns, no colour, and no CI, whatever the outer terminal is."""
    monkeypatch.setenv("COLUMNS", "80")
    for name in ("CI", "BUILD_NUMBER", "FORCE_COLOR", "PY_COLORS", "NO_COLOR", "PYTEST_ADDOPTS"):
        monkeypatch.delenv(name, raising=False)


@pytest.fixture
def suite(pytester: pytest.Pytester) -> pytest.Pytester:
    """A folder for an inner run; files with another workload have a fixture of this name of their own."""
    pytester.makeconftest(NUMBERS)
    return pytester
