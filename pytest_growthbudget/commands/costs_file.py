"""Sizes and costs from a text file of columns, as logs and spreadsheets give them; faults name the line."""

from __future__ import annotations

import csv
import io
import math
from collections.abc import Sequence
from dataclasses import dataclass
from pathlib import Path

DELIMITERS = ",;\t"


class CostsError(Exception):
    """A file of costs that cannot be used; the message names file, line and column, and what was expected."""


@dataclass(frozen=True, slots=True, kw_only=True)
class Costs:
    """Sizes, shape (m,), with the costs read at each, m lists that may differ in length."""

    sizes: tuple[int, ...]
    costs: tuple[tuple[float, ...], ...]


Row = tuple[int, list[str]]


def read_costs(path: Path, *, size_column: str | None = None, cost_columns: Sequence[str] = ()) -> Costs:
    """The costs of a file of columns with commas, semicolons or tabs between them, with or without a heading line.

    `size_column` and `cost_columns` are names in the heading, or numbers from 1; by default the first column is the
    size and every other one a cost. A size may be in several rows. Cells without text, lines without any and lines
    that begin with # are passed over. Raises `CostsError`.
    """
    name = str(path)
    rows = _rows(name, _text(path))
    heading = _heading(rows)
    names = heading[1] if heading else []
    width = max(len(cells) for _, cells in rows)
    size_at = 0 if size_column is None else _place(name, size_column, names, width)
    costs_at = [_place(name, each, names, width) for each in cost_columns]
    if not costs_at:
        costs_at = [index for index in range(width) if index != size_at]
    if size_at in costs_at:
        raise CostsError(f"{name}: column {_called(size_at, names)} cannot be both the size and a cost")
    if not costs_at:
        raise CostsError(f"{name}: there is one column; give a column of sizes and one or more of costs")
    body = rows[1:] if heading else rows
    together: dict[int, list[float]] = {}
    for line, cells in body:
        size = _size(name, line, cells, size_at, names)
        costs = [_cost(name, line, cells[at], at, names) for at in costs_at if at < len(cells) and cells[at]]
        if not costs:
            raise CostsError(f"{name}:{line}: no cost for the size {size}; leave the line out, or fill the cost in")
        together.setdefault(size, []).extend(costs)
    if not together:
        raise CostsError(f"{name}: no line of sizes and costs")
    sizes = tuple(sorted(together))
    return Costs(sizes=sizes, costs=tuple(tuple(together[size]) for size in sizes))


def _text(path: Path) -> str:
    try:
        raw = path.read_bytes()
    except OSError as error:
        raise CostsError(f"{path}: {(error.strerror or str(error)).lower()}") from None
    if raw[:2] in (b"\xff\xfe", b"\xfe\xff"):
        raise CostsError(f"{path}: the file is in UTF-16; save it in UTF-8")
    try:
        return raw.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        line = raw.count(b"\n", 0, error.start) + 1
        raise CostsError(f"{path}:{line}: not UTF-8; save the file in UTF-8") from None


def _rows(name: str, text: str) -> list[Row]:
    """Each line with any text, by its number, cut into cells."""
    lines = text.splitlines(keepends=True)
    first = next((line for line in lines if line.strip() and not line.startswith("#")), "")
    if not first:
        raise CostsError(f"{name}: the file is empty; give a column of sizes and one or more of costs")
    delimiter = max(DELIMITERS, key=first.count)
    reader = csv.reader(io.StringIO(text, newline=""), delimiter=delimiter, skipinitialspace=True)
    rows: list[Row] = []
    try:
        for cells in reader:
            stripped = [cell.strip() for cell in cells]
            if any(stripped) and not stripped[0].startswith("#"):
                rows.append((reader.line_num, stripped))
    except csv.Error as error:
        raise CostsError(f"{name}:{reader.line_num}: {error}") from None
    if not rows:
        raise CostsError(f"{name}: every line is empty; give a column of sizes and one or more of costs")
    return rows


def _heading(rows: Sequence[Row]) -> Row | None:
    """The first row, where none of its cells is a number."""
    first = rows[0]
    return None if any(_number(cell) is not None for cell in first[1]) else first


def _place(name: str, column: str, names: Sequence[str], width: int) -> int:
    if column in names:
        return names.index(column)
    if column.isdecimal() and 1 <= int(column) <= width:
        return int(column) - 1
    there = "columns: " + ", ".join(names) if names else f"there is no heading; columns are numbers, 1 to {width}"
    raise CostsError(f"{name}: no column {column!r}; {there}")


def _called(at: int, names: Sequence[str]) -> str:
    return f"{names[at]!r}" if at < len(names) and names[at] else str(at + 1)


def _size(name: str, line: int, cells: Sequence[str], at: int, names: Sequence[str]) -> int:
    where = f"{name}:{line}: column {_called(at, names)}"
    cell = cells[at] if at < len(cells) else ""
    value = _number(cell)
    if value is None:
        raise CostsError(f"{where}: expected a size, got {cell!r}{_hint(cell)}")
    if not math.isfinite(value) or value < 1 or value != int(value):
        raise CostsError(f"{where}: a size is a whole number of at least 1, got {cell!r}")
    return int(value)


def _cost(name: str, line: int, cell: str, at: int, names: Sequence[str]) -> float:
    where = f"{name}:{line}: column {_called(at, names)}"
    value = _number(cell)
    if value is None:
        choose = "" if _hint(cell) else "; choose the columns of costs with --cost-column"
        raise CostsError(f"{where}: expected a cost, got {cell!r}{_hint(cell)}{choose}")
    if not math.isfinite(value) or value <= 0:
        raise CostsError(f"{where}: a cost is a positive number, got {cell!r}")
    return value


def _number(cell: str) -> float | None:
    if "_" in cell:  # Python reads 1_000 as a number; no other program writes it
        return None
    try:
        return float(cell)
    except ValueError:
        return None


def _hint(cell: str) -> str:
    plain = cell.replace(",", "").replace(" ", "").replace("\u00a0", "")
    if plain != cell and _number(plain) is not None:
        return "; write numbers without separators, with a point before the decimals"
    return ""
