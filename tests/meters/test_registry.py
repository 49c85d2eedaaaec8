"""Meters by name, and what is said about a name or a meter that will not do."""

from __future__ import annotations

import subprocess
import sys

import pytest

from pytest_growthbudget.meters.clocks import CpuTime, WallTime
from pytest_growthbudget.meters.memory import PeakMemory
from pytest_growthbudget.meters.protocol import Meter, MeterError
from pytest_growthbudget.meters.registry import checked_meters, meter_for
from pytest_growthbudget.meters.steps import Steps
from pytest_growthbudget.meters.tallies import Tally, TallyMeter


class Own:
    def __init__(self, name="pages", unit="pages", deterministic=True):
        self.name, self.unit, self.deterministic = name, unit, deterministic

    def start(self):
        pass

    def stop(self):
        return 0.0


KNOWN = "Known meters: cpu_time, wall_time, steps, peak_memory, tally:NAME"


@pytest.mark.parametrize(
    ("name", "kind", "unit", "deterministic"),
    [
        ("cpu_time", CpuTime, "ns", False),
        ("wall_time", WallTime, "ns", False),
        ("steps", Steps, "steps", True),
        ("peak_memory", PeakMemory, "bytes", True),
        ("tally:queries", TallyMeter, "queries", True),
    ],
)
def test_the_meters_that_come_with_the_package(name, kind, unit, deterministic):
    meter = meter_for(name)
    assert type(meter) is kind
    assert isinstance(meter, Meter)
    assert (meter.name, meter.unit, meter.deterministic) == (name, unit, deterministic)
    assert meter_for(name) is not meter


def test_a_tally_meter_reads_the_tally_it_is_given():
    tally = Tally()
    meter = meter_for("tally:queries", tally=tally)
    assert isinstance(meter, TallyMeter)
    assert meter.tally is tally
    assert isinstance(meter_for("tally:queries").tally, Tally)


def test_ones_own_meters_are_found_beside_the_others():
    own = Own()
    assert meter_for("pages", [own]) is own
    assert isinstance(meter_for("steps", [own]), Steps)


@pytest.mark.parametrize(
    ("name", "hint"),
    [
        ("step", "Did you mean 'steps'? "),
        ("CPU-time", "Did you mean 'cpu_time'? "),
        ("peakmemory", "Did you mean 'peak_memory'? "),
        ("tally", "Did you mean 'tally:NAME', as in 'tally:comparisons'? "),
        ("wattage", ""),
        (7, ""),
        (None, ""),
    ],
)
def test_an_unknown_name_is_answered_with_the_nearest(name, hint):
    with pytest.raises(MeterError) as caught:
        meter_for(name)
    assert caught.value.args[0] == f"no meter is named {name!r}. {hint}{KNOWN}."


def test_the_nearest_name_may_be_ones_own():
    with pytest.raises(MeterError) as caught:
        meter_for("page", [Own()])
    assert caught.value.args[0] == f"no meter is named 'page'. Did you mean 'pages'? {KNOWN}, pages."


@pytest.mark.parametrize("name", ["tally:", "tally: queries", "tally:queries "])
def test_a_tally_needs_a_name(name):
    with pytest.raises(MeterError) as caught:
        meter_for(name)
    assert caught.value.args[0] == (
        f"the meter {name!r} does not say which count to read. "
        "Write tally:NAME with no blanks around the name, as in 'tally:comparisons'."
    )


SEE = "The protocol is in pytest_growthbudget/meters/protocol.py."


def without(attribute):
    meter = Own()
    if attribute in ("start", "stop"):
        setattr(meter, attribute, None)
    else:
        delattr(meter, attribute)
    return meter


@pytest.mark.parametrize(
    ("meter", "message"),
    [
        (Own, "is a class. Return an instance of it: Own()."),
        (without("unit"), f"the meter 'pages' needs an attribute `unit`, a str. {SEE}"),
        (Own(deterministic="yes"), f"the meter 'pages' needs an attribute `deterministic`, a bool. {SEE}"),
        (Own(name=3), f"the meter 3 needs an attribute `name`, a str. {SEE}"),
        (without("start"), f"the meter 'pages' needs a method `start()`. {SEE}"),
        (without("stop"), f"the meter 'pages' needs a method `stop()`. {SEE}"),
        (Own(name="two words"), "a meter is named 'two words'. Give it a name without blanks."),
        (Own(name="steps"), "a meter is named 'steps', a name that the package itself uses. Rename it."),
        (Own(name="tally:mine"), "a meter is named 'tally:mine', a name that the package itself uses. Rename it."),
    ],
)
def test_a_meter_that_does_not_keep_the_protocol_is_refused_by_name(meter, message):
    with pytest.raises(MeterError) as caught:
        checked_meters([meter])
    assert caught.value.args[0].endswith(message)


def test_a_meter_without_a_name_is_shown():
    with pytest.raises(MeterError, match=r"the meter <object object at 0x\w+> needs an attribute `name`, a str"):
        checked_meters([object()])


def test_two_meters_cannot_share_a_name():
    with pytest.raises(MeterError) as caught:
        checked_meters([Own(), Own()])
    assert caught.value.args[0] == "two meters are named 'pages'. Rename one of them."


def test_looking_up_a_meter_loads_no_other():
    code = (
        "import sys; from pytest_growthbudget.meters.registry import meter_for; meter_for('cpu_time');"
        "print([m for m in sys.modules if m.startswith(('numpy', 'scipy', 'tracemalloc', "
        "'pytest_growthbudget.meters.steps', 'pytest_growthbudget.meters.memory', 'pytest.'))])"
    )
    done = subprocess.run([sys.executable, "-c", code], capture_output=True, text=True, check=True)
    assert done.stdout.strip() == "[]"
