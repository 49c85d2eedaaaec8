"""An audit as plain builtins, the only form that leaves a worker."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from pytest_growthbudget.reporting.wire import plain

if TYPE_CHECKING:
    from pytest_growthbudget.auditing.audit import Audit


def to_wire(audit: Audit) -> dict[str, Any]:
    """`audit` as a dict of exact builtins, with what the report needs and no more."""
    pattern, toll, found = audit.pattern, audit.toll, audit.observed
    wire: dict[str, Any] = plain(
        {
            "function": audit.function,
            "declared": audit.declared,
            "theta": audit.theta,
            "calls": audit.calls,
            "runs": audit.runs,
            "observed": found.text if found is not None else None,
            "implies": found.theta if found is not None else None,
            "theorem": found.theorem if found is not None else "",
            "unsolved": found.fault if found is not None else "",
            "relation": audit.relation,
            "checks": audit.checks,
            "toll": toll,
            "pattern": pattern,
            "notes": audit.notes,
        }
    )
    return wire


def not_made(function: str, reason: str) -> dict[str, Any]:
    """The wire form of an audit that could not be made."""
    return {
        "function": function,
        "declared": "",
        "theta": "",
        "calls": 0,
        "runs": 0,
        "observed": None,
        "implies": None,
        "theorem": "",
        "unsolved": "",
        "relation": "",
        "checks": [],
        "toll": None,
        "pattern": None,
        "notes": [reason],
    }
