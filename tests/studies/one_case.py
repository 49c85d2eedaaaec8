"""One case of the study: a body of the corpus held to one budget, measured and judged as the plugin would."""

from __future__ import annotations

import random
from collections.abc import Callable, Generator, Iterable, Mapping, Sequence
from dataclasses import asdict, dataclass, field
from functools import cache
from typing import Any, Literal

import numpy as np

from pytest_growthbudget.bounds.budget import parse_budget
from pytest_growthbudget.fitting.evidence import lower_quartile
from pytest_growthbudget.fitting.excess import FEWEST_SIZES, fit_excess, observe
from pytest_growthbudget.fitting.judgement import Finding
from pytest_growthbudget.fitting.rule import decide
from pytest_growthbudget.measuring import kernels
from pytest_growthbudget.measuring.campaign import Campaign, Limits
from pytest_growthbudget.measuring.guards import Watch
from pytest_growthbudget.measuring.readings import (
    Answer,
    Ladder,
    MemoryCurve,
    Promise,
    Reading,
    Request,
    Rounds,
    Series,
)
from pytest_growthbudget.meters import clocks
from pytest_growthbudget.meters.protocol import Meter
from pytest_growthbudget.meters.steps import Steps
from pytest_growthbudget.settings import DEFAULT_SLACK
from pytest_growthbudget.workloads.repeat import collector_off
from tests.studies.corpus import CORPUS, Entry
from tests.studies.surroundings import busy_with

Relation = Literal["true", "loose", "tight"]
MeterName = Literal["cpu_time", "steps"]
BY_NAME = {entry.name: entry for entry in CORPUS}
#: What the hand recipe tolerates above the budget's own exponent: common practice.
RECIPE_THRESHOLD = 0.25
#: The index of the set of readings that is taken after the verdict, to see whether the interval repeats.
AGAIN = 7


@dataclass(frozen=True, slots=True, kw_only=True)
class Case:
    """A body of the corpus, by name, and a budget that it keeps (`true`, `loose`) or breaks (`tight`)."""

    name: str
    relation: Relation
    bound: str
    repeat: int
    seed: int
    meter: MeterName = "cpu_time"

    @property
    def key(self) -> str:
        return f"{self.name} | {self.relation} | {self.bound} | {self.seed} | {self.repeat} | {self.meter}"


def cases_of(entries: Iterable[Entry], repeats: int, seed: int, meter: MeterName = "cpu_time") -> list[Case]:
    """Every pair of body and budget, `repeats` times over; each turn in an order of its own."""
    cases = []
    for repeat in range(repeats):
        turn = [
            Case(name=entry.name, relation=relation, bound=bound, repeat=repeat, seed=seed, meter=meter)
            for entry in entries
            for relation, bound in budgets_of(entry, meter)
        ]
        random.Random(f"{seed} {repeat}").shuffle(turn)
        cases += turn
    return cases


def budgets_of(entry: Entry, meter: MeterName) -> list[tuple[Relation, str]]:
    """What a body is held to; by steps only those whose lines tell, and one log factor too tight."""
    if meter == "cpu_time":
        return [("true", entry.growth), ("loose", entry.loose), *(("tight", bound) for bound in entry.too_tight)]
    return [("true", entry.growth), ("loose", entry.loose), ("tight", entry.log_tighter)] if entry.log_tighter else []


@dataclass(frozen=True, slots=True, kw_only=True)
class Outcome:
    """What became of a case. Times in seconds, without the memory curve, which is measured once a session.

    `rows`: [size, lower quartile in ns, readings, bytes touched] as the rule saw them last. `recipe`: the hand
    recipe's excess. `interval`: δ on the last stage's first set; `again`: δ on a further set at the same sizes.
    `heard`: all readings in the order taken, kept only where the verdict is not the right one.
    """

    name: str
    relation: Relation
    bound: str
    repeat: int
    seed: int
    half: str
    dominates: bool
    verdict: str
    reason: str
    stage: str
    wall: float
    cpu: float
    busy: float
    load: bool
    curve: bool
    ended: str
    meter: MeterName = "cpu_time"
    excess: list[float] | None = None
    resolution: float | None = None
    recipe: float | None = None
    interval: list[float] | None = None
    again: float | None = None
    rows: list[list[float]] = field(default_factory=list)
    heard: list[Any] = field(default_factory=list)

    @property
    def right(self) -> bool:
        return self.verdict == ("exceeded" if self.relation == "tight" else "within")


@cache
def memory_curve() -> MemoryCurve | None:
    """The memory curve of this machine, measured once a process."""
    return kernels.measure_curve()


def growth_of(bound: str) -> tuple[Callable[[float], float], bool]:
    """The log of the growth that a one-variable bound allows, and whether it is beyond every power."""
    budget = parse_budget(bound)
    return budget.along({"n": 1.0}, {}), budget.exponential


class Bench:
    """Takes readings of one body, each on a fresh input, as a test with a function-scoped workload would."""

    def __init__(self, entry: Entry, meter: Meter, seed: str, watch: Watch) -> None:
        self._entry = entry
        self._meter = meter
        self._seed = seed
        self._watch = watch
        self._count = 0

    def _build(self, size: int) -> tuple[Any, ...]:
        self._count += 1
        return self._entry.build(size, random.Random(f"{self._seed} {size} {self._count}"))

    def take(self, size: int, calls: int) -> Reading:
        began = clocks.wall_time_ns()
        body, meter = self._entry.body, self._meter
        with collector_off():
            arguments = self._build(size)
            self._watch.guard()
            try:
                wall = clocks.wall_time_ns()
                if calls == 1:
                    meter.start()
                    body(*arguments)
                    cost = meter.stop()
                else:
                    rest = range(calls)
                    meter.start()
                    for _ in rest:
                        body(*arguments)
                    cost = meter.stop()
                wall = clocks.wall_time_ns() - wall
            finally:
                self._watch.release()
            del arguments
        elapsed = clocks.wall_time_ns() - began
        return Reading(size=size, cost=cost / calls, calls=calls, wall=wall / calls, elapsed=elapsed)

    def footprint(self, size: int) -> float:
        """Bytes at peak of building the input and one call."""
        import tracemalloc

        tracemalloc.start()
        try:
            arguments = self._build(size)
            self._entry.body(*arguments)
            return float(max(tracemalloc.get_traced_memory()[1], 1))
        finally:
            tracemalloc.stop()


@dataclass(slots=True)
class Ear:
    """Listens to the talk of rule and campaign, and after the verdict asks for one more set of the last stage."""

    once_more: bool
    heard: list[tuple[Request, Answer]] = field(default_factory=list)
    wall: int = 0
    cpu: int = 0
    again: Series | None = None

    def listen(self, rule: Generator[Request, Answer, Finding]) -> Generator[Request, Answer, Finding]:
        began, spent = clocks.wall_time_ns(), clocks.cpu_time_ns()
        try:
            request = next(rule)
            while True:
                answer = yield request
                self.heard.append((request, answer))
                request = rule.send(answer)
        except StopIteration as stop:
            finding: Finding = stop.value
        self.wall, self.cpu = clocks.wall_time_ns() - began, clocks.cpu_time_ns() - spent
        last = self.last_rounds()
        if self.once_more and last is not None:
            answer = yield Rounds(last[0].first, last[0].last, AGAIN, last[0].calls)
            assert isinstance(answer, Series)
            self.again = answer
        return finding

    def last_rounds(self) -> tuple[Rounds, Series] | None:
        """The last request for a first set whose readings the plan chose, with its answer."""
        for request, answer in reversed(self.heard):
            if isinstance(request, Rounds) and not request.repeat and not request.calls and isinstance(answer, Series):
                return request, answer
        return None

    def first_set(self) -> dict[int, tuple[float, ...]]:
        """All readings of first sets by size."""
        costs: dict[int, tuple[float, ...]] = {}
        for request, answer in self.heard:
            if isinstance(request, Rounds) and not request.repeat and isinstance(answer, Series):
                costs.update(zip(answer.sizes, answer.costs, strict=True))
        return dict(sorted(costs.items()))

    def ladder(self) -> Ladder | None:
        return next((answer for _, answer in reversed(self.heard) if isinstance(answer, Ladder)), None)


def judge_case(case: Case, *, load: bool = False, time_limit: float = 10.0) -> Outcome:
    """Measures and judges one case in this process."""
    entry = BY_NAME[case.name]
    log_growth, exponential = growth_of(case.bound)
    asked: list[bool] = []

    def curve() -> MemoryCurve | None:
        asked.append(True)
        return memory_curve()

    watch = Watch(time_limit)
    meter = clocks.CpuTime() if case.meter == "cpu_time" else Steps()
    bench = Bench(entry, meter, case.key, watch)
    campaign = Campaign(
        take=bench.take,
        footprint=bench.footprint,
        now=clocks.wall_time_ns,
        limits=Limits(
            time=time_limit * 1e9,
            smallest=entry.smallest if entry.smallest > 8 else None,
            largest=entry.largest,
            exponential=exponential,
            repeatable=entry.reusable and "n" not in entry.too_tight and entry.loose in ("log n", "sqrt(n)", "n"),
            clock=not meter.deterministic,
        ),
        seed=case.key,
    )
    ear = Ear(once_more=case.relation == "true")
    promise = Promise(
        log_growth=log_growth,
        exponential=exponential,
        slack=DEFAULT_SLACK[case.meter],
        deterministic=meter.deterministic,
        curve=curve,
    )
    busy = busy_with()
    try:
        with watch.start():
            finding = campaign.run(ear.listen(decide(promise)))
    except Exception as error:
        finding = Finding(verdict="unmeasured", reason=f"failed: {error!r}")
    ladder = ear.ladder()
    outcome = Outcome(
        **asdict(case),
        half=entry.half,
        dominates=entry.dominates,
        verdict=finding.verdict,
        reason=finding.reason,
        stage=finding.stage,
        wall=ear.wall / 1e9,
        cpu=ear.cpu / 1e9,
        busy=busy,
        load=load,
        curve=bool(asked),
        ended=ladder.ended if ladder else "",
        excess=[finding.excess.low, finding.excess.estimate, finding.excess.high] if finding.excess else None,
        resolution=finding.resolution,
        recipe=hand_recipe(ear.first_set(), log_growth, exponential=exponential),
        rows=rows_of(ear, ladder),
        **repeated_interval(ear, log_growth, exponential=exponential),
    )
    if not outcome.right:
        outcome.heard.extend([type(q).__name__, asdict(q), asdict(a) if a else None] for q, a in ear.heard)
    return outcome


def rows_of(ear: Ear, ladder: Ladder | None) -> list[list[float]]:
    touched = dict(zip(ladder.sizes, ladder.footprints, strict=True)) if ladder else {}
    return [
        [size, lower_quartile(costs), len(costs), touched.get(size, 0.0)] for size, costs in ear.first_set().items()
    ]


def hand_recipe(
    costs: Mapping[int, Sequence[float]],
    log_growth: Callable[[float], float],
    *,
    exponential: bool,
) -> float | None:
    """The excess by hand: a straight line through log median against log n, less the budget's own exponent over
    the same sizes (against log g where the budget is exponential). Common practice.
    """
    read = {size: float(np.median(cost)) for size, cost in costs.items() if np.median(cost) > 0}
    if len(read) < 3:
        return None
    allowed = np.array([log_growth(float(size)) for size in read])
    line = allowed if exponential else np.log(np.array(list(read), dtype=float))
    slope = float(np.polyfit(line, np.log(list(read.values())), 1)[0])
    return slope - (1.0 if exponential else float((allowed[-1] - allowed[0]) / (line[-1] - line[0])))


def repeated_interval(ear: Ear, log_growth: Callable[[float], float], *, exponential: bool) -> dict[str, Any]:
    """δ with its interval on the last stage's first set, and δ on the set read after the verdict."""
    last, again = ear.last_rounds(), ear.again
    if last is None or again is None or last[1].sizes != again.sizes or len(again.sizes) < FEWEST_SIZES:
        return {}

    def delta(series: Series) -> tuple[float, ...]:
        costs = [max(lower_quartile(read), 1.0) for read in series.costs]
        seen = observe(series.sizes, costs, log_growth, exponential=exponential)
        return fit_excess(seen).delta.quantiles((0.025, 0.5, 0.975))

    return {"interval": list(delta(last[1])), "again": delta(again)[1]}
