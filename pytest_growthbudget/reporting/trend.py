"""Trend: how each budget's exponent and its cost at a common size moved over the runs that records files hold.

Each run is compared with the one where the last change was marked, the first at the start: so neither a step nor a
drift too slow to show from one run to the next is lost, and one change is marked once. A change is marked where the
intervals are disjoint. Costs are compared only on the same kind of processor with the same Python, and where costs
come from a clock.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

from pytest_growthbudget.fitting.drift import cost_at
from pytest_growthbudget.fitting.excess import FEWEST_SIZES
from pytest_growthbudget.reporting.drift import fit, same_machine, shared_rows
from pytest_growthbudget.reporting.records import Record, budget_key, in_time, is_counted

Interval = dict[str, float]
#: Where a run's sizes reach no further than this beyond the common ones, its recorded exponent is good enough.
NEARLY = 2.0


@dataclass(frozen=True, slots=True, kw_only=True)
class Step:
    """One run of a budget. `change` and `cost_change`: "rose", "fell" or "" against the run last marked."""

    run: str
    time: str
    verdict: str
    bound: str
    growth: Interval | None
    cost: Interval | None
    change: str = ""
    cost_change: str = ""
    elsewhere: bool = False


@dataclass(frozen=True, slots=True, kw_only=True)
class Trend:
    """One budget over its runs, by time. `of`: what `growth` is, "exponent" or "excess" (exponential budgets).

    `over`: the sizes common to all runs, None where they share too few; the exponents are then those of each run's
    own sizes, and no change of them is marked. `at`: the size whose cost is told. `elsewhere`, in a step: measured
    on another kind of processor or with another Python than the run before.
    """

    test: str
    meter: str
    unit: str
    variable: str
    of: str
    over: tuple[float, float] | None
    at: float | None
    steps: tuple[Step, ...]

    @property
    def changed(self) -> bool:
        return any(step.change or step.cost_change for step in self.steps)


def trends(records: Sequence[Record]) -> list[Trend]:
    """The trend of each budget, in the order in which the records name them first. A run counts once a budget."""
    by_budget: dict[tuple[str, str], dict[str, Record]] = {}
    for record in records:
        by_budget.setdefault(budget_key(record), {})[record["run"]["id"]] = record
    return [trend(in_time(list(runs.values()))) for runs in by_budget.values()]


def trend(records: Sequence[Record]) -> Trend:
    """The trend of one budget; `records` are its runs by time, at least one."""
    last = records[-1]["judgement"]
    measured = [record for record in records if record["judgement"]["excess"] is not None]
    of = "excess" if measured and all(r["judgement"]["exponent"] is None for r in measured) else "exponent"
    tables = [record["judgement"]["sizes"] for record in measured]
    shared = shared_rows(tables)
    common = bool(measured) and all(len(rows) >= FEWEST_SIZES for rows in shared)
    over = _common_range(shared) if common else None
    rows = {id(record): each for record, each in zip(measured, shared, strict=True)} if common else {}
    at = _round_down(over[1]) if over else None
    steps = [_step(record, rows.get(id(record)), over, at, of) for record in records]
    return Trend(
        test=records[0]["test"],
        meter=last["meter"],
        unit=last["unit"],
        variable=last["variable"],
        of=of,
        over=over,
        at=at,
        steps=tuple(_marked(steps, records, compare=over is not None or of == "excess")),
    )


def _common_range(shared: Sequence[Sequence[Mapping[str, Any]]]) -> tuple[float, float]:
    return max(rows[0]["size"] for rows in shared), min(rows[-1]["size"] for rows in shared)


def _round_down(size: float) -> float:
    """Two significant digits."""
    unit = 10 ** max(len(str(int(size))) - 2, 0)
    return float(int(size) // unit * unit)


def _step(
    record: Record,
    rows: Sequence[Mapping[str, Any]] | None,
    over: tuple[float, float] | None,
    at: float | None,
    of: str,
) -> Step:
    judgement = record["judgement"]
    growth: Interval | None = judgement[of]
    cost: Interval | None = None
    if rows and over and at:
        if of == "exponent" and not _nearly(judgement["sizes"], over):
            growth = fit(judgement, [dict(row) for row in rows])
        sizes = judgement["sizes"]
        found = cost_at(
            [row["size"] for row in sizes],
            [row["cost"] for row in sizes],
            at,
            confidence=judgement["confidence"],
            counted=is_counted(judgement["meter"]),
        )
        if found is not None:
            cost = {"estimate": found.estimate, "low": found.low, "high": found.high}
    return Step(
        run=record["run"]["id"],
        time=record["run"]["time"],
        verdict=judgement["verdict"],
        bound=judgement["bound"],
        growth=growth,
        cost=cost,
    )


def _nearly(rows: Sequence[Mapping[str, Any]], over: tuple[float, float]) -> bool:
    return bool(over[0] <= rows[0]["size"] * NEARLY and rows[-1]["size"] <= over[1] * NEARLY)


def _marked(steps: Sequence[Step], records: Sequence[Record], *, compare: bool) -> Iterable[Step]:
    reference: Step | None = None
    paid: tuple[Step, Record] | None = None
    before: Record | None = None
    for step, record in zip(steps, records, strict=True):
        change = cost_change = ""
        if step.growth is not None:
            if reference is not None and compare:
                change = moved(reference.growth, step.growth)
            if reference is None or change:
                reference = step
        if step.cost is not None:
            comparable = paid is not None and _comparable(paid[1], record)
            if paid is not None and comparable:
                cost_change = moved(paid[0].cost, step.cost)
            if not comparable or cost_change:
                paid = (step, record)
        yield replace(
            step,
            change=change,
            cost_change=cost_change,
            elsewhere=before is not None and not _alike(before, record),
        )
        before = record


def _comparable(one: Record, other: Record) -> bool:
    return is_counted(one["judgement"]["meter"]) or _alike(one, other)


def _alike(one: Record, other: Record) -> bool:
    """Whether two runs used the same kind of processor and the same minor version of the same Python."""
    here, there = one["environment"], other["environment"]
    return (
        same_machine(here, there)
        and here["implementation"] == there["implementation"]
        and here["python"].split(".")[:2] == there["python"].split(".")[:2]
    )


def moved(before: Mapping[str, float] | None, now: Mapping[str, float] | None) -> str:
    """ "rose" or "fell" where two intervals are disjoint, else ""."""
    if before is None or now is None:
        return ""
    if now["low"] > before["high"]:
        return "rose"
    return "fell" if now["high"] < before["low"] else ""
