"""The fixtures that a budgeted test may ask for. Without a budget they behave as a plain test expects."""

from __future__ import annotations

import random
from typing import TYPE_CHECKING, Any

import pytest

from pytest_growthbudget.settings import Settings

if TYPE_CHECKING:
    from types import TracebackType

    from pytest_growthbudget.measuring.guards import Watch
    from pytest_growthbudget.meters.protocol import Meter

#: The settings of the run.
settings_key = pytest.StashKey[Settings]()
#: What one session shares between the fixtures and the readings.
shared_key = pytest.StashKey["Shared"]()


class Shared:
    """What the fixtures of one session hand out, and what the reading in progress sets."""

    def __init__(self, ordinary_size: int, seed: int) -> None:
        self.ordinary_size = ordinary_size
        self.seed = seed
        self.rng = random.Random(seed)
        self.metered = Metered()
        self.tally: Any = None
        #: The watch over the test in progress.
        self.watch: Watch | None = None

    def reseed(self, test: str, size: int, reading: int) -> None:
        """Make the next workload a function of the seed, the test, the size and the reading, and of nothing else."""
        self.rng.seed(f"{self.seed}/{test}/{size}/{reading}")

    def fresh_tally(self) -> Any:
        if self.tally is None:
            from pytest_growthbudget.meters.tallies import Tally

            self.tally = Tally()
        return self.tally


class Metered:
    """Limits what is read to the code inside `with metered:`; several such blocks in one call add up.

    In a test without a budget, or where `--growth off` is given, it does nothing.
    """

    def __init__(self) -> None:
        self._meter: Meter | None = None
        self._depth = 0
        self.cost: float = 0
        self.entered = 0

    def arm(self, meter: Meter | None) -> None:
        """Begin a reading with `meter`; None ends it."""
        self._meter = meter
        self._depth = 0
        self.cost = 0
        self.entered = 0

    def __call__(self) -> Metered:
        return self

    def __enter__(self) -> Metered:
        self.entered += 1
        self._depth += 1
        if self._meter is not None and self._depth == 1:
            self._meter.start()
        return self

    def __exit__(
        self,
        kind: type[BaseException] | None,
        value: BaseException | None,
        traceback: TracebackType | None,
    ) -> None:
        if self._meter is not None and self._depth == 1:
            from pytest_growthbudget.meters.protocol import checked_cost

            try:
                self.cost += checked_cost(self._meter, self._meter.stop())
            except Exception:
                # What the meter has to say of a call that was cut short must not hide why it was.
                if value is None:
                    raise
        self._depth -= 1


@pytest.fixture(scope="session")
def problem_size(pytestconfig: pytest.Config) -> int:
    """The problem size n: set by the growth budget of the test, `ordinary_size` (100) in a test without one."""
    return pytestconfig.stash[shared_key].ordinary_size


@pytest.fixture(scope="session")
def workload_rng(pytestconfig: pytest.Config) -> random.Random:
    """A random.Random for building workloads, seeded anew for each reading by seed, test, size and reading."""
    return pytestconfig.stash[shared_key].rng


@pytest.fixture
def metered(pytestconfig: pytest.Config) -> Metered:
    """A context manager: only the code inside counts. Without it the whole body of the test counts."""
    return pytestconfig.stash[shared_key].metered


@pytest.fixture
def tally(pytestconfig: pytest.Config) -> Any:
    """Counts what a budget with the meter `tally:NAME` reads.

    `tally.keys(values)` wraps values so that their comparisons, equality tests and hashes are counted even when
    C code makes them; `tally.add("queries")` counts anything.
    """
    return pytestconfig.stash[shared_key].fresh_tally()
