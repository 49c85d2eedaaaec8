"""What every test of the package shares: inner pytest runs that do not depend on the terminal they are run from."""

from __future__ import annotations

import numpy as np
import pytest
import scipy.special  # noqa: F401 - an inner run must find it loaded: numpy cannot be loaded twice

pytest_plugins = ["pytester"]

assert np


@pytest.fixture(autouse=True)
def plain_terminal(monkeypatch: pytest.MonkeyPatch) -> None:
    """A width of 80 columns, no colour, and no CI, whatever the outer terminal is."""
    monkeypatch.setenv("COLUMNS", "80")
    for name in ("CI", "BUILD_NUMBER", "FORCE_COLOR", "PY_COLORS", "NO_COLOR", "PYTEST_ADDOPTS"):
        monkeypatch.delenv(name, raising=False)
