"""What a judged budget is known by: frozen records of plain numbers and text, without numpy, pytest or scipy."""

from __future__ import annotations

from dataclasses import dataclass
from typing import Literal

VerdictName = Literal["within", "exceeded", "undecided", "unmeasured"]


def two_places(value: float) -> str:
    """`value` as exponents are printed; what rounds to nothing has no sign."""
    return f"{round(value, 2) + 0.0:.2f}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Interval:
    """An estimate and the ends of its interval, at the confidence that the judgement names."""

    estimate: float
    low: float
    high: float


@dataclass(frozen=True, slots=True, kw_only=True)
class SizeRow:
    """What was read at one size: `cost` is the lower quartile of `readings` readings, in the meter's unit."""

    size: int
    cost: float
    readings: int
    footprint: float = 0.0


@dataclass(frozen=True, slots=True, kw_only=True)
class ForecastRow:
    """The cost expected at a size that was not run, and what the budget would allow there."""

    size: int
    cost: Interval
    allowed: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Finding:
    """What a decision rule returns: the verdict over the sizes measured, and why.

    Attributes:
        verdict: "within", "exceeded", "undecided" or "unmeasured".
        reason: Why, in a sentence.
        excess: δ in cost ~ growth(n) · n^δ: `estimate`, `low` and `high`.
        exponent: The measured cost's own exponent over the same sizes: `estimate`, `low` and `high`.
        resolution: The smallest excess that this run could have told from zero.
        nearest: The simple growth nearest to what was observed.
        sizes: What was read, a row a size: `size`, `cost`, `readings` and `footprint`.
        forecast: The cost at sizes that were not run, a row a size: `size`, `cost` and `allowed`.
        bends_at: The first size from which the cost runs ahead of the budget (exceeded only).
        confirmed: Whether a second, independent set of readings agreed; None where none was needed.
        stage: How far the readings went: "A" (small and cache-resident), "B" or "C".
    """

    verdict: VerdictName
    reason: str
    excess: Interval | None = None
    exponent: Interval | None = None
    resolution: float | None = None
    nearest: str | None = None
    sizes: tuple[SizeRow, ...] = ()
    forecast: tuple[ForecastRow, ...] = ()
    bends_at: int | None = None
    confirmed: bool | None = None
    stage: str = ""


@dataclass(frozen=True, slots=True, kw_only=True)
class GrownLine:
    """A line of the user's own code that outgrows the budget between two sizes.

    `kind`: it "runs" more often, or "takes" longer each time. `before`, `after`: executions, or nanoseconds each, at
    the two `sizes`. `file`: from the project's root. `source`: the line, shortened.
    """

    file: str
    line: int
    source: str
    kind: Literal["runs", "takes"]
    sizes: tuple[int, int]
    before: float
    after: float


@dataclass(frozen=True, slots=True, kw_only=True)
class Judgement(Finding):
    """A finding with the budget it was held to.

    Attributes:
        bound: The promise as written.
        theta: Its growth.
        meter: The meter that was read.
        unit: The meter's unit.
        slack: The slack that the decision used.
        confidence: The confidence of the intervals.
        theorem: The theorem that solved the recurrence, "" for a bound.
        steps: The derivation.
        seconds: Wall time of the whole measurement.
        seed: The seed with which sizes and workloads are the same again.
        notes: What distorted the readings, one sentence each.
        allowed: For each row of `sizes`, what the budget allows there, scaled to where the cost was lowest against it.
        variable: The name of the size that grew.
        ceiling: The forecast that was held to a ceiling, and the ceiling.
        yardstick: For each row of `sizes`, what the reference function cost.
        ray: Which sizes grew, where the bound has several variables: the worst ray is the one reported.
        rays: The verdict on each ray that was judged.
        lines: The lines to look at, the fastest growth first.
    """

    bound: str
    theta: str
    meter: str = "cpu_time"
    unit: str = "ns"
    slack: float = 0.15
    confidence: float = 0.95
    theorem: str = ""
    steps: tuple[str, ...] = ()
    seconds: float = 0.0
    seed: int = 0
    notes: tuple[str, ...] = ()
    allowed: tuple[float, ...] = ()
    variable: str = "n"
    ceiling: ForecastRow | None = None
    yardstick: tuple[float, ...] = ()
    ray: str = ""
    rays: tuple[tuple[str, VerdictName], ...] = ()
    lines: tuple[GrownLine, ...] = ()
