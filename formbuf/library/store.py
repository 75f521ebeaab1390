"""Find the tables, read them with an overlay on top, and keep what was read.

The tables lie in the installed package (``formbuf/_knowledge``) or, in a checkout,
in ``knowledge/`` beside the package. An overlay is a directory of the user with
files of the same names: its rows win over ours by key and are marked.
"""

from __future__ import annotations

import functools
import hashlib
from collections.abc import Iterable, Iterator
from importlib.resources import files
from importlib.resources.abc import Traversable
from pathlib import Path
from typing import Any

from formbuf.errors import InputError, KnowledgeError, nearest
from formbuf.library.tables import Faults, Row, Schema, read_table

#: Files that make up the knowledge and enter its checksum.
_SUFFIXES = (".csv", ".toml")
_EXTRA = ("VERSION",)


@functools.cache
def knowledge_root() -> Traversable:
    """Return the directory of the tables.

    Raises
    ------
    KnowledgeError
        If neither place holds them; both are named.
    """
    packaged = files("formbuf").joinpath("_knowledge")
    if packaged.is_dir():
        return packaged
    beside = Path(__file__).resolve().parent.parent.parent / "knowledge"
    if beside.is_dir():
        return beside
    raise KnowledgeError(
        [f"{packaged}: no such directory", f"{beside}: no such directory"],
        hint="Install formbuf again, or run it from a complete checkout.",
    )


class TableFaults:
    """Faults of our own tables and of the overlay, kept apart."""

    def __init__(self) -> None:
        self.ours = Faults()
        self.overlay = Faults()

    def add(self, row: Row, column: str, what: str) -> None:
        """Note a fault of a row under whoever brought the row."""
        faults = self.overlay if row.overlay else self.ours
        faults.add(row.where(column), what)

    def raise_if_any(self) -> None:
        """Raise `KnowledgeError` for faults of ours, else `InputError` for theirs."""
        if self.ours:
            raise KnowledgeError(
                [*self.ours.lines, *self.overlay.lines],
                hint="Run `formbuf knowledge check` after mending the lines named.",
            )
        if self.overlay:
            raise InputError(
                "\n".join(self.overlay.lines),
                hint="Mend the lines named in the overlay, or run without it.",
            )


class Store:
    """Reads tables once each, ours first, then those of the overlay.

    Parameters
    ----------
    root : Traversable
        Directory of our tables.
    overlay : Path, optional
        Directory of the user's tables.
    """

    def __init__(self, root: Traversable, overlay: Path | None = None) -> None:
        self.root = root
        self.overlay = overlay
        #: Names of the tables whose references were found sound.
        self.checked: set[str] = set()
        self._tables: dict[str, tuple[Schema, tuple[Row, ...]]] = {}
        self._settings: dict[str, dict[str, Any]] = {}

    def rows(self, schema: Schema, faults: TableFaults) -> tuple[Row, ...]:
        """Return the rows of a table, overlay applied; empty while it has faults."""
        kept = self._tables.get(schema.name)
        if kept is not None and (kept[0] is schema or kept[0] == schema):
            return kept[1]
        before = len(faults.ours.lines) + len(faults.overlay.lines)
        ours: tuple[Row, ...] = ()
        data = self._bytes(self.root, schema.name)
        if data is None:
            faults.ours.add(f"{schema.name}:1:file", "file is missing")
        else:
            ours = read_table(data, schema, faults.ours)
        theirs = self._overlay_rows(schema, faults)
        if len(faults.ours.lines) + len(faults.overlay.lines) > before:
            return ()
        merged = _merge(ours, theirs, schema.key)
        self._tables[schema.name] = (schema, merged)
        self.checked.discard(schema.name)
        return merged

    def toml(self, name: str) -> dict[str, Any]:
        """Return a settings file of ours with the overlay's keys on top."""
        if name not in self._settings:
            self._settings[name] = self._read_toml(name)
        return self._settings[name]

    def _read_toml(self, name: str) -> dict[str, Any]:
        data = self._bytes(self.root, name)
        if data is None:
            raise KnowledgeError([f"{name}:1:file: file is missing"])
        try:
            settings = _parse_toml(data)
        except ValueError as error:
            raise KnowledgeError([f"{name}:1:file: {error}"]) from error
        theirs = self._bytes(self.overlay, name) if self.overlay else None
        if theirs is None:
            return settings
        try:
            return _lay_over(settings, _parse_toml(theirs))
        except ValueError as error:
            message = f"{self.overlay}/{name}:1:file: {error}"
            raise InputError(message) from error

    def unknown_overlay_files(self) -> list[str]:
        """Return a fault for each overlay table whose name matches none of ours."""
        if self.overlay is None:
            return []
        known = [name for name, _ in self.files()]
        found = []
        for path in sorted(self.overlay.rglob("*")):
            name = path.relative_to(self.overlay).as_posix()
            if path.suffix not in _SUFFIXES or name in known:
                continue
            near = nearest(name, known) or known
            found.append(
                f"{path}:1:file: no table of this name, allowed {', '.join(near)}"
            )
        return found

    def files(self) -> Iterator[tuple[str, bytes]]:
        """Yield name and content of every file of knowledge, sorted by name."""
        yield from sorted(_walk(self.root, ""))

    def sha256(self) -> str:
        """Return the checksum over names and contents, line ends made equal."""
        return _digest(self.files())

    def overlay_sha256(self) -> str:
        """Return the checksum over the overlay, empty without one."""
        return _digest(sorted(_walk(self.overlay, ""))) if self.overlay else ""

    def version(self) -> str:
        """Return the version of our tables."""
        data = self._bytes(self.root, "VERSION")
        if data is None:
            raise KnowledgeError(["VERSION:1:file: file is missing"])
        return data.decode("utf-8").strip()

    def _overlay_rows(self, schema: Schema, faults: TableFaults) -> tuple[Row, ...]:
        if self.overlay is None:
            return ()
        data = self._bytes(self.overlay, schema.name)
        if data is None:
            return ()
        file = str(self.overlay / schema.name)
        return read_table(data, schema, faults.overlay, file=file, overlay=True)

    @staticmethod
    def _bytes(root: Traversable, name: str) -> bytes | None:
        place = root.joinpath(*name.split("/"))
        return place.read_bytes() if place.is_file() else None


def _merge(
    ours: tuple[Row, ...], theirs: tuple[Row, ...], key: tuple[str, ...]
) -> tuple[Row, ...]:
    if not theirs:
        return ours
    rows: dict[object, Row] = {}
    for index, row in enumerate((*ours, *theirs)):
        name: object = tuple(row.values[column] for column in key) if key else index
        rows[name] = row
    return tuple(rows.values())


def _walk(root: Traversable, prefix: str) -> Iterator[tuple[str, bytes]]:
    for entry in root.iterdir():
        name = f"{prefix}{entry.name}"
        if entry.is_dir():
            if not entry.name.startswith((".", "_")):
                yield from _walk(entry, f"{name}/")
        elif entry.name.endswith(_SUFFIXES) or name in _EXTRA:
            yield name, entry.read_bytes()


def _digest(files_: Iterable[tuple[str, bytes]]) -> str:
    digest = hashlib.sha256()
    for name, data in files_:
        content = data.replace(b"\r\n", b"\n")
        digest.update(f"{name} {len(content)}\n".encode())
        digest.update(content)
    return digest.hexdigest()


def _parse_toml(data: bytes) -> dict[str, Any]:
    import tomllib

    return tomllib.loads(data.decode("utf-8-sig"))


def _lay_over(below: dict[str, Any], above: dict[str, Any]) -> dict[str, Any]:
    merged = dict(below)
    for name, value in above.items():
        under = merged.get(name)
        if isinstance(under, dict) and isinstance(value, dict):
            merged[name] = _lay_over(under, value)
        else:
            merged[name] = value
    return merged
