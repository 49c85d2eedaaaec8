"""What was read of a budget whose measuring was interrupted."""

from __future__ import annotations

from dataclasses import dataclass, field

from pytest_growthbudget.reporting import units


@dataclass(frozen=True, slots=True, kw_only=True)
class Unfinished:
    """One budget that is being read, along one ray. `limit`: seconds it may take; `began`: nanoseconds of elapsed time;
    `costs`: those read so far, by size.
    """

    test: str
    promise: str
    meter: str
    unit: str
    variable: str
    limit: float
    began: int
    ray: str = ""
    costs: dict[int, list[float]] = field(default_factory=dict)


def describe(current: Unfinished) -> list[str]:
    """Lines: which budget it was, and a table of the sizes and costs (lower quartiles) read so far."""
    along = f" ({current.ray})" if current.ray else ""
    head = [current.test, f"    interrupted while {current.meter} was read against {current.promise}{along}"]
    if not current.costs:
        return [*head, "    nothing was read yet"]
    rows = [*head, f"  {current.variable:>12}  {'cost':>10}  {'readings':>8}"]
    for size, costs in sorted(current.costs.items()):
        quartile = sorted(costs)[(len(costs) - 1) // 4]
        rows.append(f"  {units.count(size):>12}  {units.cost(quartile, current.unit):>10}  {len(costs):>8}")
    return rows
