"""Plans: the budgets of one test with every setting resolved; every fault names its source."""

from __future__ import annotations

import inspect
from collections.abc import Callable, Mapping
from dataclasses import dataclass, field
from typing import TYPE_CHECKING, Any

from pytest_growthbudget.checks import checked, nearest
from pytest_growthbudget.settings import MARKER, Ratchet, Settings, SettingsError

if TYPE_CHECKING:
    import pytest

    from pytest_growthbudget.bounds.budget import Budget
    from pytest_growthbudget.bounds.callables import CallableBudget


@dataclass(frozen=True, slots=True, kw_only=True)
class Plan:
    """One budget on one test, every setting resolved. `source` says where it was declared.

    `budget` is None where a `yardstick` is the budget. `at` and `ceiling`: the upper forecast at that size may not
    pass that cost, in the meter's unit. `audit`: the function whose calls are held against the recurrence, and
    `size_of` what gives their sizes (see `auditing.target`).
    """

    budget: Budget | CallableBudget | None
    source: str
    meter: str = "cpu_time"
    vary: Mapping[str, str] = field(default_factory=dict)
    smallest: int | None = None
    largest: int | None = None
    slack: float = 0.15
    confidence: float = 0.95
    time_limit: float = 10.0
    undecided: str = "warn"
    seed: int = 1
    yardstick: Callable[..., Any] | None = None
    at: int | None = None
    ceiling: float | None = None
    scout: bool = False
    ratchet: Ratchet | None = None
    audit: Any = None
    size_of: Any = None

    @property
    def size_names(self) -> tuple[str, ...]:
        return tuple(self.vary.values())


# ------------------------------------------------------------------ markers


def growth_budget(
    bound: Any = None,
    *,
    yardstick: Callable[..., Any] | None = None,
    meter: str = "cpu_time",
    vary: Mapping[str, str] | None = None,
    smallest: int | None = None,
    largest: int | None = None,
    slack: float | None = None,
    confidence: float | None = None,
    time_limit: float | None = None,
    undecided: str | None = None,
    at: int | None = None,
    cost: str | float | None = None,
    scout: bool | None = None,
    audit: Callable[..., Any] | str | None = None,
    size_of: Callable[..., float] | str | None = None,
) -> None:
    """The signature of the marker; called by nobody.

    Args:
        bound: What is promised: a bound, a recurrence, or a function of the size.
        yardstick: What is promised, as a reference: the body grows no faster than this function on the same workload.
        meter: Which cost is read; a test may have one budget a meter.
        vary: Which fixture or argument gives each variable of the bound (its one variable: `problem_size`).
        smallest: The smallest size tried.
        largest: The largest size tried; at least twice `smallest`.
        slack: The excess that is tolerated, an exponent of n (by meter).
        confidence: The confidence of the intervals.
        time_limit: Seconds that this budget may take.
        undecided: What becomes of a test whose budget is undecided or unmeasured.
        at: The size of a ceiling; goes with `cost`.
        cost: The ceiling: what the cost foreseen at the size `at` may not pass.
        scout: Try each new size in a child process first (POSIX).
        audit: The recursive function whose calls are held against the recurrence.
        size_of: What gives the size of an audited call from its arguments (the first that has one).
    """


_SIGNATURE = inspect.signature(growth_budget)


def marker_arguments() -> tuple[str, ...]:
    return tuple(_SIGNATURE.parameters)


def plan_of(args: tuple[Any, ...], kwargs: Mapping[str, Any], settings: Settings, source: str) -> Plan:
    """One marker, or one entry of pyproject.toml, with every setting resolved.

    Raises `SettingsError` whose message names the source.
    """
    unknown = [key for key in kwargs if key not in _SIGNATURE.parameters]
    if unknown:
        hint = nearest(unknown[0], _SIGNATURE.parameters)
        raise SettingsError(f"{source}: growth_budget has no argument {unknown[0]!r}; {hint}")
    if len(args) > 1:
        raise SettingsError(f"{source}: growth_budget takes one bound; got {len(args)}: stack one marker a budget")
    if args and "bound" in kwargs:
        raise SettingsError(f"{source}: growth_budget got its bound twice")
    bound, yardstick = args[0] if args else kwargs.get("bound"), kwargs.get("yardstick")
    if bound is None and yardstick is None and kwargs.get("audit") is not None:
        raise SettingsError(
            f"{source}: growth_budget needs a bound to audit against; "
            "pytest_growthbudget.audit(function, ...) finds the recurrence that a function follows"
        )
    budget = _budget(bound, yardstick, source)

    given = {key: checked(key, value, source) for key, value in kwargs.items() if key != "bound" and value is not None}
    meter = given.get("meter", "cpu_time")
    if ("at" in given) != ("cost" in given):
        raise SettingsError(f"{source}: `at` and `cost` go together: the size, and the ceiling of the cost there")
    if "size_of" in given and "audit" not in given:
        raise SettingsError(f"{source}: size_of gives the sizes of an audited function; say which: audit=...")
    smallest, largest = given.get("smallest"), given.get("largest")
    if smallest is not None and largest is not None and largest < 2 * smallest:
        raise SettingsError(
            f"{source}: largest must be at least twice smallest; got smallest={smallest}, largest={largest}"
        )
    return Plan(
        budget=budget,
        source=source,
        meter=meter,
        vary=_variables(budget, given.get("vary"), source),
        smallest=smallest,
        largest=largest,
        slack=given.get("slack", settings.slack_of(meter)),
        confidence=given.get("confidence", settings.confidence),
        time_limit=given.get("time_limit", settings.time_limit),
        undecided=given.get("undecided", settings.undecided),
        seed=settings.seed,
        yardstick=given.get("yardstick"),
        at=given.get("at"),
        ceiling=given.get("cost"),
        scout=given.get("scout", settings.scout),
        ratchet=settings.ratchet,
        audit=given.get("audit"),
        size_of=given.get("size_of"),
    )


def _budget(bound: Any, yardstick: Any, source: str) -> Budget | CallableBudget | None:
    from pytest_growthbudget.bounds.budget import parse_budget
    from pytest_growthbudget.bounds.callables import callable_budget
    from pytest_growthbudget.bounds.language import BoundError

    if yardstick is not None:
        if bound is not None:
            raise SettingsError(f"{source}: growth_budget takes a bound or a yardstick, not both")
        return None
    if bound is None:
        raise SettingsError(f'{source}: growth_budget needs a bound, such as "n log n"')
    try:
        if isinstance(bound, str):
            return parse_budget(bound)
        if callable(bound):
            return callable_budget(bound)
    except BoundError as error:
        raise SettingsError(f"{source}:\n{error}") from None
    raise SettingsError(f'{source}: the bound must be text, such as "n log n", or a function of n; got {bound!r}')


def _variables(budget: Budget | CallableBudget | None, vary: Mapping[str, str] | None, source: str) -> dict[str, str]:
    bounds = budget.variables if budget is not None else tuple(vary or ())[:1]
    variables = bounds or ("n",)
    if vary is None:
        if len(variables) > 1:
            names = ", ".join(f'"{name}": "..."' for name in variables)
            raise SettingsError(
                f"{source}: the bound has the variables {', '.join(variables)}; say which fixture or argument "
                f"gives each: vary={{{names}}}"
            )
        return {variables[0]: "problem_size"}
    missing = [name for name in bounds if name not in vary]
    if missing:
        raise SettingsError(f"{source}: vary does not say what gives {missing[0]!r}")
    surplus = [name for name in vary if name not in variables]
    if surplus:
        raise SettingsError(
            f"{source}: vary names {surplus[0]!r}, which the bound does not; {nearest(surplus[0], variables)}"
        )
    if len(set(vary.values())) < len(vary):
        raise SettingsError(f"{source}: vary gives two variables the same fixture")
    return dict(vary)


# ------------------------------------------------------------------ the budgets of one test


def marks_apply(node: pytest.Item) -> bool:
    """Whether a marker stands on the test, its class or its module."""
    return node.get_closest_marker(MARKER) is not None


def plans_for(item: pytest.Item, nodeid: str, settings: Settings) -> tuple[Plan, ...]:
    """The plans of one test: its markers, the nearest first, then the entries of pyproject.toml that match.

    A budget for a meter that a nearer one has judged already is left out. Raises `SettingsError`.
    """
    plans: dict[str, Plan] = {}
    nodes: dict[str, object] = {}
    for node, mark in item.iter_markers_with_node(MARKER):
        where = nodeid if node is item else f"{nodeid} (marker on {node.name})"
        plan = plan_of(mark.args, mark.kwargs, settings, where)
        if plan.meter not in plans:
            plans[plan.meter], nodes[plan.meter] = plan, node
        elif nodes[plan.meter] is node:
            raise SettingsError(f"{where}: two budgets for the meter {plan.meter!r}; keep one")
    for placed in settings.budgets:
        if placed.matches(nodeid):
            arguments = {k: v for k, v in placed.arguments.items() if k not in settings.from_command_line}
            plan = plan_of((), arguments, settings, placed.source)
            plans.setdefault(plan.meter, plan)
    for plan in plans.values():
        _check_audit(plan)
    return tuple(plans.values())


def _check_audit(plan: Plan) -> None:
    """Raises `SettingsError` where the function to audit cannot be found, or its calls would have no size."""
    if plan.audit is None:
        return
    from pytest_growthbudget.auditing.target import TargetError, resolve, sizer

    try:
        sizer(resolve(plan.audit), plan.size_of)
    except TargetError as error:
        raise SettingsError(f"{plan.source}: {error}") from None
