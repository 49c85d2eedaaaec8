"""One reported item a test, and the template item that it repeats.

The reported item (`GrowthItem`) stands in pytest's collection in the place of the marked function: selection,
reports, junit and `--lf` see one ordinary test. It never runs its own fixtures. For each reading the template, a
plain `pytest.Function` that pytest never sees, is set up, called and torn down, so that a function-scoped
workload is built afresh outside the clock and wider fixtures stay up.
"""

from __future__ import annotations

import gc
import warnings
from collections.abc import Callable, Iterator, Mapping
from contextlib import contextmanager, suppress
from dataclasses import dataclass
from typing import TYPE_CHECKING, Any

import pytest

from pytest_growthbudget.measuring.guards import Exhausted, Overrun
from pytest_growthbudget.meters import clocks
from pytest_growthbudget.meters.protocol import MeterError, checked_cost
from pytest_growthbudget.workloads import internals
from pytest_growthbudget.workloads.fixtures import shared_key

if TYPE_CHECKING:
    from pytest_growthbudget.measuring.guards import Watch
    from pytest_growthbudget.meters.protocol import Meter
    from pytest_growthbudget.plans import Plan

#: Readings after which what they left behind is dropped: collecting garbage before each next one walks over it.
LET_GO_EVERY = 50
#: Fixtures of this package: asking for them does not make a workload.
OUR_FIXTURES = frozenset({"metered", "tally", "workload_rng"})


class GrowthItem(pytest.Item):
    """The reported item: holds the test `template` to its `plans` when it runs."""

    def __init__(self, *, template: pytest.Function, plans: tuple[Plan, ...], **kwargs: Any) -> None:
        super().__init__(**kwargs)
        self.template = template
        self.plans = plans
        self.own_markers.extend(template.own_markers)
        self.keywords.update(internals.own_keywords(template))
        self.fixturenames = [name for name in internals.names_of_fixtures(template) if name != "request"]
        #: Judgements in wire form, one a budget; what a report carries away.
        self.judgements: list[dict[str, Any]] = []
        #: The sizes at which the test itself failed; "" where it did not.
        self.failed_at = ""

    @classmethod
    def in_place_of(cls, template: pytest.Function, plans: tuple[Plan, ...]) -> GrowthItem:
        parent = template.parent
        assert parent is not None
        item: GrowthItem = cls.from_parent(
            parent,
            name=internals.without_size_id(template.name),
            template=template,
            plans=plans,
        )
        internals.hide_size_id(template)
        internals.share_stash(template, item)
        return item

    # What other plugins read of a test function.
    @property
    def obj(self) -> Any:
        return self.template.obj

    @property
    def function(self) -> Any:
        return self.template.function

    @property
    def originalname(self) -> str:
        return self.template.originalname

    @property
    def cls(self) -> Any:
        return self.template.cls

    @property
    def module(self) -> Any:
        return self.template.module

    @property
    def instance(self) -> Any:
        return self.template.instance

    @property
    def funcargs(self) -> dict[str, Any]:
        return self.template.funcargs

    def runtest(self) -> None:
        from pytest_growthbudget.running.trial import hold

        # A plugin may run an item again.
        self.judgements.clear()
        self.failed_at = ""
        names = dict.fromkeys(name for plan in self.plans for name in plan.size_names)
        internals.leave_stack(self, self.template)
        internals.forget_sizes(self.template, names)
        try:
            hold(self)
        finally:
            try:
                if internals.is_set_up(self.template):
                    internals.tear_down(self.template, self)
            finally:
                internals.forget_sizes(self.template, names)
                internals.let_go(self.template)

    def repr_failure(self, excinfo: pytest.ExceptionInfo[BaseException], style: Any = None) -> Any:
        return self.template.repr_failure(excinfo)

    def reportinfo(self) -> Any:
        return self.template.reportinfo()


@dataclass(slots=True, kw_only=True)
class Taken:
    """What one run of the test's body cost: `cost` a call in the meter's unit, times in nanoseconds."""

    cost: float
    calls: int
    wall: float
    cpu: float
    elapsed: float


class BodyFailed(Exception):
    """The body, or a fixture of it, raised at one size. Carries the original as its cause."""

    def __init__(self, sizes: Mapping[str, int]) -> None:
        super().__init__(", ".join(f"{name} = {size}" for name, size in sizes.items()))
        self.sizes = dict(sizes)


class Repeater:
    """Runs the template of one item at any size."""

    def __init__(self, item: GrowthItem, assign: Callable[[int], dict[str, int]], watch: Watch) -> None:
        self._item = item
        self._watch = watch
        self._template = item.template
        self._assign = assign
        self._shared = item.config.stash[shared_key]
        self._uses_metered = "metered" in internals.direct_arguments(self._template)
        self._readings = 0
        #: Whether the body has come back at least once.
        self.returned = False
        #: Whether workloads of one size differ.
        self.random = "workload_rng" in internals.names_of_fixtures(self._template)
        #: Whether a call leaves the workload as it was, by the scopes of the fixtures: see `repeatable`.
        self.repeatable = repeatable(self._template, tuple(assign(2))) and not self._uses_metered

    @contextmanager
    def _set_up(self, size: int) -> Iterator[dict[str, object]]:
        sizes = self._assign(size)
        self._readings += 1
        if self._readings % LET_GO_EVERY == 0:
            internals.let_go(self._template)
        internals.forget_output(self._item)
        internals.set_params(self._template, sizes)
        self._shared.reseed(self._item.nodeid, size, self._readings)
        try:
            try:
                arguments = self._build()
                # Only the body may be cut short: a fixture that is leaves pytest's own bookkeeping undone.
                self._watch.guard()
                yield arguments
            finally:
                self._watch.release()
                internals.tear_down(self._template, self._item)
        except (MeterError, Exhausted, Overrun, KeyboardInterrupt, pytest.exit.Exception):
            raise
        except BaseException as error:
            raise BodyFailed(sizes) from error

    def _build(self) -> dict[str, object]:
        """Build the workload. Raises `Exhausted` for want of memory, once a smaller one could be built."""
        try:
            return internals.set_up(self._template)
        except MemoryError as error:
            if self.returned:
                raise Exhausted from error
            raise

    def yardstick(self, size: int, meter: Meter, reference: Callable[..., object]) -> float:
        """Build the workload that the last reading of the body had, anew, and read one call of `reference` on it.

        Raises `MeterError` where the reference raises.
        """
        self._readings -= 1
        with collector_off(), self._set_up(size) as arguments:
            values = [arguments[name] for name in given_to_yardstick(self._template)]
            meter.start()
            try:
                reference(*values)
                return meter.stop()
            except Exception as error:
                meter.stop()
                name = getattr(reference, "__name__", "the yardstick")
                raise MeterError(
                    f"the yardstick {name} raised {type(error).__name__} at size {size}: {error}. "
                    "It is called with the arguments of the test, in their order."
                ) from error

    def take(self, size: int, meter: Meter, calls: int = 1) -> Taken:
        """Build the workload of `size`, then read `calls` calls of the body with `meter`.

        Raises `BodyFailed` where the body or one of its fixtures raises, with the original as cause.
        """
        began = clocks.wall_time_ns()
        metered = self._shared.metered
        with collector_off(), self._set_up(size) as arguments:
            function = self._template.obj
            try:
                if self._uses_metered:
                    metered.arm(meter)
                    cpu, wall = clocks.cpu_time_ns(), clocks.wall_time_ns()
                    function(**arguments)
                    wall, cpu = clocks.wall_time_ns() - wall, clocks.cpu_time_ns() - cpu
                    cost = metered.cost
                else:
                    rest = range(calls - 1)
                    if rest and not meter.deterministic:
                        # The caches are cold after building and collecting, the more so the larger the workload.
                        function(**arguments)
                    cpu, wall = clocks.cpu_time_ns(), clocks.wall_time_ns()
                    meter.start()
                    try:
                        function(**arguments)
                        for _ in rest:
                            function(**arguments)
                    except BaseException:
                        # What the meter has to say of a call that was cut short must not hide why it was.
                        with suppress(MeterError):
                            meter.stop()
                        raise
                    cost = meter.stop()
                    wall, cpu = clocks.wall_time_ns() - wall, clocks.cpu_time_ns() - cpu
            finally:
                entered = metered.entered
                metered.arm(None)
            self.returned = True
            if self._uses_metered and not entered:
                raise MeterError(
                    "the test asks for `metered` but ran no code inside `with metered:`; "
                    "put the code that the budget is about into that block"
                )
            del arguments
        elapsed = clocks.wall_time_ns() - began
        return Taken(
            cost=checked_cost(meter, cost) / calls, calls=calls, wall=wall / calls, cpu=cpu / calls, elapsed=elapsed
        )

    def footprint(self, size: int) -> float:
        """Bytes at peak of building the workload of `size` and one call, by tracemalloc."""
        import tracemalloc

        running = tracemalloc.is_tracing()
        if not running:
            tracemalloc.start()
        try:
            # A wide workload of this size that is up already would weigh nothing.
            internals.forget_sizes(self._template, self._assign(size))
            tracemalloc.reset_peak()
            before = tracemalloc.get_traced_memory()[0]
            with self._set_up(size) as arguments:
                self._template.obj(**arguments)
                del arguments
                return float(max(tracemalloc.get_traced_memory()[1] - before, 1))
        finally:
            if not running:
                tracemalloc.stop()


def given_to_yardstick(template: pytest.Function) -> tuple[str, ...]:
    """The arguments of the test that a yardstick is called with, in order: all but this package's own fixtures."""
    return tuple(name for name in internals.direct_arguments(template) if name not in OUR_FIXTURES)


def repeatable(template: pytest.Function, size_names: tuple[str, ...]) -> bool:
    """Whether the body may be called many times on one workload.

    So it is where every fixture that the test itself asks for is wider than a function: by that width the test
    declares that its body leaves the workload as it was.
    """
    return all(
        name in size_names
        or name in OUR_FIXTURES
        or internals.scope_of(template, name) not in ("", "function")
        or name in template.callspec.params
        for name in internals.direct_arguments(template)
    )


@contextmanager
def collector_off() -> Iterator[None]:
    """Collect garbage now, and not again until the end."""
    enabled = gc.isenabled()
    gc.collect()
    gc.disable()
    try:
        yield
    finally:
        if enabled:
            gc.enable()


@contextmanager
def collector_spared() -> Iterator[None]:
    """Hide what the session holds already from the collector, so that collecting before each reading is cheap.

    What was frozen before is thawed with the rest: Python 3.12 starts with some hundreds of frozen objects, so a
    count of them does not tell whether somebody froze on purpose.
    """
    gc.collect()
    gc.freeze()
    try:
        yield
    finally:
        gc.unfreeze()


@contextmanager
def warnings_apart() -> Iterator[Callable[[], None]]:
    """Divert warnings from pytest's record while a test is repeated, without touching the filters.

    Yields a function that forgets those diverted so far.
    """
    with warnings.catch_warnings(record=True) as diverted:
        yield diverted.clear
