"""Records: the shipped schema, reading what is broken, and writing so that nothing is lost."""

from __future__ import annotations

import copy
import errno
import json
import os
import random
import subprocess
import sys
import time
from pathlib import Path
from typing import Any

import jsonschema
import pytest

from pytest_growthbudget.reporting import files
from pytest_growthbudget.reporting.environment import environment, run_facts
from pytest_growthbudget.reporting.records import (
    NotWritten,
    RecordsFile,
    latest,
    line_of,
    parse_line,
    read_records,
    record_of,
)
from pytest_growthbudget.reporting.schema import compiled, fault_of, schema
from tests.reporting.samples import RECORDS, real_records, record, write

VALIDATOR = jsonschema.Draft202012Validator(schema())


# ------------------------------------------------------------------ the schema


def test_the_schema_is_a_schema() -> None:
    jsonschema.Draft202012Validator.check_schema(schema())


def test_records_of_the_sample_project_fit_the_schema() -> None:
    lines = RECORDS.read_text(encoding="utf-8").splitlines()
    assert len(lines) == 8
    for line in lines:
        VALIDATOR.validate(json.loads(line))


def test_a_record_made_here_fits_the_schema() -> None:
    judged = real_records()[0]["judgement"]
    made = record_of({"test": "a.py::b", **judged}, run_facts(seed=7, workers=2), environment())
    VALIDATOR.validate(json.loads(line_of(made)))
    assert made["run"]["seed"] == 7
    assert made["run"]["workers"] == 2


def test_no_host_or_user_name_in_the_environment() -> None:
    import getpass
    import platform

    said = " ".join(str(value).lower() for value in environment().values()).split()
    assert platform.node().lower() not in said
    assert getpass.getuser().lower() not in said


WORSE: list[Any] = [None, True, False, 1, 1.5, 2.0, -1, "", "text", [], ["text"], [1], {}, {"low": 1}, float("1e300")]


def mutated(draw: random.Random, value: Any) -> Any:
    """A copy with one entry, anywhere, taken away or put to something else."""
    value = copy.deepcopy(value)
    place, key, holder = value, None, None
    while isinstance(place, (dict, list)) and place and (holder is None or draw.random() < 0.75):
        holder = place
        key = draw.choice(sorted(holder)) if isinstance(holder, dict) else draw.randrange(len(holder))
        place = holder[key]
    assert holder is not None
    if isinstance(holder, dict) and draw.random() < 0.3:
        del holder[key]
    else:
        holder[key] = draw.choice(WORSE)
    return value


def test_the_check_agrees_with_the_jsonschema_library() -> None:
    draw = random.Random(20)
    whole = real_records()
    verdicts = []
    for _ in range(1500):
        broken = mutated(draw, draw.choice(whole))
        verdicts.append(VALIDATOR.is_valid(broken))
        assert (fault_of(broken) == "") == verdicts[-1], broken
    assert 100 < sum(verdicts) < 1400


def test_a_word_of_json_schema_that_is_not_known_is_refused() -> None:
    with pytest.raises(ValueError, match="'maxItems'"):
        compiled({"maxItems": 3}, {})


# ------------------------------------------------------------------ reading


def test_what_is_written_is_read(tmp_path: Path) -> None:
    records = real_records()
    kept = read_records([write(tmp_path / "records.jsonl", records)])
    assert kept.records == tuple(records)
    assert kept.faults == ()


FAULTY_LINES = {
    "not json": (b'{"schema": 1,', "not JSON: expecting property name enclosed in double quotes at column 14"),
    "a list": (b"[]", "not a record: expected a JSON object"),
    "newer": (
        b'{"schema": 2}',
        "schema 2 is newer than the schema 1 that this version reads; upgrade pytest_growthbudget to read it",
    ),
    "older": (b'{"schema": 0}', "schema 0 is older than the schema 1 that this version reads"),
    "no schema": (b'{"test": "a"}', "not a record: schema is missing"),
    "not utf-8": (b'{"test": "\xff"}', "not UTF-8 at byte 11"),
    "nan": (b'{"schema": NaN}', "not JSON: NaN is no number in JSON"),
    "deep": (b"[" * 100000, "not JSON: "),
    "conflict": (b"<<<<<<< HEAD", "not JSON: expecting value at column 1"),
}


@pytest.mark.parametrize("name", FAULTY_LINES)
def test_a_faulty_line_is_told_and_passed_over(name: str, tmp_path: Path) -> None:
    line, message = FAULTY_LINES[name]
    good = line_of(record(1.0))
    path = tmp_path / "records.jsonl"
    path.write_bytes(good + line + b"\n\n" + good)
    kept = read_records([path])
    assert len(kept.records) == 2
    (fault,) = kept.faults
    assert str(fault).startswith(f"{path}:2: {message}")
    assert "\n" not in str(fault)


def test_a_missing_entry_is_named_by_its_path() -> None:
    broken = record(1.0)
    del broken["judgement"]["sizes"][3]["cost"]
    assert parse_line(line_of(broken)) == (None, "not a record: judgement.sizes[3].cost is missing")


def test_a_last_line_that_was_cut_off(tmp_path: Path) -> None:
    path = tmp_path / "records.jsonl"
    path.write_bytes(line_of(record(1.0)) + line_of(record(1.1))[:200])
    kept = read_records([path])
    assert len(kept.records) == 1
    assert [str(fault) for fault in kept.faults] == [
        f"{path}:2: the last line is cut off, as when a run is killed while it writes; it was skipped"
    ]


def test_files_that_cannot_be_read(tmp_path: Path) -> None:
    kept = read_records([tmp_path / "none.jsonl", tmp_path])
    assert [str(fault) for fault in kept.faults] == [
        f"{tmp_path / 'none.jsonl'}: no such file or directory",
        f"{tmp_path}: is a directory",
    ]


def test_a_record_older_than_an_entry_reads_as_if_it_were_at_rest() -> None:
    early = record(1.0)
    for later in ("variable", "ray", "rays", "ceiling", "yardstick"):
        del early["judgement"][later]
    VALIDATOR.validate(early)
    found, message = parse_line(line_of(early))
    assert message == ""
    assert found is not None
    assert found["judgement"]["variable"] == "n"
    assert found["judgement"]["rays"] == []


def test_entries_of_later_versions_are_kept() -> None:
    later = record(1.0)
    later["judgement"]["weather"] = "fog"
    later["tide"] = {"high": 3}
    found, _ = parse_line(line_of(later))
    assert found is not None
    assert found["judgement"]["weather"] == "fog"
    assert found["tide"] == {"high": 3}


def test_ten_thousand_records_take_no_longer_than_their_number(tmp_path: Path) -> None:
    one = real_records()
    path = write(tmp_path / "records.jsonl", one * 125)
    few = min(_seconds_to_read(path, 1000) for _ in range(2))
    write(path, one * 1250)
    many = _seconds_to_read(path, 10_000)
    # Ten times the records: far from a hundred times the time.
    assert many < 40 * few


def _seconds_to_read(path: Path, count: int) -> float:
    began = time.process_time()
    assert len(read_records([path]).records) == count
    return time.process_time() - began


def test_node_ids_of_any_kind_survive() -> None:
    for test in ("tests/t.py::test[ü-日本]", "t.py::test[\ud800]", 't.py::test["\\\n]'):
        found, message = parse_line(line_of(record(1.0, test=test)))
        assert (found or {}).get("test") == test, message


def test_the_newest_record_counts() -> None:
    old, new = record(1.0, time="2026-03-01T08:00:00Z"), record(1.2, time="2026-03-02T08:00:00Z")
    ((_, found),) = latest([new, old]).items()
    assert found is new


# ------------------------------------------------------------------ writing


def test_a_run_is_added_to_what_is_there(tmp_path: Path) -> None:
    path = write(tmp_path / "records.jsonl", [record(1.0, run="a")])
    before = path.read_bytes()
    file = RecordsFile(path, "b")
    file.keep(record(1.1, run="b"))
    assert path.read_bytes() == before, "nothing is added before the run ends"
    file.finish()
    assert path.read_bytes().startswith(before)
    assert [each["run"]["id"] for each in read_records([path]).records] == ["a", "b"]
    assert os.listdir(tmp_path) == ["records.jsonl"]


def test_a_torn_line_spoils_no_other(tmp_path: Path) -> None:
    path = tmp_path / "records.jsonl"
    path.write_bytes(line_of(record(1.0, run="a")) + b'{"schema": 1, "ru')
    file = RecordsFile(path, "b")
    file.keep(record(1.1, run="b"))
    file.finish()
    kept = read_records([path])
    assert [each["run"]["id"] for each in kept.records] == ["a", "b"]
    assert [fault.line for fault in kept.faults] == [2]


def test_a_run_without_judgements_leaves_a_file(tmp_path: Path) -> None:
    RecordsFile(tmp_path / "records.jsonl", "a").finish()
    assert (tmp_path / "records.jsonl").read_bytes() == b""


KILLED = """
import os, signal, sys
from pathlib import Path
from pytest_growthbudget.reporting.records import RecordsFile
from tests.reporting.samples import record
file = RecordsFile(Path(sys.argv[1]), "killed")
for number in range(3):
    file.keep(record(1.0 + number / 10, run="killed", test=f"t.py::test_{number}"))
print("kept", flush=True)
if sys.argv[2] == "wait":
    sys.stdin.readline()
os.kill(os.getpid(), signal.SIGKILL)
"""


def run_script(script: str, *arguments: str) -> subprocess.Popen[str]:
    root = Path(__file__).parent.parent.parent
    return subprocess.Popen(
        [sys.executable, "-c", script, *arguments],
        cwd=root,
        stdin=subprocess.PIPE,
        stdout=subprocess.PIPE,
        text=True,
    )


@pytest.mark.skipif(not hasattr(__import__("signal"), "SIGKILL"), reason="no SIGKILL on this system")
def test_the_next_run_takes_up_what_a_killed_run_kept(tmp_path: Path) -> None:
    path = tmp_path / "records.jsonl"
    with run_script(KILLED, str(path), "now") as process:
        process.wait()
    assert not path.exists()
    (journal,) = tmp_path.iterdir()
    assert len(read_records([journal]).records) == 3, "the journal is a records file itself"
    file = RecordsFile(path, "next")
    file.keep(record(1.0, run="next"))
    file.finish()
    assert file.adopted == 3
    assert [each["run"]["id"] for each in read_records([path]).records] == ["next", "killed", "killed", "killed"]
    assert os.listdir(tmp_path) == ["records.jsonl"]


@pytest.mark.skipif(not hasattr(__import__("signal"), "SIGKILL"), reason="no SIGKILL on this system")
def test_the_journal_of_a_run_that_goes_on_is_left_alone(tmp_path: Path) -> None:
    path = tmp_path / "records.jsonl"
    with run_script(KILLED, str(path), "wait") as process:
        assert process.stdout is not None
        assert process.stdin is not None
        assert process.stdout.readline() == "kept\n"
        file = RecordsFile(path, "next")
        file.keep(record(1.0, run="next"))
        file.finish()
        assert file.adopted == 0
        assert len(list(tmp_path.iterdir())) == 2
        process.stdin.write("\n")
        process.stdin.flush()
        process.wait()


APPENDING = """
import sys
from pathlib import Path
from pytest_growthbudget.reporting.records import RecordsFile
from tests.reporting.samples import record
for number in range(20):
    file = RecordsFile(Path(sys.argv[1]), f"{sys.argv[2]}-{number}")
    file.keep(one := record(1.0, run=f"{sys.argv[2]}-{number}")) if number == 0 else file.keep(
        {**one, "run": {**one["run"], "id": f"{sys.argv[2]}-{number}"}}
    )
    file.finish()
"""


def test_runs_at_the_same_time_lose_nothing(tmp_path: Path) -> None:
    path = tmp_path / "records.jsonl"
    processes = [run_script(APPENDING, str(path), str(number)) for number in range(3)]
    for process in processes:
        with process:
            process.communicate()
        assert process.returncode == 0
    kept = read_records([path])
    assert kept.faults == ()
    assert sorted(each["run"]["id"] for each in kept.records) == sorted(f"{p}-{n}" for p in range(3) for n in range(20))


def test_a_full_disk_leaves_the_file_as_it_was(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = write(tmp_path / "records.jsonl", [record(1.0, run="a")])
    before = path.read_bytes()
    file = RecordsFile(path, "b")
    file.keep(record(1.1, run="b"))
    whole = os.write

    def half(descriptor: int, content: bytes) -> int:
        if len(content) > 100:
            return whole(descriptor, bytes(content[:100]))
        raise OSError(errno.ENOSPC, "No space left on device")

    monkeypatch.setattr(os, "write", half)
    with pytest.raises(NotWritten) as told:
        file.finish()
    monkeypatch.undo()
    assert path.read_bytes() == before
    assert told.value.rescued == file.journal
    assert str(told.value) == (
        f"growth records not written to {path}: no space left on device; they are kept in {file.journal}"
    )
    assert len(read_records([file.journal]).records) == 1


def test_without_a_directory_the_records_are_kept_elsewhere(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path))
    file = RecordsFile(tmp_path / "none" / "records.jsonl", "a")
    file.keep(record(1.0))
    with pytest.raises(NotWritten, match="no such file or directory; they are kept in") as told:
        file.finish()
    assert told.value.rescued is not None
    assert len(read_records([told.value.rescued]).records) == 1


@pytest.mark.skipif(not os.path.exists("/dev/full"), reason="no /dev/full on this system")
def test_a_full_device(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    monkeypatch.setattr("tempfile.tempdir", str(tmp_path))
    devices = sorted(os.listdir("/dev"))
    file = RecordsFile(Path("/dev/full"), "a")
    file.keep(record(1.0))
    with pytest.raises(NotWritten, match="no space left on device; they are kept in"):
        file.finish()
    assert sorted(os.listdir("/dev")) == devices


def test_replacing_keeps_permissions_and_links(tmp_path: Path) -> None:
    path, link = tmp_path / "page.html", tmp_path / "link.html"
    path.write_text("old")
    path.chmod(0o640)
    link.symlink_to(path)
    files.replace_file(link, b"new")
    assert link.is_symlink()
    assert path.read_text() == "new"
    assert path.stat().st_mode & 0o777 == 0o640
    assert sorted(os.listdir(tmp_path)) == ["link.html", "page.html"]


def test_a_file_that_cannot_be_replaced_stays(tmp_path: Path, monkeypatch: pytest.MonkeyPatch) -> None:
    path = tmp_path / "page.html"
    path.write_text("old")

    def refuse(*_: object) -> None:
        raise OSError(errno.EACCES, "Permission denied")

    monkeypatch.setattr(os, "replace", refuse)
    with pytest.raises(OSError, match="Permission denied"):
        files.replace_file(path, b"new")
    assert path.read_text() == "old"
    assert os.listdir(tmp_path) == ["page.html"]
