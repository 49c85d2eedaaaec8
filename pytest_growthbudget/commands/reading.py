"""What commands say of records files that could not be read whole."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TextIO

from pytest_growthbudget.reporting.records import Fault

SHOWN = 20


def said_faults(faults: Sequence[Fault], error: TextIO) -> int:
    """Write the faults, and return the exit code: 2 where there are any."""
    for fault in faults[:SHOWN]:
        error.write(f"{fault}\n")
    if len(faults) > SHOWN:
        error.write(f"and {len(faults) - SHOWN} faults more\n")
    return 2 if faults else 0
