"""What the tables of a user change: rows and settings that differ from ours."""

from __future__ import annotations

import csv
import functools
import io
from collections.abc import Iterator, Mapping, Sequence
from dataclasses import dataclass
from pathlib import Path
from typing import Any

from formbuf.errors import InputError
from formbuf.library import Library, schemas
from formbuf.library.check_schemas import CHECKS
from formbuf.library.rule_tables import DOSE_LIMITS, FACTS, RULES
from formbuf.library.store import Store
from formbuf.library.tables import Schema
from formbuf.product import freezing_schemas
from formbuf.product.osmotics import OSMOTIC


@dataclass(frozen=True, slots=True)
class TableChange:
    """How one table of an overlay differs from ours.

    Parameters
    ----------
    table : str
        File name.
    changed, added : int
        Rows (settings of a TOML file) that replace one of ours with other content,
        and rows that ours does not hold. A row that repeats one of ours is neither.
    """

    table: str
    changed: int
    added: int

    @property
    def text(self) -> str:
        """The change in words: ``precedent.csv (1 row changed, 2 rows added)``."""
        what = "setting" if self.table.endswith(".toml") else "row"
        parts = [
            f"{count} {what}{'' if count == 1 else 's'} {done}"
            for count, done in ((self.changed, "changed"), (self.added, "added"))
            if count
        ]
        return f"{self.table} ({', '.join(parts) or 'nothing changed'})"


def overlay_notice(library: Library) -> str:
    """Return one line on the overlay that a result rests on; empty without one.

    Parameters
    ----------
    library : Library

    Examples
    --------
    ``tables of own lie over those of the installation: precedent.csv (1 row added)``
    """
    changes = overlay_changes(library)
    if library.overlay is None:
        return ""
    listed = ", ".join(change.text for change in changes)
    return f"tables of {library.overlay} lie over those of the installation: {listed}"


@functools.lru_cache(maxsize=8)
def overlay_changes(library: Library) -> tuple[TableChange, ...]:
    """Return what each table of the overlay changes, by name; none without one.

    Parameters
    ----------
    library : Library

    Raises
    ------
    InputError
        If a file of the overlay cannot be read.
    """
    store = library.store
    if store.overlay is None:
        return ()
    ours = dict(store.files())
    found = []
    for name, path in store.overlay_files():
        if name not in ours:
            continue
        if name.endswith(".toml"):
            count = _settings_changed(store, name)
            found.append(TableChange(name, count, 0))
        else:
            found.append(_rows_changed(name, ours[name], path))
    return tuple(found)


def _settings_changed(store: Store, name: str) -> int:
    ours = dict(_leaves(Store(store.root).toml(name)))
    laid = dict(_leaves(store.toml(name)))
    return sum(laid[key] != ours.get(key) for key in laid)


def _leaves(value: Mapping[str, Any], above: str = "") -> Iterator[tuple[str, Any]]:
    for name, inner in value.items():
        key = f"{above}.{name}" if above else name
        if isinstance(inner, Mapping):
            yield from _leaves(inner, key)
        else:
            yield key, inner


def _rows_changed(name: str, ours: bytes, theirs: Path) -> TableChange:
    below = _rows(ours)
    columns = list(below[0]) if below else []
    key = _key_columns(name, columns)
    known = {_key(row, key): row for row in below}
    changed = added = 0
    try:
        laid = {_key(row, key): row for row in _rows(theirs.read_bytes())}
    except (UnicodeDecodeError, csv.Error) as error:
        msg = f"{theirs}: is no table ({error}), allowed CSV in UTF-8"
        hint = "`formbuf knowledge check --knowledge DIR` names line and column."
        raise InputError(msg, hint=hint) from None
    for at, row in laid.items():
        mine = known.get(at)
        if mine is None:
            added += 1
        elif any(not _same(mine[c], row.get(c) or "") for c in columns):
            changed += 1
    return TableChange(name, changed, added)


def _key_columns(name: str, columns: Sequence[str]) -> tuple[str, ...]:
    """Return the columns that tell rows of a table apart."""
    return _keys().get(name) or tuple(columns[:1])


def _rows(data: bytes) -> list[dict[str, str]]:
    reader = csv.DictReader(io.StringIO(data.decode("utf-8-sig"), newline=""))
    return [
        {column: (row[column] or "").strip() for column in row if column}
        for row in reader
        if any(row.values())
    ]


def _key(row: Mapping[str, str], key: Sequence[str]) -> tuple[str, ...]:
    return tuple(_plain(row.get(column) or "") for column in key)


def _plain(cell: str) -> str:
    """Write a number in one way, so that 25 and 25.0 are the same key."""
    try:
        return repr(float(cell))
    except ValueError:
        return cell


def _same(mine: str, other: str) -> bool:
    """Whether two cells hold the same, numbers compared as numbers."""
    return mine == other or _plain(mine) == _plain(other)


@functools.cache
def _keys() -> Mapping[str, tuple[str, ...]]:
    """Return the key columns of the tables; those left out have their first column."""
    described: tuple[Schema, ...] = (
        *schemas.EAGER,
        *schemas.LAZY,
        *CHECKS.values(),
        FACTS,
        RULES,
        DOSE_LIMITS,
        OSMOTIC,
        freezing_schemas.PITZER,
        freezing_schemas.SOLUBILITY,
        freezing_schemas.CONSTANTS,
    )
    return {schema.name: schema.key for schema in described}
