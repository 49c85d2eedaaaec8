"""The ratchet, where a test's outcome is decided: in the process that runs it."""

from __future__ import annotations

from collections.abc import Callable
from typing import Any

import pytest

from pytest_growthbudget.reporting.accepted import Accepted, load_accepted
from pytest_growthbudget.settings import Ratchet

accepted_key = pytest.StashKey[Accepted]()


def accepted_of(config: pytest.Config, ratchet: Ratchet) -> Accepted:
    """The accepted records, read once a process. A relative path starts at the root of the project."""
    if accepted_key not in config.stash:
        config.stash[accepted_key] = load_accepted(config.rootpath / ratchet.accepted)
    return config.stash[accepted_key]


def held(
    item: pytest.Item, ratchet: Ratchet, judgement: dict[str, Any], again: Callable[[], dict[str, Any]]
) -> dict[str, Any]:
    """The judgement in wire form with what the ratchet says of it, under `drift`.

    A rise counts only if a second measurement, which `again` makes, shows it too. A test that fails by its budget
    anyway is not measured again.
    """
    record = accepted_of(item.config, ratchet).by_budget.get((item.nodeid, judgement["meter"]))
    if record is None:
        return judgement
    from pytest_growthbudget.reporting import drift
    from pytest_growthbudget.reporting.environment import environment

    facts = drift.against(record, judgement, environment(), ratchet.margin)
    if facts["risen"] and judgement["verdict"] != "exceeded":
        second = drift.against(record, again(), environment(), ratchet.margin)
        if second["risen"]:
            facts.update(why="a second measurement agrees")
        else:
            facts.update(risen=False, why="a second measurement did not agree")
    return {**judgement, "drift": facts}
