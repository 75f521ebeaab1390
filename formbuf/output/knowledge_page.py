"""The tables of knowledge, their sources and their audit, to read and as data."""

from __future__ import annotations

import csv
import io
from collections.abc import Mapping, Sequence
from dataclasses import dataclass, replace
from typing import Any

from formbuf.errors import UnknownNameError
from formbuf.library import Library
from formbuf.library.tables import Cell, Row, Schema
from formbuf.output import serialise
from formbuf.output.figures import counted, plainly
from formbuf.output.leaves import leaves
from formbuf.output.page import (
    Block,
    Column,
    Grid,
    Heading,
    Items,
    Page,
    Paragraph,
    number,
    section,
)

TABLES_SCHEMA = "formbuf.knowledge_tables/1"
TABLE_SCHEMA = "formbuf.knowledge_table/1"
SOURCES_SCHEMA = "formbuf.knowledge_sources/1"
CHECK_SCHEMA = "formbuf.knowledge_check/1"
#: Longest cell that counts when columns are chosen for a terminal [characters].
USUAL_CELL = 32


@dataclass(frozen=True, slots=True)
class TableView:
    """One table as it is read: names of columns and rows of plain values."""

    name: str
    key: tuple[str, ...]
    columns: tuple[str, ...]
    rows: tuple[Mapping[str, Any], ...]
    overlay_rows: int


def view(library: Library, name: str, schemas: Mapping[str, Schema]) -> TableView:
    """Return a table by its name, with or without its ending.

    Parameters
    ----------
    library : Library
    name : str
        For example ``species``, ``checks/protein.csv`` or ``criteria.toml``.
    schemas : mapping of str to Schema
        Descriptions of the tables by name.

    Raises
    ------
    UnknownNameError
        No table bears the name.
    """
    names = [file for file, _ in library.store.files() if file != "VERSION"]
    found = next((n for n in names if name in (n, n.rpartition(".")[0])), None)
    if found is None:
        stems = [n.rpartition(".")[0] for n in names]
        raise UnknownNameError("table", name, [*stems, *names], where="TABLE")
    if found.endswith(".toml"):
        pairs = leaves(dict(library.settings(found)))
        rows = tuple({"key": key, "value": value} for key, value in pairs)
        return TableView(found, ("key",), ("key", "value"), rows, 0)
    schema = schemas.get(found)
    if schema is None:
        return _undescribed(library, found)
    read = library.read_table(schema)
    columns = tuple(column.name for column in schema.columns)
    return TableView(
        found,
        schema.key,
        columns,
        tuple(_row(row, columns) for row in read),
        sum(row.overlay for row in read),
    )


def with_computed(
    table: TableView, computed: Mapping[str, Mapping[str, Any]]
) -> TableView:
    """Return a table with computed columns behind those it holds.

    Parameters
    ----------
    table : TableView
        Keyed by its first column.
    computed : mapping of key to mapping of column to value
    """
    names = tuple(dict.fromkeys(n for row in computed.values() for n in row))
    rows = tuple(
        {**row, **dict.fromkeys(names), **computed.get(str(row[table.key[0]]), {})}
        for row in table.rows
    )
    return replace(table, columns=(*table.columns, *names), rows=rows)


def _undescribed(library: Library, name: str) -> TableView:
    """Return a table of which no description is known, as its text stands."""
    data = next(content for file, content in library.store.files() if file == name)
    reader = csv.DictReader(io.StringIO(data.decode("utf-8-sig"), newline=""))
    columns = tuple(reader.fieldnames or ())
    rows = tuple(
        {column: row.get(column) or None for column in columns} for row in reader
    )
    return TableView(name, columns[:1], columns, rows, 0)


def _row(row: Row, columns: Sequence[str]) -> dict[str, Any]:
    values: dict[str, Any] = {name: serialise.plain(row[name]) for name in columns}
    return {**values, "overlay": row.overlay}


def cell_text(value: Cell | list[Any] | dict[str, Any]) -> str:
    """Return a value as it is written in a table."""
    if isinstance(value, Mapping):
        return " ".join(f"{k}:{plainly(v)}" for k, v in value.items())
    if isinstance(value, list | tuple):
        return " ".join(plainly(item) for item in value)
    if value is None:
        return ""
    return plainly(value)


def tables_page(library: Library, schemas: Mapping[str, Schema]) -> Page:
    """Return the list of tables as a page."""

    def rows() -> list[dict[str, Any]]:
        found = []
        for file, _ in library.store.files():
            if file == "VERSION":
                continue
            table = view(library, file, schemas)
            found.append(
                {
                    "table": table.name,
                    "rows": len(table.rows),
                    "overlay_rows": table.overlay_rows,
                    "columns": len(table.columns),
                }
            )
        return found

    def blocks() -> list[Block]:
        columns = (
            Column("Table", keep=True),
            number("Rows"),
            number("of an overlay"),
            number("Columns"),
        )
        cells = tuple(
            (r["table"], str(r["rows"]), str(r["overlay_rows"]), str(r["columns"]))
            for r in rows()
        )
        return [Heading(_title(library), 1), Grid(columns, cells)]

    return Page(
        lambda: {**serialise.header(TABLES_SCHEMA, library), "tables": rows()},
        rows,
        blocks,
    )


def _title(library: Library) -> str:
    over = f", with {library.overlay} over it" if library.overlay else ""
    return f"Knowledge {library.version}, sha256 {library.sha256[:12]}{over}"


def table_page(library: Library, table: TableView, key: str | None = None) -> Page:
    """Return the rows of a table as a page; only those of a key where one is given.

    Raises
    ------
    UnknownNameError
        No row bears the key.
    """
    rows = table.rows
    if key is not None:
        rows = tuple(row for row in rows if key in _keys(table, row))
        if not rows:
            known = dict.fromkeys(k for row in table.rows for k in _keys(table, row))
            raise UnknownNameError(f"row of {table.name}", key, known, where="ROW")

    def payload() -> dict[str, Any]:
        return {
            **serialise.header(TABLE_SCHEMA, library),
            "table": table.name,
            "key": list(table.key),
            "columns": list(table.columns),
            "rows": list(rows),
        }

    def records() -> list[dict[str, Any]]:
        names = [*table.columns, "overlay"] if table.overlay_rows else table.columns
        return [{name: _flat(row.get(name)) for name in names} for row in rows]

    def blocks() -> list[Block]:
        title = Heading(f"{table.name}, knowledge {library.version}", 1)
        if key is not None:
            return [title, *_upright(table, rows)]
        size = f"{counted(len(rows), 'row')}, {counted(len(table.columns), 'column')}"
        hint = f"{size}; --format csv shows all."
        return [title, _grid(table, rows), Paragraph(hint)]

    return Page(payload, records, blocks)


def _flat(value: Any) -> Any:
    return cell_text(value) if isinstance(value, list | dict) else value


def _keys(table: TableView, row: Mapping[str, Any]) -> list[str]:
    return [cell_text(row[name]) for name in table.key or table.columns[:1]]


def _upright(table: TableView, rows: Sequence[Mapping[str, Any]]) -> list[Block]:
    """Return each row as a list of names and values."""
    columns = (Column("Column", keep=True), Column("Value"))
    grids: list[Block] = []
    for row in rows:
        pairs = [(name, cell_text(row[name])) for name in table.columns]
        if row.get("overlay"):
            pairs.append(("overlay", "yes"))
        grids.append(Grid(columns, tuple((n, text) for n, text in pairs if text)))
    return grids


def _grid(table: TableView, rows: Sequence[Mapping[str, Any]]) -> Grid:
    """Return rows with as many columns as a terminal has room for, the key first."""
    first = table.key or table.columns[:1]
    order = [*first, *(name for name in table.columns if name not in first)]
    if table.overlay_rows:
        order.insert(len(first), "overlay")
    columns = []
    used = 0
    for place, name in enumerate(order):
        cells = [cell_text(row.get(name)) for row in rows]
        used += 2 + min(max(map(len, [name, *cells])), USUAL_CELL)
        numeric = bool(rows) and all(
            isinstance(row.get(name), int | float | None)
            and not isinstance(row.get(name), bool)
            for row in rows
        )
        columns.append(
            Column(
                name,
                "right" if numeric else "left",
                0 if place < len(first) else used,
            )
        )
    body = tuple(tuple(cell_text(row.get(name)) for name in order) for row in rows)
    return Grid(tuple(columns), body)


def sources_page(library: Library, name: str | None, uses: Sequence[str] = ()) -> Page:
    """Return the sources as a page, or one of them with the rows that refer to it.

    Raises
    ------
    UnknownNameError
        No source bears the name.
    """
    if name is not None and name not in library.sources:
        raise UnknownNameError("source", name, library.sources, where="SOURCE")
    chosen = list(library.sources.values()) if name is None else [library.source(name)]

    def records() -> list[dict[str, Any]]:
        return [{**serialise.plain(s), "text": s.text} for s in chosen]

    def payload() -> dict[str, Any]:
        data = {**serialise.header(SOURCES_SCHEMA, library), "sources": records()}
        return data if name is None else {**data, "used_in": list(uses)}

    def blocks() -> list[Block]:
        columns = (Column("Source", keep=name is None), Column("Reference"))
        grid = Grid(columns, tuple((s.id, s.text) for s in chosen))
        title = Heading(f"Sources of knowledge {library.version}", 1)
        notes = Items(
            tuple(t for s in chosen for t in (s.locator_note, s.note) if t and name)
        )
        return [
            title,
            grid,
            *section("Notes", notes),
            *section("Used in", Items(tuple(uses))),
        ]

    return Page(payload, records, blocks)


def uses_of(
    library: Library, source: str, schemas: Mapping[str, Schema]
) -> tuple[str, ...]:
    """Return ``file:line: key`` of every row that refers to a source."""
    found = []
    for file, _ in library.store.files():
        schema = schemas.get(file)
        if schema is None:
            continue
        citing = [c.name for c in schema.columns if c.refers_to == "sources.csv"]
        found += [
            f"{row.file}:{row.line}: {' '.join(cell_text(row[k]) for k in schema.key)}"
            for row in library.read_table(schema)
            if any(source in row.ids(name) for name in citing)
        ]
    return tuple(found)


def check_page(library: Library, faults: Sequence[str], tables: int, rows: int) -> Page:
    """Return the outcome of the audit as a page."""
    found = counted(len(faults), "fault") if faults else "no fault"
    said = f"{counted(tables, 'table')} with {counted(rows, 'row')}: {found}."
    return Page(
        lambda: {
            **serialise.header(CHECK_SCHEMA, library),
            "tables": tables,
            "rows": rows,
            "faults": list(faults),
        },
        lambda: [{"fault": fault} for fault in faults],
        lambda: [Heading(_title(library), 1), Paragraph(said), Items(tuple(faults))],
    )
