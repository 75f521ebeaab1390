"""Read one comma-separated table into typed rows, and report every fault at once.

A table is described by a `Schema`: its columns in order, what each may hold, and
which columns form its key. `read_table` turns text into rows of a table; nothing is
skipped and nothing is guessed. A cell that does not fit becomes a fault of the form
``file:line:column: what, allowed`` and the row counts as broken.

UTF-8 with or without a byte-order mark, and any of the usual line ends, are accepted.
Numbers are written as plain decimals; words, ``nan``, ``inf``, thousands separators
and comparison signs are refused. What the rows mean together (references between
tables, chemistry) is the matter of `formbuf.library.audit`.
"""

from __future__ import annotations

import csv
import io
import re
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass, field
from typing import Literal

Kind = Literal["text", "id", "ids", "number", "integer", "flag", "counts", "amounts"]
Cell = str | float | int | bool | tuple[str, ...] | Mapping[str, float] | None

#: Faults that are told before the rest is only said to be there.
MOST_FAULTS = 5000
_NUMBER = re.compile(r"[+-]?(\d+(\.\d*)?|\.\d+)([eE][+-]?\d+)?")
_INTEGER = re.compile(r"[+-]?\d+")
_ID = re.compile(r"[a-z][a-z0-9_]*")
_FLAGS = {"yes": True, "no": False}


@dataclass(frozen=True, slots=True)
class Column:
    """What one column of a table may hold.

    Parameters
    ----------
    name : str
        Heading, with the unit of the quantity in it.
    kind : {"text", "id", "ids", "number", "integer", "flag", "counts", "amounts"}
        ``id`` is lower_snake; ``ids`` several of them separated by blanks; ``flag``
        is ``yes`` or ``no``; ``counts`` is ``name:number name:number`` and
        ``amounts`` the same with ``=``.
    required : bool
        Whether an empty cell is a fault.
    low, high : float, optional
        Smallest and largest number allowed.
    choices : tuple of str
        The only texts allowed; empty allows any.
    refers_to : str
        Table whose key this id (or each id, or each name of the pairs) must be.
    """

    name: str
    kind: Kind = "text"
    required: bool = False
    low: float | None = None
    high: float | None = None
    choices: tuple[str, ...] = ()
    refers_to: str = ""


@dataclass(frozen=True, slots=True)
class Schema:
    """Name, columns and key of one table.

    Parameters
    ----------
    name : str
        Path below ``knowledge/``, for example ``"species.csv"`` or
        ``"freezing/pitzer.csv"``.
    columns : tuple of Column
        In the order of the file.
    key : tuple of str
        Columns that together identify a row; empty where rows have no key. In an
        overlay, a row replaces the row of the same key.
    """

    name: str
    columns: tuple[Column, ...]
    key: tuple[str, ...]


@dataclass(frozen=True, slots=True)
class Row:
    """One row of a table, with where it stands."""

    file: str
    line: int
    values: Mapping[str, Cell]
    overlay: bool = False

    def __getitem__(self, column: str) -> Cell:
        return self.values[column]

    def text(self, column: str) -> str:
        """Return the text of a column, empty where the cell is empty."""
        value = self.values[column]
        return value if isinstance(value, str) else ""

    def number(self, column: str) -> float | None:
        """Return the number of a column, None where the cell is empty."""
        value = self.values[column]
        return float(value) if isinstance(value, int | float) else None

    def figure(self, column: str) -> float:
        """Return the number of a required column."""
        value = self.values[column]
        if isinstance(value, int | float):
            return float(value)
        msg = f"column {column!r} of {self.file} is not a required number"
        raise TypeError(msg)

    def integer(self, column: str) -> int:
        """Return the whole number of a required column."""
        value = self.values[column]
        if isinstance(value, int):
            return value
        msg = f"column {column!r} of {self.file} is not a required whole number"
        raise TypeError(msg)

    def flag(self, column: str) -> bool:
        """Return whether a flag column says ``yes``; an empty cell is no."""
        return self.values[column] is True

    def ids(self, column: str) -> tuple[str, ...]:
        """Return the ids of a column, empty where the cell is empty."""
        value = self.values[column]
        if isinstance(value, tuple):
            return value
        return (value,) if isinstance(value, str) and value else ()

    def counts(self, column: str) -> Mapping[str, float]:
        """Return the pairs of a ``counts`` or ``amounts`` column by name."""
        value = self.values[column]
        return value if isinstance(value, Mapping) else {}

    def where(self, column: str = "row") -> str:
        """Return ``file:line:column`` of this row."""
        return f"{self.file}:{self.line}:{column}"


@dataclass(slots=True)
class Faults:
    """Collects faults as ``file:line:column: what, allowed``."""

    lines: list[str] = field(default_factory=list)

    def add(self, place: str, what: str) -> None:
        """Note one fault at ``file:line:column``; after very many, only that."""
        if len(self.lines) < MOST_FAULTS:
            self.lines.append(f"{place}: {what}")
        elif len(self.lines) == MOST_FAULTS:
            self.lines.append(f"{place}: and more faults like these, not told")

    def __bool__(self) -> bool:
        return bool(self.lines)


def read_table(
    data: bytes,
    schema: Schema,
    faults: Faults,
    *,
    file: str = "",
    overlay: bool = False,
) -> tuple[Row, ...]:
    """Read one table; every fault goes to ``faults``.

    Parameters
    ----------
    data : bytes
        Content of the file.
    schema : Schema
        What the table must look like.
    faults : Faults
        Receives each fault found; rows with a fault are left out of the result, so
        the caller must not use the result while there are faults.
    file : str, optional
        Name shown in faults; the schema's name if empty.
    overlay : bool
        Whether the rows lie over those of the tool; then columns that may be empty
        may also be missing.

    Returns
    -------
    tuple of Row
        In the order of the file.
    """
    file = file or schema.name
    text = _decode(data, file, faults)
    if text is None:
        return ()
    reader = csv.reader(io.StringIO(text, newline=""), strict=True)
    records = _records(reader, file, faults)
    header = next(records, None)
    if header is None:
        if not faults:
            faults.add(
                f"{file}:1:header", f"file is empty, allowed {_names(schema.columns)}"
            )
        return ()
    order = _match_header(header[1], schema, file, faults, overlay=overlay)
    if order is None:
        return ()
    rows: list[Row] = []
    seen: dict[tuple[Cell, ...], int] = {}
    for line, cells in records:
        row = _read_row(cells, line, order, file, faults, overlay=overlay)
        if row is None:
            continue
        if schema.key:
            key = tuple(row.values[name] for name in schema.key)
            if key in seen:
                faults.add(
                    f"{file}:{line}:{schema.key[0]}",
                    f"duplicate of line {seen[key]} ({_shown(schema.key, key)}), "
                    "allowed one row per key",
                )
                continue
            seen[key] = line
        rows.append(row)
    return tuple(rows)


def _decode(data: bytes, file: str, faults: Faults) -> str | None:
    try:
        return data.decode("utf-8-sig")
    except UnicodeDecodeError as error:
        before = data[: error.start]
        line = before.count(b"\n") + 1
        start = before.rfind(b"\n") + 1
        head = data.split(b"\n", 1)[0].decode("latin-1").strip().split(",")
        index = before.count(b",", start)
        column = head[index] if line > 1 and index < len(head) else "header"
        byte = data[error.start]
        faults.add(
            f"{file}:{line}:{column}", f"byte 0x{byte:02x} is not UTF-8, allowed UTF-8"
        )
        return None


def _records(
    reader: Iterator[list[str]], file: str, faults: Faults
) -> Iterator[tuple[int, list[str]]]:
    """Yield each record with the number of its first line; a broken quote ends it."""
    line = 1
    while True:
        try:
            cells = next(reader)
        except StopIteration:
            return
        except csv.Error as error:
            faults.add(
                f"{file}:{line}:row",
                f"cannot be split into cells ({error}), allowed comma-separated cells "
                'with closed quotes ("" inside a quoted cell)',
            )
            return
        yield line, cells
        line = reader.line_num + 1  # type: ignore[attr-defined]


def _match_header(
    header: Sequence[str], schema: Schema, file: str, faults: Faults, *, overlay: bool
) -> list[Column | str] | None:
    """Return the column behind each cell, followed by the names of absent columns."""
    known = {column.name: column for column in schema.columns}
    place = f"{file}:1:"
    sound = True
    for position, name in enumerate(header):
        if name not in known:
            faults.add(
                f"{place}{name or position + 1}",
                f"unknown column, allowed {_names(schema.columns)}",
            )
            sound = False
        elif name in header[:position]:
            faults.add(f"{place}{name}", "column stands twice, allowed once")
            sound = False
    absent = [column for column in schema.columns if column.name not in header]
    for column in absent:
        if not overlay or column.required or column.name in schema.key:
            faults.add(
                f"{place}{column.name}",
                f"column is missing, allowed {_names(schema.columns)}",
            )
            sound = False
    if not sound:
        return None
    return [known[name] for name in header] + [column.name for column in absent]


def _read_row(
    cells: list[str],
    line: int,
    order: list[Column | str],
    file: str,
    faults: Faults,
    *,
    overlay: bool,
) -> Row | None:
    columns = [entry for entry in order if isinstance(entry, Column)]
    if not any(cells):
        faults.add(f"{file}:{line}:row", "row is empty, allowed rows with content")
        return None
    if len(cells) != len(columns):
        faults.add(
            f"{file}:{line}:row",
            f"{len(cells)} cells, allowed {len(columns)} as in the header",
        )
        return None
    values: dict[str, Cell] = {}
    sound = True
    for column, cell in zip(columns, cells, strict=True):
        value, fault = read_cell(cell, column)
        if fault:
            faults.add(f"{file}:{line}:{column.name}", fault)
            sound = False
        values[column.name] = value
    for entry in order[len(columns) :]:
        if isinstance(entry, str):
            values[entry] = None
    return Row(file, line, values, overlay) if sound else None


def read_cell(cell: str, column: Column) -> tuple[Cell, str]:
    """Return the value of a cell and the fault found in it, empty if sound."""
    if not cell:
        return None, "empty, allowed a value" if column.required else ""
    kind = column.kind
    if kind == "text":
        if column.choices and cell not in column.choices:
            return None, f"{cell!r} is unknown, allowed {', '.join(column.choices)}"
        if cell[0] == " " or cell[-1] == " ":
            return None, f"{cell!r} begins or ends with a blank, allowed without"
        return cell, ""
    if kind in ("number", "integer"):
        return _read_number(cell, column)
    if kind == "flag":
        if cell not in _FLAGS:
            return None, f"{cell!r} is not a flag, allowed yes, no"
        return _FLAGS[cell], ""
    if kind in ("counts", "amounts"):
        return _read_pairs(cell, ":" if kind == "counts" else "=")
    names = cell.split(" ")
    for name in names if kind == "ids" else [cell]:
        if not _ID.fullmatch(name):
            return None, f"{name!r} is not an id, allowed a-z, 0-9 and _"
    return (tuple(names) if kind == "ids" else cell), ""


def _read_number(cell: str, column: Column) -> tuple[Cell, str]:
    whole = column.kind == "integer"
    if not (_INTEGER if whole else _NUMBER).fullmatch(cell):
        noun = "whole number" if whole else "finite decimal number"
        return None, f"{cell!r} is not a number, allowed a {noun}"
    value = int(cell) if whole else float(cell)
    low, high = column.low, column.high
    if abs(value) == float("inf"):
        return None, f"{cell!r} is out of range, allowed a finite decimal number"
    if (low is not None and value < low) or (high is not None and value > high):
        return None, f"{cell} is out of range, allowed {_bounds(low, high)}"
    return value, ""


def _bounds(low: float | None, high: float | None) -> str:
    if high is None:
        return f"{low:g} or more"
    return f"{high:g} or less" if low is None else f"{low:g} to {high:g}"


def _read_pairs(cell: str, sign: str) -> tuple[Cell, str]:
    pairs: dict[str, float] = {}
    for part in cell.split(" "):
        name, found, amount = part.partition(sign)
        if not (found and _ID.fullmatch(name) and _NUMBER.fullmatch(amount)):
            allowed = f"name{sign}number name{sign}number"
            return None, f"{part!r} is not a pair, allowed {allowed}"
        if name in pairs:
            return None, f"{name!r} stands twice, allowed once"
        pairs[name] = float(amount)
        if not 0.0 < pairs[name] < float("inf"):
            return None, f"{part!r} is not positive, allowed finite numbers above 0"
    return pairs, ""


def _names(columns: Sequence[Column]) -> str:
    return ", ".join(column.name for column in columns)


def _shown(names: Sequence[str], values: Sequence[Cell]) -> str:
    return ", ".join(f"{n}={v}" for n, v in zip(names, values, strict=True))
