"""What other plugins, and conftest.py files, may implement."""

from __future__ import annotations

from collections.abc import Iterable
from typing import TYPE_CHECKING

import pytest

if TYPE_CHECKING:
    from pytest_growthbudget.fitting.judgement import Judgement
    from pytest_growthbudget.meters.protocol import Meter


@pytest.hookspec
def pytest_growthbudget_meters(config: pytest.Config) -> Iterable[Meter]:  # type: ignore[empty-body]
    """Return further meters; a marker names one by `meter="its name"`. Called once, when the first budget is collected.

    The protocol of a meter is described in `pytest_growthbudget.meters.protocol`.
    """


@pytest.hookspec
def pytest_growthbudget_judged(item: pytest.Item, judgement: Judgement) -> None:
    """Hear of a budget that was judged, in the process that judged it, before the test's own outcome is known."""
