"""The machine that a study runs on: what it is, and how to keep it busy."""

from __future__ import annotations

import datetime
import os
import platform
import subprocess
import sys
from collections.abc import Iterator
from contextlib import contextmanager, suppress
from pathlib import Path

CACHES = Path("/sys/devices/system/cpu/cpu0/cache")
CPU_INFO = Path("/proc/cpuinfo")


def describe() -> str:
    """One line: processor, cores, caches, interpreter, numpy, date. What the platform does not tell is left out."""
    import numpy

    parts = [
        processor(),
        f"{os.cpu_count()} cores",
        caches(),
        f"{platform.python_implementation()} {platform.python_version()}",
        f"numpy {numpy.__version__}",
        platform.system(),
        datetime.date.today().isoformat(),
    ]
    return ", ".join(part for part in parts if part)


def processor() -> str:
    """The processor's model, or the machine type where the model is not told."""
    with suppress(OSError):
        for line in CPU_INFO.read_text().splitlines():
            if line.startswith("model name"):
                return line.split(":", 1)[1].strip()
    return platform.processor() or platform.machine()


def caches() -> str:
    """Sizes of the data caches of the first core, such as `L1 48K, L2 2048K`."""
    found = []
    for index in sorted(CACHES.glob("index*")) if CACHES.exists() else ():
        with suppress(OSError):
            if (index / "type").read_text().strip() != "Instruction":
                level, size = ((index / name).read_text().strip() for name in ("level", "size"))
                found.append(f"L{level} {size}")
    return ", ".join(found)


def busy_with() -> float:
    """Runnable processes, averaged over the last minute; 0.0 where the platform does not tell."""
    return os.getloadavg()[0] if hasattr(os, "getloadavg") else 0.0


@contextmanager
def every_core_busy(wanted: bool) -> Iterator[None]:
    """With `wanted`, one busy loop on each core for as long as the block lasts."""
    loops: list[subprocess.Popen[bytes]] = []
    try:
        if wanted:
            cores = sorted(os.sched_getaffinity(0)) if hasattr(os, "sched_getaffinity") else range(os.cpu_count() or 1)
            for core in cores:
                pin = f"os.sched_setaffinity(0, [{core}])" if hasattr(os, "sched_setaffinity") else "pass"
                # A loop whose parent is gone ends by itself.
                code = f"import os\n{pin}\nmother = os.getppid()\nwhile os.getppid() == mother: sum(range(10**6))"
                loops.append(subprocess.Popen([sys.executable, "-c", code]))
        yield
    finally:
        for loop in loops:
            loop.kill()
            loop.wait()
