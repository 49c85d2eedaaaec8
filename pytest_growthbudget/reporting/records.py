"""Records: judgements kept as JSON Lines, one a line, in the form that `record.schema.json` describes.

Only the controller writes. While a run goes on, each judgement is kept in a journal beside the records file, so
that a run that is killed loses nothing; at the end the whole run is added to the records file at once. A later run
adds what the journals of killed runs hold.
"""

from __future__ import annotations

import json
import os
import tempfile
from collections.abc import Iterable, Mapping, Sequence
from contextlib import suppress
from dataclasses import MISSING, dataclass, field, fields
from functools import cache
from pathlib import Path
from typing import Any

from pytest_growthbudget.fitting.judgement import Judgement
from pytest_growthbudget.reporting import files
from pytest_growthbudget.reporting.schema import fault_of
from pytest_growthbudget.reporting.wire import plain

SCHEMA = 1
JOURNAL = ".unfinished"
_COUNTED = ("steps", "peak_memory", "tally")
_FLAT = 0.2

Record = dict[str, Any]


@dataclass(frozen=True, slots=True, kw_only=True)
class Fault:
    """A line that is no record, or a file that could not be read (`line` 0)."""

    file: str
    line: int
    message: str

    def __str__(self) -> str:
        return f"{self.file}:{self.line}: {self.message}" if self.line else f"{self.file}: {self.message}"


@dataclass(frozen=True, slots=True, kw_only=True)
class Kept:
    """What the files hold: the records, in the order of the files and lines, and what could not be read."""

    records: tuple[Record, ...] = ()
    faults: tuple[Fault, ...] = ()


# ------------------------------------------------------------------ reading


def read_records(paths: Iterable[str | os.PathLike[str]]) -> Kept:
    """The records of several files. A line that is broken, or of a schema that is not known, becomes a fault."""
    records: list[Record] = []
    faults: list[Fault] = []
    for path in paths:
        name = os.fspath(path)
        try:
            content = Path(path).read_bytes()
        except OSError as error:
            faults.append(Fault(file=name, line=0, message=files.reason(error)))
            continue
        _read(name, content, records, faults)
    return Kept(records=tuple(records), faults=tuple(faults))


def _read(name: str, content: bytes, records: list[Record], faults: list[Fault]) -> None:
    lines = content.split(b"\n")
    torn = len(lines) if lines[-1].strip() else 0
    for number, line in enumerate(lines, 1):
        if not line.strip():
            continue
        record, message = parse_line(line)
        if record is not None:
            records.append(record)
        elif number == torn and message.startswith("not JSON"):
            cut = "the last line is cut off, as when a run is killed while it writes; it was skipped"
            faults.append(Fault(file=name, line=number, message=cut))
        else:
            faults.append(Fault(file=name, line=number, message=message))


def parse_line(line: bytes) -> tuple[Record | None, str]:
    """The record that a line holds, or None and what is wrong with it."""
    try:
        record = json.loads(line.decode("utf-8-sig"), parse_constant=_not_a_number)
    except UnicodeDecodeError as error:
        return None, f"not UTF-8 at byte {error.start + 1}"
    except json.JSONDecodeError as error:
        return None, f"not JSON: {error.msg.lower()} at column {error.colno}"
    except (ValueError, RecursionError) as error:
        return None, f"not JSON: {error}"
    if not isinstance(record, dict):
        return None, "not a record: expected a JSON object"
    version = record.get("schema")
    if isinstance(version, int) and not isinstance(version, bool) and version != SCHEMA:
        age = "newer" if version > SCHEMA else "older"
        mend = "; upgrade pytest_growthbudget to read it" if version > SCHEMA else ""
        return None, f"schema {version} is {age} than the schema {SCHEMA} that this version reads{mend}"
    message = fault_of(record)
    if message:
        return None, f"not a record: {message}"
    record["judgement"] = {**_later_entries(), **record["judgement"]}
    return record, ""


@cache
def _later_entries() -> dict[str, Any]:
    """What a record written before a judgement had some entry says there."""
    return {item.name: plain(item.default) for item in fields(Judgement) if item.default is not MISSING}


def _not_a_number(text: str) -> float:
    raise ValueError(f"{text} is no number in JSON")


# ------------------------------------------------------------------ writing


def record_of(judged: Mapping[str, Any], run: Mapping[str, Any], environment: Mapping[str, Any]) -> Record:
    """The record of one judgement in wire form, which carries its `test`."""
    judgement = {name: value for name, value in judged.items() if name != "test"}
    return {
        "schema": SCHEMA,
        "run": dict(run),
        "environment": dict(environment),
        "test": judged["test"],
        "judgement": judgement,
    }


def line_of(record: Mapping[str, Any]) -> bytes:
    """A record as one line, its end included."""
    text = json.dumps(record, ensure_ascii=False, allow_nan=False, separators=(",", ":"))
    # A node id may hold half of a surrogate pair, which UTF-8 cannot.
    return text.encode("utf-8", errors="backslashreplace") + b"\n"


@dataclass(slots=True)
class RecordsFile:
    """The records file of a run that goes on. `keep` each record, then `finish` once."""

    path: Path
    run_id: str
    lines: list[bytes] = field(default_factory=list)
    adopted: int = 0
    _journal: int | None = None
    _trusted: bool = True

    @property
    def journal(self) -> Path:
        return self.path.with_name(f"{self.path.name}.{self.run_id}{JOURNAL}")

    def keep(self, record: Mapping[str, Any]) -> None:
        """Keep a record until `finish`. That the journal cannot be written is no reason to stop the run."""
        line = line_of(record)
        self.lines.append(line)
        if not self._trusted:
            return
        try:
            if self._journal is None:
                if self.path.exists() and not self.path.is_file():  # a device: its folder is no place for files
                    self._trusted = False
                    return
                self._journal = os.open(self.journal, os.O_RDWR | os.O_CREAT | os.O_APPEND | files.BINARY, 0o666)
                files.try_lock(self._journal)
            files.write(self._journal, line)
        except OSError:
            self._trusted = False

    def finish(self) -> None:
        """Add the run to the records file, with what the journals of killed runs hold.

        Raises `NotWritten`, which says where the records were put instead.
        """
        orphans = [found for found in self._journals() if found != self.journal]
        try:
            files.append(self.path, b"".join(self.lines))
        except OSError as error:
            raise NotWritten(self.path, files.reason(error), self._rescue()) from None
        self._close()
        with suppress(OSError):
            self.journal.unlink()
        for orphan in orphans:
            with suppress(OSError):
                self.adopted += _adopt(orphan, self.path)

    def _journals(self) -> list[Path]:
        try:
            names = os.listdir(self.path.parent)
        except OSError:
            return []
        ours = sorted(name for name in names if name.startswith(self.path.name + ".") and name.endswith(JOURNAL))
        return [self.path.with_name(name) for name in ours]

    def _rescue(self) -> Path | None:
        """Where the records of this run are, now that their file could not be written; None: nowhere."""
        self._close()
        if self._trusted and self.lines and self.journal.exists():
            return self.journal
        with suppress(OSError):
            self.journal.unlink()
        try:
            handle, name = tempfile.mkstemp(prefix="growth-records-", suffix=".jsonl")
            with os.fdopen(handle, "wb") as file:
                file.writelines(self.lines)
        except OSError:
            return None
        return Path(name)

    def _close(self) -> None:
        if self._journal is not None:
            os.close(self._journal)
            self._journal = None


def _adopt(orphan: Path, path: Path) -> int:
    """Move the whole records of a killed run's journal into the records file; 0 where that run still goes on."""
    descriptor = os.open(orphan, os.O_RDWR | files.BINARY)
    try:
        if files.try_lock(descriptor) is not True:
            return 0
        with open(descriptor, "rb", closefd=False) as file:
            lines = [line + b"\n" for line in file.read().split(b"\n") if parse_line(line)[0] is not None]
        if lines:
            files.append(path, b"".join(lines))
        # Removed while the lock is held: no other run can adopt it too.
        with suppress(PermissionError):
            orphan.unlink()
    finally:
        os.close(descriptor)
    return len(lines)


class NotWritten(Exception):
    """The records file could not be written. `rescued`: the file that holds the records of the run instead."""

    def __init__(self, path: Path, why: str, rescued: Path | None) -> None:
        self.rescued = rescued
        kept = f"; they are kept in {rescued}" if rescued else "; they are lost, as no other place could be written"
        super().__init__(f"growth records not written to {path}: {why}{kept}")


# ------------------------------------------------------------------ one budget over several runs


def budget_key(record: Record) -> tuple[str, str]:
    """What a budget is known by over several runs: the test and the meter."""
    return record["test"], record["judgement"]["meter"]


def in_time(records: Sequence[Record]) -> list[Record]:
    """The records by time of their run; those of one moment stay in the order given."""
    return sorted(records, key=lambda record: record["run"]["time"])


def latest(records: Sequence[Record]) -> dict[tuple[str, str], Record]:
    """The newest record of each budget."""
    return {budget_key(record): record for record in in_time(records)}


def is_counted(meter: str) -> bool:
    """Whether the meter's readings are counts without noise; a meter of the user's own is taken to have noise."""
    return meter.partition(":")[0] in _COUNTED


def is_flat(judgement: Mapping[str, Any]) -> bool:
    """Whether the budget hardly grows, so that its exponent is that of the whole cost at the largest size."""
    exponent, excess = judgement["exponent"], judgement["excess"]
    return bool(exponent and excess and exponent["estimate"] - excess["estimate"] < _FLAT)
