"""The table `[tool.growthbudget]` of a pyproject.toml: read whole, every fault named with its place."""

from __future__ import annotations

import sys
from collections.abc import Mapping
from typing import Any

from pytest_growthbudget.checks import checked, nearest
from pytest_growthbudget.plans import marker_arguments, plan_of
from pytest_growthbudget.settings import PlacedBudget, Ratchet, Settings, SettingsError

if sys.version_info >= (3, 11):
    import tomllib
else:
    import tomli as tomllib


def settings_in(raw: bytes, file: str) -> Settings:
    """The settings in the text `raw` of `file`. Raises `SettingsError`."""
    try:
        document = tomllib.loads(raw.decode())
    except (UnicodeDecodeError, tomllib.TOMLDecodeError) as error:
        raise SettingsError(f"{file}: {error}") from None
    table = document.get("tool", {}).get("growthbudget", {})
    return _settings(table, file)


_TABLE_KEYS = (
    "confidence",
    "time_limit",
    "session_time_limit",
    "undecided",
    "seed",
    "ordinary_size",
    "slack",
    "budgets",
    "ratchet",
    "scout",
)


def _settings(table: Any, file: str) -> Settings:
    place = f"{file}, [tool.growthbudget]"
    if not isinstance(table, Mapping):
        raise SettingsError(f"{place}: expected a table")
    values: dict[str, Any] = {}
    for key, value in table.items():
        if key not in _TABLE_KEYS:
            raise SettingsError(f"{place}: unknown key {key!r}; {nearest(key, _TABLE_KEYS)}")
        if key == "slack":
            values[key] = _slack_table(value, f"{file}, [tool.growthbudget.slack]")
        elif key == "budgets":
            values[key] = _placed_budgets(value, file)
        elif key == "ratchet":
            values[key] = _ratchet(value, f"{file}, [tool.growthbudget.ratchet]")
        else:
            values[key] = checked(key, value, place)
    return Settings(**values)


def _slack_table(table: Any, place: str) -> dict[str, float]:
    if not isinstance(table, Mapping):
        raise SettingsError(f"{place}: expected a table of meter to slack, such as cpu_time = 0.2")
    return {meter: checked("slack", value, f"{place}, {meter}") for meter, value in table.items()}


def _ratchet(table: Any, place: str) -> Ratchet:
    if not isinstance(table, Mapping) or "accepted" not in table:
        raise SettingsError(f'{place}: needs accepted = "file of accepted records", from the project\'s root')
    for key in table:
        if key not in ("accepted", "margin"):
            raise SettingsError(f"{place}: unknown key {key!r}; {nearest(key, ('accepted', 'margin'))}")
    return Ratchet(**{key: checked(key, value, place) for key, value in table.items()})


def _placed_budgets(entries: Any, file: str) -> tuple[PlacedBudget, ...]:
    if not isinstance(entries, list) or not all(isinstance(entry, Mapping) for entry in entries):
        raise SettingsError(f"{file}: budgets must be tables, each headed [[tool.growthbudget.budgets]]")
    placed = []
    for number, entry in enumerate(entries, 1):
        source = f"{file}, [[tool.growthbudget.budgets]] number {number}"
        if not isinstance(entry.get("test"), str):
            raise SettingsError(f'{source}: needs test = "glob of node ids"')
        arguments = {key: value for key, value in entry.items() if key != "test"}
        unknown = [key for key in arguments if key not in marker_arguments()]
        if unknown:
            known = ("test", *marker_arguments())
            raise SettingsError(f"{source}: unknown key {unknown[0]!r}; {nearest(unknown[0], known)}")
        placed.append(PlacedBudget(test=entry["test"], arguments=arguments, source=source))
        plan_of((), arguments, Settings(), source)
    return tuple(placed)
