"""Inner runs of pytest in which something goes wrong."""

from __future__ import annotations

import signal

import pytest

CONFTEST = """
    import pytest

    @pytest.fixture
    def numbers(problem_size):
        return list(range(problem_size))
"""
needs_timer = pytest.mark.skipif(not hasattr(signal, "setitimer"), reason="this platform has no interval timer")


def run(suite: pytest.Pytester, source: str, *args: str, **outcomes: int) -> str:
    """Run `source`, followed by a test that must still pass; return what was printed, its lines joined."""
    suite.makepyfile(test_it="import os, sys, threading, time\nimport pytest\n" + source + "\ndef test_last(): ...\n")
    result = suite.runpytest("-v", "-p", "no:randomly", *args)
    outcomes["passed"] = outcomes.get("passed", 0) + 1
    result.assert_outcomes(**outcomes)
    text = " ".join(result.stdout.str().split())
    assert "INTERNALERROR" not in text + result.stderr.str()
    return text
