"""Workloads at one size, for the tests and for the faulty twins alike.

Each draws on `workload_rng`, so that it is new at every reading and the same again under the same seed. Only the
tide table is built once a size (scope "module"): its test reads it and changes nothing.
"""

from __future__ import annotations

from collections.abc import Iterator
from contextlib import closing
from math import cos, pi
from random import Random
from sqlite3 import Connection

import pytest
from harbour.arrivals import Arrival
from harbour.berths import Stay
from harbour.register import Call, import_calls, open_register
from harbour.soundings import Sounding
from harbour.tides import TideTable

PORTS = ("Northhaven", "Saltby", "Oyster Point", "Kelp Sound", "Farsund", "Millmouth", "Greyness", "Long Mole")
CONTENTS = "machine parts in crates, not to be stacked, to be kept dry, value as by invoice"
LOOK_UPS = 200
HALF_TIDE = 372.5  # minutes between high and low water


def container_id(rng: Random) -> str:
    return f"HRBU{rng.randrange(10**7):07}"


@pytest.fixture
def row_count() -> int:
    return 30


@pytest.fixture
def column_count() -> int:
    return 25


@pytest.fixture
def manifests(problem_size: int, workload_rng: Random) -> list[list[Arrival]]:
    """One manifest for each agent, three arrivals in each, in order of time."""
    return [
        sorted((workload_rng.randrange(100_000), f"CALL{agent}") for _ in range(3)) for agent in range(problem_size)
    ]


@pytest.fixture
def repeated_ids(problem_size: int, workload_rng: Random) -> list[str]:
    """Container ids, most of them sent more than once."""
    ids = [container_id(workload_rng) for _ in range((problem_size + 1) // 2)]
    return [workload_rng.choice(ids) for _ in range(problem_size)]


@pytest.fixture
def manifest_text(problem_size: int, workload_rng: Random) -> str:
    return "".join(
        f"{container_id(workload_rng)};{workload_rng.choice(PORTS)};{workload_rng.randrange(2, 31)};{CONTENTS}\n"
        for _ in range(problem_size)
    )


@pytest.fixture
def manifest_lines(problem_size: int) -> Iterator[str]:
    """Lines as they come down the wire: nobody holds them all."""
    return (f"HRBU{line:07};{PORTS[line % len(PORTS)]};7;{CONTENTS}\n" for line in range(problem_size))


@pytest.fixture
def stays(problem_size: int, workload_rng: Random) -> list[Stay]:
    """Stays of some hours, spread so that about four ships lie alongside at once."""
    moorings = [workload_rng.randrange(60 * problem_size) for _ in range(problem_size)]
    return [(moored, moored + workload_rng.randrange(30, 480)) for moored in moorings]


@pytest.fixture
def soundings(problem_size: int, workload_rng: Random) -> list[Sounding]:
    """Soundings on a loose grid, never nearer than 6 m; the last was taken half a metre from the first."""
    side = int(problem_size**0.5) + 1
    survey = [
        (10.0 * (i % side) + workload_rng.uniform(-2, 2), 10.0 * (i // side) + workload_rng.uniform(-2, 2))
        for i in range(problem_size)
    ]
    workload_rng.shuffle(survey)
    return [*survey, (survey[0][0], survey[0][1] + 0.5)]


@pytest.fixture
def transect(problem_size: int, workload_rng: Random) -> list[Sounding]:
    """Soundings along one meridian, 6 m apart or more, and one half a metre north of the first."""
    survey = [(500.0, 10.0 * i + workload_rng.uniform(-2, 2)) for i in range(problem_size)]
    workload_rng.shuffle(survey)
    return [*survey, (500.0, survey[0][1] + 0.5)]


@pytest.fixture(scope="module")
def tide_table(problem_size: int) -> TideTable:
    """High and low water in turn, through springs and neaps."""
    minutes = [HALF_TIDE * i for i in range(problem_size + 2)]
    heights = [(4.2 if i % 2 == 0 else 1.1) + 0.6 * cos(2 * pi * minute / 21_262) for i, minute in enumerate(minutes)]
    return TideTable(minutes, heights)


@pytest.fixture(scope="module")
def moments(problem_size: int) -> list[float]:
    """The high and low waters to look up: spread over the whole table, in no order."""
    rng = Random(problem_size)
    return [HALF_TIDE * rng.randrange(problem_size + 2) for _ in range(LOOK_UPS)]


@pytest.fixture
def draughts(problem_size: int, workload_rng: Random) -> list[int]:
    return [workload_rng.randrange(300, 1500) for _ in range(problem_size)]


@pytest.fixture
def day_rates(problem_size: int, workload_rng: Random) -> list[int]:
    return [workload_rng.randrange(60, 140) for _ in range(problem_size)]


@pytest.fixture
def lifts(problem_size: int, workload_rng: Random) -> list[int]:
    return [workload_rng.randrange(4, 40) for _ in range(problem_size)]


@pytest.fixture
def stowage_table(row_count: int, column_count: int, workload_rng: Random) -> list[list[int]]:
    return [[workload_rng.randrange(30) for _ in range(column_count)] for _ in range(row_count)]


@pytest.fixture
def calls(problem_size: int, workload_rng: Random) -> list[Call]:
    """Calls at the port; every ship calls about twice."""
    fleet = (problem_size + 1) // 2
    return [
        Call(f"C{ship:06}", f"Vessel {ship}", workload_rng.randrange(100, 9000))
        for ship in (workload_rng.randrange(fleet) for _ in range(problem_size))
    ]


@pytest.fixture
def register() -> Iterator[Connection]:
    with closing(open_register()) as connection:
        yield connection


@pytest.fixture
def filled_register(register: Connection, calls: list[Call]) -> Connection:
    import_calls(register, calls)
    return register


@pytest.fixture
def notes(problem_size: int, workload_rng: Random) -> list[str]:
    return [f"Berth {workload_rng.randrange(40)} clear, wind {workload_rng.randrange(9)}" for _ in range(problem_size)]
