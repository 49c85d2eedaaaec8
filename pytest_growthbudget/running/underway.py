"""What a run is at: the test whose budget is being read, what was read of it, and the time that measuring took.

A terminal shows it in one line that is rewritten in place, and an interrupted run at its end. The time is held
against the session's limit.
"""

from __future__ import annotations

from collections.abc import Callable, Iterator
from contextlib import contextmanager
from typing import TYPE_CHECKING, Any

import pytest

from pytest_growthbudget.meters import clocks
from pytest_growthbudget.reporting import units
from pytest_growthbudget.reporting.interrupted import Unfinished, describe
from pytest_growthbudget.running.progress import Display

if TYPE_CHECKING:
    from pytest_growthbudget.plans import Plan
    from pytest_growthbudget.workloads.rays import Ray
    from pytest_growthbudget.workloads.repeat import GrowthItem

underway_key = pytest.StashKey["Underway"]()


class Underway:
    """One a session; also a plugin, which hears how the session ends."""

    def __init__(self, config: pytest.Config) -> None:
        self._spent = 0.0
        self._began: int | None = None
        self.current: Unfinished | None = None
        self._config = config
        self._display = Display(config)
        self._item: GrowthItem | None = None
        self._cut_off: Unfinished | None = None

    @contextmanager
    def holding(self, item: GrowthItem) -> Iterator[None]:
        """Hold `item` to its budgets within."""
        self._began = clocks.wall_time_ns()
        self._item = item
        try:
            yield
        except (KeyboardInterrupt, pytest.exit.Exception):
            self._cut_off = self.current
            raise
        else:
            self._item = None
        finally:
            self.current = None
            self._spent = self.spent_by_now()
            self._began = None
            self._display.clear()

    def spent_by_now(self) -> float:
        """Seconds that measuring took so far in this process."""
        return self._spent + (0.0 if self._began is None else (clocks.wall_time_ns() - self._began) / 1e9)

    def begin(self, item: GrowthItem, plan: Plan, ray: Ray, unit: str, limit: float) -> None:
        """Readings of this budget come next, for `limit` seconds at most."""
        self.current = Unfinished(
            test=item.nodeid,
            promise=plan.budget.theta if plan.budget is not None else "its yardstick",
            meter=plan.meter,
            unit=unit,
            variable=ray.variable,
            limit=limit,
            began=clocks.wall_time_ns(),
            ray=ray.name,
        )

    def before(self, size: int) -> None:
        """A reading at `size` comes next."""
        now = self.current
        if now is not None:
            elapsed = (clocks.wall_time_ns() - now.began) / 1e9
            self._display.show(
                elapsed,
                f"growth budget: reading {now.meter} at {now.variable} = {units.count(size)}, "
                f"{elapsed:.0f} s of at most about {now.limit:.3g} s",
            )

    def heard(self, size: int, cost: float) -> None:
        """A reading at `size` cost so much a call, in the meter's unit."""
        if self.current is not None:
            self.current.costs.setdefault(size, []).append(cost)

    # ------------------------------------------------------------ hooks

    def pytest_enter_pdb(self) -> None:
        self._display.clear()

    def pytest_keyboard_interrupt(self) -> None:
        # The interrupted test has no report that could carry what was judged of it.
        ledger = self._config.pluginmanager.get_plugin("growthbudget-ledger")
        if self._item is not None and ledger is not None:
            ledger.judged.extend({"test": self._item.nodeid, **judged} for judged in self._item.judgements)

    @pytest.hookimpl(trylast=True)
    def pytest_terminal_summary(self, terminalreporter: Any, exitstatus: int) -> None:
        if self._cut_off is not None and exitstatus == pytest.ExitCode.INTERRUPTED:
            for line in describe(self._cut_off):
                terminalreporter.write_line(line)


def underway(config: pytest.Config) -> Underway:
    return config.stash[underway_key]


def watched(take: Callable[[int, int], Any], state: Underway) -> Callable[[int, int], Any]:
    """`take`, with each reading made known to `state`."""

    def take_and_tell(size: int, calls: int) -> Any:
        state.before(size)
        reading = take(size, calls)
        state.heard(size, reading.cost)
        return reading

    return take_and_tell
