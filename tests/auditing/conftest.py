"""Audits need the interpreter's hooks: on versions before 3.12 a session under coverage has them taken."""

from __future__ import annotations

import sys
from collections.abc import Iterator

import pytest


@pytest.fixture(autouse=True)
def no_tracer() -> Iterator[None]:
    """Run the tests of this folder as in a session without a tracer, also when the session has one."""
    if sys.version_info >= (3, 12):
        yield
        return
    held = sys.gettrace()
    sys.settrace(None)
    yield
    sys.settrace(held)
