"""Holds code to the growth its design promised.

Importing this package imports neither numpy nor scipy: every public name is loaded on first use (PEP 562).
"""

from __future__ import annotations

import importlib
from typing import TYPE_CHECKING, Any

if TYPE_CHECKING:
    from pytest_growthbudget.auditing.audit import Audit, audit
    from pytest_growthbudget.bounds.budget import Budget, compare, parse_budget
    from pytest_growthbudget.bounds.language import BoundError
    from pytest_growthbudget.fitting.judge import judge
    from pytest_growthbudget.fitting.judgement import Judgement

_HOME = {
    "Audit": "pytest_growthbudget.auditing.audit",
    "BoundError": "pytest_growthbudget.bounds.language",
    "Budget": "pytest_growthbudget.bounds.budget",
    "Judgement": "pytest_growthbudget.fitting.judgement",
    "audit": "pytest_growthbudget.auditing.audit",
    "compare": "pytest_growthbudget.bounds.budget",
    "judge": "pytest_growthbudget.fitting.judge",
    "parse_budget": "pytest_growthbudget.bounds.budget",
}

__all__ = ["Audit", "BoundError", "Budget", "Judgement", "audit", "compare", "judge", "parse_budget"]


def __getattr__(name: str) -> Any:
    if name not in _HOME:
        raise AttributeError(f"module {__name__!r} has no attribute {name!r}")
    return getattr(importlib.import_module(_HOME[name]), name)


def __dir__() -> list[str]:
    return sorted([*globals(), *_HOME])
