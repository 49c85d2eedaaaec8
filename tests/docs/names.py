"""Tables of the public names, for `guide/reference.md`: each name and its sentence as the code has them.

A name without a sentence is an error: it is written where the name is, not here.
"""

from __future__ import annotations

import inspect
import re
from collections.abc import Callable, Iterable
from dataclasses import fields
from importlib import import_module
from typing import Any

import pytest_growthbudget
from pytest_growthbudget import checks, hookspecs, plans, plugin, pyproject, settings
from pytest_growthbudget.fitting.judgement import Finding, Judgement
from pytest_growthbudget.meters.tallies import Tally

#: Public names that are not at the top of the package.
ELSEWHERE = (
    "meters.protocol:Meter",
    "meters.protocol:MeterError",
    "meters.steps:count_lines",
    "fitting.judge:ReadingsError",
    "auditing.target:TargetError",
    "workloads.shapes:Shape",
    "workloads.shapes:shape_named",
    "workloads.shapes:adversary_of",
)


def first_sentence(thing: object) -> str:
    text = inspect.getdoc(thing)
    assert text, f"{thing!r} has no docstring"
    return cells(text.partition("\n\n")[0].split(". ")[0].removesuffix(".")) + "."


def cells(text: str) -> str:
    """Text as it stands in a table: on one line, bars escaped."""
    return " ".join(text.split()).replace("|", r"\|")


def described(thing: object) -> dict[str, str]:
    """The lines `name: sentence.` under `Args:` or `Attributes:` in a docstring."""
    block = re.search(r"^(?:Args|Attributes):\n((?:    .*\n?)+)", inspect.getdoc(thing) or "", re.M)
    assert block, f"{thing!r} describes none of its names"
    return {name: cells(text) for name, text in re.findall(r"^    (\w+): ((?:.|\n {8})*)", block[1], re.M)}


def called(name: str, function: Callable[..., Any]) -> str:
    """`name(a, b=1)`: the signature without its types."""
    signature = inspect.signature(function)
    parameters = [each.replace(annotation=inspect.Parameter.empty) for each in signature.parameters.values()]
    bare = signature.replace(
        parameters=[p for p in parameters if p.name != "self"], return_annotation=inspect.Parameter.empty
    )
    return f"{name}{bare}"


def table(head: Iterable[str], rows: Iterable[Iterable[str]]) -> str:
    head = list(head)
    lines = [head, ["---"] * len(head), *rows]
    return "\n".join("| " + " | ".join(line).replace("|  |", "| |") + " |" for line in lines)


def allowed(name: str) -> str:
    """What a value must be, in the words of the error for one that is not."""
    try:
        checks.checked(name, object(), "")
    except settings.SettingsError as error:
        found = re.search(r"must be (.*); got", str(error))
        assert found
        return cells(found[1])
    raise AssertionError(name)


def marker() -> str:
    about = described(plans.growth_budget)
    rows = []
    for name, parameter in inspect.signature(plans.growth_budget).parameters.items():
        value = 'text, such as "n log n", or a function of n' if name == "bound" else allowed(name)
        default = "" if parameter.default is None else f"`{parameter.default}`"
        rows.append((f"`{name}`", value, default or run_default(name), about[name]))
    return table(("argument", "a value is", "default", "what it says"), rows)


def run_default(name: str) -> str:
    """What holds where a marker does not say it: the setting of the run, or nothing."""
    return "of the run" if name in {each.name for each in fields(settings.Settings)} else ""


def options() -> str:
    found: list[tuple[str, dict[str, Any]]] = []

    class Parser:
        def getgroup(self, *_: str) -> Parser:
            return self

        def addoption(self, name: str, **how: Any) -> None:
            found.append((name, how))

    plugin.pytest_addoption(Parser())  # type: ignore[arg-type]
    rows = [
        (f"`{name} {how.get('metavar') or '|'.join(how['choices'])}`".replace("|", r"\|"), how["help"])
        for name, how in found
    ]
    return table(("option", "what it does (default)"), rows)


def keys() -> str:
    about = described(settings.Settings)
    default = settings.Settings()
    rows = []
    for name in pyproject._TABLE_KEYS:
        value = getattr(default, name)
        kind = {"slack": "a table", "budgets": "tables", "ratchet": "a table"}.get(name) or allowed(name)
        shown = "" if value in (None, (), {}) else f"`{str(value).lower() if isinstance(value, bool) else value}`"
        rows.append((f"`{name}`", kind, shown, about[name]))
    return table(("key", "a value is", "default", "what it says"), rows)


def ratchet() -> str:
    about = described(settings.Ratchet)
    return table(("key", "a value is", "what it says"), [(f"`{name}`", allowed(name), about[name]) for name in about])


def slack() -> str:
    return table(
        ("meter", "default slack"), [(f"`{name}`", str(value)) for name, value in settings.DEFAULT_SLACK.items()]
    )


def fixtures() -> str:
    return table(
        ("fixture", "what it is"),
        [(f"`{name}`", first_sentence(getattr(plugin, name))) for name in plugin.__all__],
    )


def tally() -> str:
    rows = []
    for name, member in vars(Tally).items():
        if not name.startswith("_"):
            function = member.__func__ if isinstance(member, staticmethod) else member
            shown = name if isinstance(member, property) else called(name, function)
            rows.append((f"`tally.{shown}`", first_sentence(function)))
    return table(("of `tally`", "what it does"), rows)


def hooks() -> str:
    found = [(name, hook) for name, hook in vars(hookspecs).items() if name.startswith("pytest_")]
    return table(("hook", "what to do"), [(f"`{called(name, hook)}`", first_sentence(hook)) for name, hook in found])


def functions() -> str:
    rows = []
    for name in pytest_growthbudget.__all__:
        thing = getattr(pytest_growthbudget, name)
        rows.append((f"`{name if isinstance(thing, type) else called(name, thing)}`", first_sentence(thing)))
    return table(("name", "what it is"), rows)


def elsewhere() -> str:
    rows = []
    for place in ELSEWHERE:
        module, _, name = place.partition(":")
        thing = getattr(import_module(f"pytest_growthbudget.{module}"), name)
        shown = name if isinstance(thing, type) else called(name, thing)
        rows.append((f"`{module}.{shown}`", first_sentence(thing)))
    return table(("name, after `pytest_growthbudget.`", "what it is"), rows)


def judgement() -> str:
    about = described(Finding) | described(Judgement)
    return table(("attribute", "what it holds"), [(f"`{each.name}`", about[each.name]) for each in fields(Judgement)])


TABLES: dict[str, Callable[[], str]] = {
    table.__name__: table
    for table in (marker, options, keys, ratchet, slack, fixtures, tally, hooks, functions, elsewhere, judgement)
}
