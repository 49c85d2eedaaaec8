"""From a collected test function to the item that is reported: which tests carry a budget, and which are refused."""

from __future__ import annotations

import inspect
import itertools
import textwrap
from collections.abc import Callable, Iterable
from typing import Any

import pytest

from pytest_growthbudget.meters.protocol import Meter, MeterError
from pytest_growthbudget.plans import marks_apply, plans_for
from pytest_growthbudget.settings import MARKER, Settings, SettingsError
from pytest_growthbudget.workloads import internals
from pytest_growthbudget.workloads.fixtures import shared_key
from pytest_growthbudget.workloads.repeat import GrowthItem, given_to_yardstick


def fault(text: str) -> pytest.Collector.CollectError:
    """A collection error whose prose is wrapped at 80 columns; short lines (a caret, code) stay as they are."""
    lines = [
        line if len(line) <= 80 else textwrap.fill(line, 80, break_long_words=False, break_on_hyphens=False)
        for line in text.splitlines()
    ]
    return pytest.Collector.CollectError("\n".join(lines))


def give_sizes(metafunc: pytest.Metafunc, settings: Settings) -> None:
    """Reserve a hidden parameter for each size name of a test that carries a budget."""
    size = ordinary_size(metafunc.definition, settings)
    # A fixture gives its own ordinary size where budgets are off, unless that is too large for the test.
    given = settings.enabled or size < settings.ordinary_size
    names = [
        name
        for name in size_names(metafunc.definition, settings)
        if name in metafunc.fixturenames and (given or name not in metafunc._arg2fixturedefs)
    ]
    if not names:
        return
    try:
        metafunc.parametrize(
            names,
            [(size,) * len(names)],
            ids=[internals.hide_id()],
            scope="session",
        )
    except (ValueError, pytest.Collector.CollectError) as error:
        if "duplicate" not in str(error):
            raise
        raise fault(
            f"{metafunc.definition.nodeid}: {' or '.join(names)} is parametrized already; a growth budget sets "
            "the sizes itself: take that parametrization away, or budget another size with vary=..."
        ) from None


def ordinary_size(definition: pytest.Item, settings: Settings) -> int:
    """The size of a test's one run where it is not measured: the ordinary one, or its `largest` if that is less."""
    limits = [mark.kwargs.get("largest") for mark in definition.iter_markers(MARKER)]
    limits += [p.arguments.get("largest") for p in settings.budgets if p.may_match(definition.nodeid)]
    return min([settings.ordinary_size, *(limit for limit in limits if isinstance(limit, int))])


def size_names(definition: pytest.Item, settings: Settings) -> tuple[str, ...]:
    """The names that the budgets of a test function may vary, as far as they can be told before it is an item."""
    varies: list[Any] = [mark.kwargs.get("vary") for mark in definition.iter_markers(MARKER)]
    varies += [placed.arguments.get("vary") for placed in settings.budgets if placed.may_match(definition.nodeid)]
    names: dict[str, None] = {}
    for vary in varies:
        if isinstance(vary, dict):
            names.update(dict.fromkeys(name for name in vary.values() if isinstance(name, str)))
        else:
            names["problem_size"] = None
    return tuple(names)


def reported(item: pytest.Function, settings: Settings) -> pytest.Item:
    """The item that stands in pytest's collection for `item`.

    Raises `pytest.Collector.CollectError`, whose text is whole, where the budget or the test cannot be used.
    """
    nodeid = internals.without_size_id(item.nodeid)
    budgeted = marks_apply(item) or any(placed.matches(nodeid) for placed in settings.budgets)
    if not budgeted or not settings.enabled:
        internals.hide_size_id(item)
        return item
    try:
        plans = plans_for(item, nodeid, settings)
    except SettingsError as error:
        raise fault(str(error)) from None
    for plan in plans:
        try:
            meter_of(plan.meter, item.config)
        except MeterError as error:
            raise fault(f"{plan.source}: {error}") from None
        if plan.yardstick is not None:
            check_yardstick(plan.yardstick, item, plan.source)
    reason = refusal(item)
    if reason:
        raise fault(f"{nodeid}: {reason}")
    names = dict.fromkeys(name for plan in plans for name in plan.size_names)
    unused = [name for name in names if name not in set(internals.names_of_fixtures(item))]
    if unused:
        raise fault(_no_size(nodeid, unused[0], item))
    if not internals.has_parameters(item):
        raise fault(
            f"{nodeid}: this pytest does not see the marker through the decorator above it, "
            "so no size can be set; put the marker directly on the function"
        )
    return GrowthItem.in_place_of(item, plans)


def check_yardstick(reference: Callable[..., object], item: pytest.Function, source: str) -> None:
    """Raise a collection error where `reference` cannot be called with the arguments of the test."""
    names = given_to_yardstick(item)
    try:
        inspect.signature(reference).bind(*names)
    except ValueError:  # a built-in function that does not tell its signature
        return
    except TypeError as error:
        name = getattr(reference, "__name__", repr(reference))
        raise fault(
            f"{source}: the yardstick {name} cannot be called with the arguments of the test "
            f"({', '.join(names) or 'none'}): {error}"
        ) from None


#: The meters of other plugins, asked for once.
own_meters_key = pytest.StashKey["Iterable[Meter]"]()


def meter_of(name: str, config: pytest.Config) -> Meter:
    """The meter `name`: the package's own, or one that a plugin offers. Raises `MeterError` for an unknown one."""
    from pytest_growthbudget.meters.registry import meter_for

    if own_meters_key not in config.stash:
        offered: list[Iterable[Meter]] = config.hook.pytest_growthbudget_meters(config=config)
        config.stash[own_meters_key] = list(itertools.chain.from_iterable(offered))
    tally = config.stash[shared_key].fresh_tally()
    return meter_for(name, config.stash[own_meters_key], tally=tally)


def refusal(item: pytest.Function) -> str:
    """Why the test function cannot carry a budget, and the way round; "" where it can."""
    function = item.obj
    if "subtests" in set(internals.names_of_fixtures(item)):
        return (
            "a growth budget cannot stand on a test with subtests, each of which would be reported once a reading; "
            "parametrize the test, or put the budget on a test without them"
        )
    if internals.is_async(function):
        return (
            "a growth budget cannot stand on an async test yet; "
            "call the coroutine in a plain test with asyncio.run(...)"
        )
    if getattr(function, "is_hypothesis_test", False):
        return (
            "a growth budget cannot stand on a @given test, whose body runs many examples a call; "
            "put it on a plain test that builds its workload from problem_size"
        )
    return ""


def refuse_misplaced(collector: pytest.Collector, name: str, found: object) -> None:
    """Refuse a budget on a fixture, which some versions of pytest ignore in silence, and one called on a lambda, which
    pytest takes for an argument of the marker.
    """
    if internals.is_fixture(found) and any(mark.name == MARKER for mark in getattr(found, "pytestmark", ())):
        raise fault(f"{collector.nodeid}::{name}: a growth budget cannot stand on a fixture; put it on the test")
    if (
        isinstance(found, pytest.MarkDecorator)
        and found.name == MARKER
        and isinstance(collector, pytest.Module | pytest.Class)
        and collector.funcnamefilter(name)
    ):
        raise fault(f"{collector.nodeid}::{name}: a growth budget cannot stand on a lambda; write a test function")


def refuse_test_case(collector: pytest.Collector, settings: Settings) -> None:
    """Refuse budgets in a `unittest.TestCase`, which knows no fixtures in its methods."""
    for name, method in _methods(getattr(collector, "obj", None)):
        nodeid = f"{collector.nodeid}::{name}"
        marked = any(mark.name == MARKER for mark in getattr(method, "pytestmark", ()))
        if marked or marks_apply_above(collector) or any(p.matches(nodeid) for p in settings.budgets):
            raise fault(
                f"{nodeid}: a growth budget cannot stand on a method of a unittest.TestCase, which takes no "
                "fixtures; write it as a plain test function or in a class without that base"
            )


def marks_apply_above(collector: pytest.Collector) -> bool:
    return collector.get_closest_marker(MARKER) is not None


def _methods(cls: Any) -> Iterable[tuple[str, Any]]:
    return [(name, getattr(cls, name)) for name in dir(cls) if name.startswith("test")] if cls else []


def _no_size(nodeid: str, name: str, item: pytest.Function) -> str:
    asked = internals.own_fixtures(item)
    where = (
        f"give it to the fixture that builds the workload ({' or '.join(asked)})"
        if asked
        else "give it to the test, or to a fixture that builds its workload"
    )
    return (
        f"{nodeid}: no fixture of this test asks for the size {name!r}, so its workload cannot grow; {where}:\n"
        f"    @pytest.fixture\n"
        f"    def {asked[0] if asked else 'workload'}({name}): ..."
    )
