"""Where and when a run was made: what a record must tell so that runs can be compared. No host or user name."""

from __future__ import annotations

import os
import platform
import uuid
from datetime import datetime, timezone
from functools import cache
from importlib import metadata
from typing import Any


def run_facts(*, seed: int, workers: int) -> dict[str, Any]:
    """A new run: its id, the time in UTC, the seed, and the number of worker processes (0: none, one process)."""
    now = datetime.now(timezone.utc).replace(microsecond=0)
    return {
        "id": uuid.uuid4().hex[:12],
        "time": now.isoformat().replace("+00:00", "Z"),
        "seed": seed,
        "workers": workers,
    }


@cache
def environment() -> dict[str, Any]:
    """Interpreter, operating system and kind of machine of this process, and the version of this package."""
    return {
        "python": platform.python_version(),
        "implementation": platform.python_implementation(),
        "platform": platform.platform(),
        "machine": platform.machine(),
        "processor": processor(),
        "cores": os.cpu_count() or 0,
        "version": package_version(),
    }


def package_version() -> str:
    """The version of the installed package; "" where it runs from a bare source tree."""
    try:
        return metadata.version("pytest_growthbudget")
    except metadata.PackageNotFoundError:
        return ""


def processor() -> str:
    """The processor's model name, "" where the system does not tell."""
    try:
        with open("/proc/cpuinfo", encoding="utf-8", errors="replace") as lines:
            for line in lines:
                name, _, value = line.partition(":")
                if name.strip() == "model name":
                    return value.strip()
    except OSError:
        pass
    return platform.processor()
