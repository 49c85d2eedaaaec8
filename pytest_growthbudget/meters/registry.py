"""Meters by name."""

from __future__ import annotations

import difflib
from collections.abc import Callable, Iterable

from pytest_growthbudget.meters.protocol import Meter, MeterError
from pytest_growthbudget.meters.tallies import Tally, TallyMeter

_TALLY = "tally:"
_SEE = "The protocol is in pytest_growthbudget/meters/protocol.py."


def _cpu_time() -> Meter:
    from pytest_growthbudget.meters.clocks import CpuTime

    return CpuTime()


def _wall_time() -> Meter:
    from pytest_growthbudget.meters.clocks import WallTime

    return WallTime()


def _steps() -> Meter:
    from pytest_growthbudget.meters.steps import Steps

    return Steps()


def _peak_memory() -> Meter:
    from pytest_growthbudget.meters.memory import PeakMemory

    return PeakMemory()


_BUILT_IN: dict[str, Callable[[], Meter]] = {
    "cpu_time": _cpu_time,
    "wall_time": _wall_time,
    "steps": _steps,
    "peak_memory": _peak_memory,
}


def meter_for(name: str, extra: Iterable[Meter] = (), *, tally: Tally | None = None) -> Meter:
    """The meter that a marker's `meter=name` means.

    `extra`: meters of the user's own. `tally`: what `tally:NAME` reads; without one, a new tally, which is
    the `tally` attribute of the `TallyMeter` returned. Raises MeterError for a name that is not known, saying
    which known one is nearest, and for a meter of the user's own that lacks something or takes a name that is
    taken.
    """
    own = checked_meters(extra)
    if name in own:
        return own[name]
    if name in _BUILT_IN:
        return _BUILT_IN[name]()
    if isinstance(name, str) and name.startswith(_TALLY):
        counted = name[len(_TALLY) :]
        if counted and counted == counted.strip():
            return TallyMeter(counted, tally if tally is not None else Tally())
        raise MeterError(
            f"the meter {name!r} does not say which count to read. "
            "Write tally:NAME with no blanks around the name, as in 'tally:comparisons'."
        )
    raise MeterError(_unknown(name, own))


def checked_meters(meters: Iterable[object]) -> dict[str, Meter]:
    """Meters of the user's own by name. Raises MeterError, naming the meter, where one does not keep the
    protocol."""
    by_name: dict[str, Meter] = {}
    for meter in meters:
        checked = _checked(meter)
        if checked.name in by_name:
            raise MeterError(f"two meters are named {checked.name!r}. Rename one of them.")
        by_name[checked.name] = checked
    return by_name


def _checked(meter: object) -> Meter:
    name = getattr(meter, "name", None)
    what = f"the meter {meter if name is None else name!r}"
    if isinstance(meter, type):
        raise MeterError(f"{what} is a class. Return an instance of it: {meter.__name__}().")
    for attribute, kind in (("name", str), ("unit", str), ("deterministic", bool)):
        if not isinstance(getattr(meter, attribute, None), kind):
            raise MeterError(f"{what} needs an attribute `{attribute}`, a {kind.__name__}. {_SEE}")
    for method in ("start", "stop"):
        if not callable(getattr(meter, method, None)):
            raise MeterError(f"{what} needs a method `{method}()`. {_SEE}")
    assert isinstance(meter, Meter)
    if not meter.name or any(character.isspace() for character in meter.name):
        raise MeterError(f"a meter is named {meter.name!r}. Give it a name without blanks.")
    if meter.name in _BUILT_IN or meter.name.startswith(_TALLY):
        raise MeterError(f"a meter is named {meter.name!r}, a name that the package itself uses. Rename it.")
    return meter


def _unknown(name: object, own: Iterable[str]) -> str:
    known = [*_BUILT_IN, f"{_TALLY}NAME", *own]
    near = difflib.get_close_matches(str(name).lower().replace("-", "_"), [*known, "tally"], n=1, cutoff=0.6)
    nearest = f"Did you mean {near[0].replace('tally:NAME', 'tally')!r}?" if near else ""
    if near and near[0] in ("tally", f"{_TALLY}NAME"):
        nearest = "Did you mean 'tally:NAME', as in 'tally:comparisons'?"
    return f"no meter is named {name!r}. {nearest}{' ' if nearest else ''}Known meters: {', '.join(known)}."
