"""pytest's hooks for a run that has budgets: registered when the first budgeted test is collected."""

from __future__ import annotations

from collections.abc import Generator
from typing import Any

import pytest

from pytest_growthbudget.reporting.failure import sections
from pytest_growthbudget.reporting.properties import properties_of
from pytest_growthbudget.running.underway import Underway, underway_key
from pytest_growthbudget.workloads.fixtures import shared_key
from pytest_growthbudget.workloads.repeat import GrowthItem


def register(config: pytest.Config) -> None:
    """Register the hooks, if that was not done."""
    if underway_key not in config.stash:
        config.stash[underway_key] = Underway(config)
        config.pluginmanager.register(config.stash[underway_key], "growthbudget-underway")
        config.pluginmanager.register(Hooks(), "growthbudget-hooks")


class Hooks:
    # Innermost, as if pytest had made the report so: the wrappers of a conftest.py see what a budget adds to it.
    @pytest.hookimpl(wrapper=True, trylast=True)
    def pytest_runtest_makereport(self, item: pytest.Item) -> Generator[None, Any, Any]:
        report = yield
        if report.when == "call" and isinstance(item, GrowthItem):
            report.growth_judgements = [{"test": item.nodeid, **judgement} for judgement in item.judgements]
            report.sections.extend(sections(item.judgements, item.failed_at))
            # What the body recorded itself, it recorded once a reading.
            properties = [*dict(item.template.user_properties).items(), *properties_of(item.judgements)]
            item.user_properties.extend(properties)
            report.user_properties.extend(properties)
        return report

    def pytest_enter_pdb(self, config: pytest.Config) -> None:
        # Whoever debugs a body takes the time that it takes.
        watch = config.stash[shared_key].watch
        if watch is not None:
            watch.stand_back()
