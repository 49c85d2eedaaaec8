"""The decision rule for clocks: stages, each asking for more readings than the one before.

A looks at costs up to 5 ms on cache-resident sizes, B at every size up to 32 ms, C at sizes up to 160 ms. A stage
ends the run when its readings decide, and nothing is exceeded until a second, independent set of readings agrees.
The thresholds were chosen on recorded readings; `tests/studies/replay.py` prints the error rates.

Where the parts are:

- memory allowance, footprints and costs within the budget: `allowance.allowance`;
- cheap bodies: `verdict.is_cheap`; few sizes: `verdict.rises_enough`; no curve: `verdict.exceeds_uncurved`;
- the last ten sizes alone: `_Clock.windows`;
- the wider limit on a hidden term: `Limits.within_hidden`; flat budgets: `verdict.is_flat`;
- within on deflated costs: `_Clock.believed_within`; suspicion: the same, and at the end of `_Clock.stage_a`;
- the look ahead: `_Clock.looks_ahead`; stage C: `_Clock.stage_c`; time that ran out: `_Clock.cut_short`;
- exponential budgets, by their own log as regressor: `excess.observe`; the ladder itself: `measuring.campaign`.
"""

from __future__ import annotations

from collections.abc import Callable, Generator
from dataclasses import dataclass
from typing import Final

from pytest_growthbudget.fitting import reasons
from pytest_growthbudget.fitting.counts import decide_counts
from pytest_growthbudget.fitting.evidence import Evidence
from pytest_growthbudget.fitting.excess import CLOCK_NOISE, FEWEST_SIZES
from pytest_growthbudget.fitting.finding import conclude, shown_excess
from pytest_growthbudget.fitting.judgement import Finding, Interval, VerdictName
from pytest_growthbudget.fitting.run import Run
from pytest_growthbudget.fitting.verdict import (
    OVERWHELMING,
    RESIDENT,
    TOP_FOOTPRINT,
    TOP_SIZES,
    Limits,
    Says,
    clock_limits,
    exceeds,
    is_suspicious,
    is_within,
    runs_far_ahead,
)
from pytest_growthbudget.measuring.readings import Answer, Climb, Peek, Promise, Request, Rounds

STAGE_A_COST: Final = 5e6
STAGE_A_SIZES: Final = 9
STAGE_B_COST: Final = 32e6
STAGE_C_COST: Final = 160e6
STAGE_C_FOOTPRINT: Final = 16 * 2.0**20
STAGE_C_CALLS: Final = 3
#: A ladder that time cut off below this cost and within this span of sizes says too little to keep a budget.
LOW_TOP: Final = 200e3
SHORT_SPAN: Final = 30.0
AHEAD_COST: Final = 60e6
AHEAD_FOOTPRINT: Final = 32 * 2.0**20
AHEAD_BEYOND: Final = 1.9
AHEAD_SIZES: Final = 4
PARTIAL_READINGS: Final = 3

Asking = Generator[Request, Answer, Finding | None]
Window = tuple[Callable[[Evidence], Evidence], float]


def decide(promise: Promise) -> Generator[Request, Answer, Finding]:
    """The rule as a generator: yields requests, is sent what they ask for, returns a `Finding`."""
    if promise.deterministic:
        return (yield from decide_counts(promise))
    case = _Clock(Run(promise, CLOCK_NOISE), clock_limits(promise.slack, promise.confidence))
    for stage in (case.stage_a, case.stage_b, case.stage_c):
        found = yield from stage()
        if found is not None:
            return found
    return case.undecided()


@dataclass(slots=True)
class _Clock:
    """The stages over one run. `first` and `last` bound the sizes in use; `doubt` is why they were not believed."""

    run: Run
    limits: Limits
    stage: str = "A"
    first: int = 0
    last: int = 0
    evidence: Evidence | None = None
    ahead: bool = False
    doubt: str = ""

    # ------------------------------------------------------------ the stages

    def stage_a(self) -> Asking:
        """Cache-resident sizes and cheap calls; a look ahead before the budget is said to be kept."""
        run = self.run
        yield from run.climb(Climb(STAGE_A_COST, RESIDENT, STAGE_A_SIZES))
        for dearer in (STAGE_B_COST, STAGE_C_COST, float("inf")):
            if run.readable < STAGE_A_SIZES:
                yield from run.climb(Climb(dearer, 0.0, STAGE_A_SIZES))
        if run.readable < FEWEST_SIZES:
            return self.unmeasured()
        self.first = run.ladder.readable
        resident = min(run.count(cost=STAGE_A_COST), run.count(footprint=RESIDENT))
        self.last = max(resident, min(len(run.ladder.sizes), self.first + STAGE_A_SIZES))
        found = yield from self.examine([Rounds(self.first, self.last)], top=False)
        if found is not None or self.doubt:
            return found
        evidence, limits = self.judged(), self.limits
        if not is_within(evidence.plain, evidence.gamma, limits):
            return None
        if is_suspicious(evidence.plain, evidence.gamma, limits.suspect, limits):
            return None
        ahead = yield from self.looks_ahead()
        if ahead <= limits.look_ahead:
            kept = self.within()
            if ahead <= limits.look_on:
                return kept
            return (yield from self.looks_on()) or kept
        self.ahead = True
        return None

    def looks_on(self) -> Asking:
        """Dearer sizes that the caches hold as well: a steeper term may be coming up behind what was read.

        They may accuse, and say nothing else. Past the caches a tolerated excess is too often that of the memory.
        """
        run, read = self.run, self.last
        yield from run.climb(Climb(STAGE_C_COST, RESIDENT))
        middle = max(read, run.count(cost=STAGE_B_COST, footprint=RESIDENT))
        self.last = max(middle, run.count(cost=STAGE_C_COST, footprint=RESIDENT))
        if self.last == read:
            return None
        self.stage = "B" if self.last == middle else "C"
        rounds = [Rounds(self.first, middle)]
        if self.last > middle:
            rounds.append(Rounds(middle, self.last, calls=STAGE_C_CALLS))
        found = yield from self.examine(rounds, top=True)
        return found if found is not None and found.verdict == "exceeded" else None

    def stage_b(self) -> Asking:
        """Every size up to 32 ms."""
        self.stage, run = "B", self.run
        yield from run.climb(Climb(STAGE_B_COST))
        self.last = max(self.last, run.count(cost=STAGE_B_COST))
        found = yield from self.examine([Rounds(self.first, self.last)], top=True)
        if found is not None or self.doubt:
            return found
        if self.ahead and (yield from self.can_go_on()):
            return None
        return (yield from self.believed_within())

    def stage_c(self) -> Asking:
        """Dearer sizes, a few calls each, judged together with those of stage B."""
        if not (yield from self.can_go_on()):
            return None
        self.stage = "C"
        middle, self.last = self.last, self.reach()
        rounds = [Rounds(self.first, middle), Rounds(middle, self.last, calls=STAGE_C_CALLS)]
        found = yield from self.examine(rounds, top=True)
        if found is not None or self.doubt:
            return found
        return (yield from self.believed_within())

    def can_go_on(self) -> Generator[Request, Answer, bool]:
        """Whether stage C has sizes that stage B had not."""
        yield from self.run.climb(Climb(STAGE_C_COST, STAGE_C_FOOTPRINT))
        return self.reach() > self.last

    def reach(self) -> int:
        return max(self.last, self.run.count(cost=STAGE_C_COST, footprint=STAGE_C_FOOTPRINT))

    # ------------------------------------------------------------ one set of readings

    def examine(self, rounds: list[Rounds], *, top: bool) -> Asking:
        """Reads one set; where it exceeds, reads a second, which must exceed in the same way."""
        run, self.doubt = self.run, ""
        self.evidence = evidence = yield from run.read(*rounds)
        if run.out_of_time or evidence is None or len(evidence) < FEWEST_SIZES:
            return self.cut_short()
        says = [(window, self.says(evidence, window)) for window in self.windows(evidence, top=top)]
        accusing = [window for window, said in says if said is Says.YES]
        if any(said is Says.NOT_WITHOUT_CURVE for _, said in says):
            self.doubt = reasons.NO_CURVE
        if not accusing:
            return None
        again = yield from run.read(*(Rounds(each.first, each.last, 1, each.calls) for each in rounds))
        for window in accusing:
            if again is not None and self.says(again, window) is Says.YES:
                return self.exceeded(window, confirmed=True)
        self.doubt = reasons.UNCONFIRMED
        return self.cut_short() if run.out_of_time else None

    def windows(self, evidence: Evidence, *, top: bool) -> list[Window]:
        """All sizes, and at later stages the last few alone; with the limit on the excess for each.

        The last few are judged alone only while they are not far outside the caches, whose edge tilts them most.
        """
        limits = self.limits
        windows: list[Window] = [(lambda whole: whole, limits.exceeded)]
        if top and len(evidence) > TOP_SIZES and evidence.footprint <= TOP_FOOTPRINT:
            windows.append((lambda whole: whole.last(TOP_SIZES), limits.exceeded_top))
        return windows

    def says(self, evidence: Evidence, window: Window) -> Says:
        cut, limit = window
        return exceeds(cut(evidence), limit, self.limits, self.run.curve)

    def believed_within(self) -> Asking:
        """Within on the plain costs or, past the caches, on the deflated ones, unless the fit is suspicious."""
        evidence, limits = self.judged(), self.limits
        plain, gamma = evidence.plain, evidence.gamma
        # Far outside the caches a lower bound above zero says nothing against a body.
        near = evidence.footprint <= TOP_FOOTPRINT
        if near and is_suspicious(plain, gamma, limits.suspect_later, limits):
            surely = is_suspicious(plain, gamma, limits.suspect_last, limits)
            if surely or (self.stage == "B" and (yield from self.can_go_on())):
                self.doubt = reasons.SUSPICIOUS
                return None
        if is_within(plain, gamma, limits):
            return self.within()
        if evidence.footprint > RESIDENT and evidence.deflated is not None:
            resident = evidence.up_to(RESIDENT)
            clean = len(resident) < FEWEST_SIZES or not self.runs_ahead_in_cache(resident)
            if clean and is_within(evidence.deflated, gamma, limits):
                return self.within(deflated=True)
        return None

    def runs_ahead_in_cache(self, resident: Evidence) -> bool:
        """Whether the cost runs ahead where memory cannot be the reason, so that no allowance excuses it."""
        limits = self.limits
        assert resident.deflated is not None
        return resident.deflated.delta.quantiles((limits.lower,))[0] > limits.resident

    def looks_ahead(self) -> Generator[Request, Answer, float]:
        """The excess, between the last few sizes and one much larger, that memory does not explain; 0 without one."""
        evidence, run = self.judged(), self.run
        peeked = yield from run.peek(Peek(self.last, AHEAD_COST, AHEAD_FOOTPRINT, AHEAD_BEYOND))
        if peeked is None:
            return 0.0
        joined = run.joined(evidence, peeked)
        before = slice(-1 - AHEAD_SIZES, -1)
        rise = float(joined.seen.ahead[-1] - joined.seen.ahead[before].mean())
        distance = float(joined.seen.regressor[-1] - joined.seen.regressor[before].mean())
        if rise > self.limits.look_on * distance and joined.allowed is not None:
            rise -= float(joined.allowed[-1] - joined.allowed[before].mean())
        return rise / distance

    # ------------------------------------------------------------ endings

    def judged(self) -> Evidence:
        assert self.evidence is not None
        return self.evidence

    def within(self, *, deflated: bool = False) -> Finding:
        evidence, limits = self.judged(), self.limits
        sizes, costs = evidence.seen.sizes, evidence.seen.costs
        if self.run.ladder.ended == "runaway":
            return self.conclude("undecided", reasons.runaway(self.run.ladder.sizes[-1]))
        if self.run.ladder.ended == "time" and costs[-1] < LOW_TOP and sizes[-1] < SHORT_SPAN * sizes[0]:
            return self.conclude("undecided", reasons.out_of_time(reasons.low(int(sizes[-1]), float(costs[-1]))))
        return self.conclude("within", reasons.within(evidence, limits, deflated=deflated), memory=deflated)

    def exceeded(self, window: Window, *, confirmed: bool) -> Finding:
        cut, _ = window
        evidence, limits = cut(self.judged()), self.limits
        reason = reasons.exceeded(
            evidence,
            self.left_of(evidence) or shown_excess(evidence.plain, evidence.gamma, limits.confidence),
            limits,
            agreed=reasons.BY_SECOND_SET if confirmed else reasons.BY_CLIMB,
            deflated=self.left_of(evidence) is not None,
        )
        return self.conclude("exceeded", reason, evidence, confirmed=True if confirmed else None, memory=True)

    def left_of(self, evidence: Evidence) -> Interval | None:
        """The excess that is left once memory is allowed for; None where it was not."""
        if not self.run.curve_consulted or evidence.deflated is None:
            return None
        return shown_excess(evidence.deflated, evidence.gamma, self.limits.confidence)

    def cut_short(self) -> Finding:
        """The verdict when time is over: of what there is, only what is beyond doubt counts."""
        run, evidence, limits = self.run, self.evidence, self.limits
        if evidence is None or len(evidence) < FEWEST_SIZES:
            return self.unmeasured()
        climbed = run.climbed(self.first)
        beyond = limits.exceeded + OVERWHELMING
        window: Window = (lambda whole: whole, beyond)
        if (
            runs_far_ahead(evidence)
            and climbed is not None
            and self.says(evidence, window) is Says.YES
            and self.says(climbed, window) is Says.YES
        ):
            return self.exceeded(window, confirmed=False)
        well_read = len(evidence) >= STAGE_A_SIZES and min(evidence.counts) >= PARTIAL_READINGS
        suspicious = is_suspicious(evidence.plain, evidence.gamma, limits.suspect, limits)
        if not self.doubt and well_read and not suspicious and is_within(evidence.plain, evidence.gamma, limits):
            return self.within()
        return self.conclude("undecided", reasons.out_of_time(self.why()))

    def undecided(self) -> Finding:
        confirmed = False if self.doubt == reasons.UNCONFIRMED else None
        return self.conclude("undecided", self.why(), confirmed=confirmed, memory=True)

    def unmeasured(self) -> Finding:
        run, evidence = self.run, self.evidence
        count = len(evidence) if evidence is not None else 0 if run.out_of_time else run.readable
        reason = reasons.TOO_FAST if run.too_fast() else reasons.too_few(run.ended, count, FEWEST_SIZES)
        return self.conclude("unmeasured", reason)

    def why(self) -> str:
        if self.doubt:
            return self.doubt
        evidence, limits = self.judged(), self.limits
        excess = shown_excess(evidence.plain, evidence.gamma, limits.confidence)
        return reasons.wide(evidence, excess, limits, self.left_of(evidence))

    def conclude(
        self,
        verdict: VerdictName,
        reason: str,
        evidence: Evidence | None = None,
        *,
        confirmed: bool | None = None,
        memory: bool = False,
    ) -> Finding:
        return conclude(
            verdict,
            reason,
            self.run.promise,
            self.limits,
            evidence or self.evidence,
            whole=self.evidence,
            stage=self.stage,
            confirmed=confirmed,
            memory=memory and self.run.curve_consulted,
        )
