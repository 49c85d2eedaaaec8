"""Every private name of pytest that the repetition of a test needs, in one place.

Each function has a test of its own, which is run with every pytest version that the package supports.
"""

from __future__ import annotations

import inspect
from typing import TYPE_CHECKING, Any

import pytest
from _pytest.fixtures import FixtureDef
from _pytest.tmpdir import tmppath_result_key

if TYPE_CHECKING:
    from collections.abc import Iterable, Mapping

#: Stands in a hidden parameter set's id where this pytest cannot hide it (before 8.4).
SIZE_ID = "growthsize"


def hide_id() -> Any:
    """What to pass as the id of a parameter set that must not show in node ids."""
    return getattr(pytest, "HIDDEN_PARAM", SIZE_ID)


def without_size_id(name: str) -> str:
    """`name` of an item or a node id without the mark that `hide_id` may have left in it."""
    for spelling in (f"[{SIZE_ID}]", f"-{SIZE_ID}", f"{SIZE_ID}-"):
        if spelling in name:
            return name.replace(spelling, "", 1)
    return name


def hide_size_id(item: pytest.Item) -> None:
    """Take the mark out of the name of a plain item that was given a hidden parameter for nothing."""
    if SIZE_ID in item.name:
        item.name = without_size_id(item.name)
        item._nodeid = without_size_id(item.nodeid)  # type: ignore[attr-defined]


def own_keywords(item: pytest.Item) -> dict[str, Any]:
    """The keywords of `item` itself, without those of its parents."""
    return dict(item.keywords._markers)  # type: ignore[attr-defined]


def set_params(template: pytest.Function, values: Mapping[str, object]) -> None:
    """Give the parameters `values` to the next run of `template`."""
    template.callspec.params.update(values)


def leave_stack(item: pytest.Item, template: pytest.Function) -> None:
    """Take `item`, which pytest has set up, off the stack of active nodes, so that `template` can be set up."""
    item.session._setupstate.teardown_exact(template)


def set_up(template: pytest.Function) -> dict[str, object]:
    """Build the fixtures of `template` afresh; return the arguments of its function."""
    template._initrequest()
    # tmp_path asks there whether the test passed, and takes the answer away when it is torn down.
    template.stash.setdefault(tmppath_result_key, {"setup": True, "call": True})
    if isinstance(template.parent, pytest.Class):
        template.__dict__.pop("_obj", None)
        template.__dict__.pop("_instance", None)
    template.session._setupstate.setup(template)
    return {name: template.funcargs[name] for name in template._fixtureinfo.argnames}


def tear_down(template: pytest.Function, item: pytest.Item) -> None:
    """Finalize the function-scoped fixtures of `template`; wider ones stay, since `item` is said to come next."""
    template.session._setupstate.teardown_exact(item)


def forget_sizes(template: pytest.Function, names: Iterable[str]) -> None:
    """Tear down every fixture that was built from one of the sizes `names`, for whichever test.

    pytest keeps a wide fixture for the next test without asking whether that test overrides what it was built from.
    """
    manager: Any = template.session._fixturemanager
    seen_from = template if pytest.version_tuple >= (8, 1) else template.nodeid
    for name in names:
        overriding = template._fixtureinfo.name2fixturedefs.get(name) or ()
        overridden = manager.getfixturedefs(name, seen_from) or ()
        for definition in (*overriding, *overridden):
            if definition.cached_result is not None:
                definition.finish(template._request)


def is_set_up(template: pytest.Function) -> bool:
    return template in template.session._setupstate.stack


def scope_of(template: pytest.Function, fixture: str) -> str:
    """The scope of the fixture that `template` gets under the name `fixture`; "" for an argument."""
    found = template._fixtureinfo.name2fixturedefs.get(fixture)
    return found[-1].scope if found else ""


def names_of_fixtures(template: pytest.Function) -> Iterable[str]:
    """The names of all fixtures and arguments that `template` uses, directly or through other fixtures."""
    return template._fixtureinfo.names_closure


def direct_arguments(template: pytest.Function) -> tuple[str, ...]:
    return template._fixtureinfo.argnames


def let_go(template: pytest.Function) -> None:
    """Drop what the repetitions of `template` have left behind: its last workload, and finalizers said many times.

    Each repetition registers the finalizers of wider fixtures anew, with their nodes and with the fixtures that they
    were built from. One of each is enough; thousands hold as many requests in memory until the session ends.
    """
    template._initrequest()
    for finalizers, _ in template.session._setupstate.stack.values():
        finalizers[:] = _first_of_each(finalizers)
    for definitions in template._fixtureinfo.name2fixturedefs.values():
        for definition in definitions:
            definition._finalizers[:] = _first_of_each(definition._finalizers)


def _first_of_each(finalizers: Iterable[Any]) -> list[Any]:
    """`finalizers` without those that finish a fixture which an earlier one finishes."""
    kept: dict[int, Any] = {}
    for finalizer in finalizers:
        fixture = _finished_by(finalizer)
        kept.setdefault(id(finalizer) if fixture is None else id(fixture), finalizer)
    return list(kept.values())


def _finished_by(finalizer: Any) -> FixtureDef[Any] | None:
    """The fixture that `finalizer` finishes, if that is what it does: a partial, or a lambda before pytest 9."""
    reached = [getattr(getattr(finalizer, "func", None), "__self__", None)]
    if pytest.version_tuple < (9,):
        reached += [cell.cell_contents for cell in getattr(finalizer, "__closure__", None) or ()]
    return next((each for each in reached if isinstance(each, FixtureDef)), None)


def own_fixtures(template: pytest.Function) -> tuple[str, ...]:
    """The fixtures that `template` asks for itself and that its project has made."""
    made = template._fixtureinfo.name2fixturedefs
    return tuple(
        name
        for name in direct_arguments(template)
        if name in made and not made[name][-1].func.__module__.startswith(("_pytest.", "pytest_growthbudget."))
    )


def has_parameters(item: pytest.Function) -> bool:
    return hasattr(item, "callspec")


def share_stash(template: pytest.Function, item: pytest.Item) -> None:
    """Let fixtures of `template` find what pytest's own plugins keep on `item` (caplog, tmp_path)."""
    template.stash = item.stash


def forget_output(item: pytest.Item) -> None:
    """Drop what was printed and logged so far in this phase: a thousand readings must not be kept as text."""
    manager = item.config.pluginmanager
    capture = manager.get_plugin("capturemanager")
    if capture is not None and capture.is_globally_capturing():
        capture.read_global_capture()
    logging = manager.get_plugin("logging-plugin")
    if logging is not None:
        logging.caplog_handler.clear()
        logging.report_handler.clear()


def is_fixture(found: object) -> bool:
    """Whether `found` in a module is a fixture: a function that is known for one before pytest 8.4."""
    known = inspect.isfunction(found) and hasattr(found, "_pytestfixturefunction")
    return known or type(found).__name__ == "FixtureFunctionDefinition"


def is_rerun(report: pytest.TestReport) -> bool:
    """Whether another plugin runs the test again after this report: then the last run is the one that counts."""
    outcome: str = report.outcome
    return outcome == "rerun"


def is_test_case(collected: object) -> bool:
    """Whether pytest made `collected` for a `unittest.TestCase`."""
    from _pytest.unittest import UnitTestCase

    return isinstance(collected, UnitTestCase)


def is_async(function: object) -> bool:
    target = inspect.unwrap(function) if callable(function) else function
    return inspect.iscoroutinefunction(target) or inspect.isasyncgenfunction(target)
