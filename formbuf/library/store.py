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
from formbuf.library.overlay_settings import setting_faults
from formbuf.library.tables import Faults, Row, Schema, read_table

#: Files that make up the knowledge and enter its checksum.
_SUFFIXES = (".csv", ".toml")
_EXTRA = ("VERSION",)
#: An overlay holds tables and little else: more or larger files are a mistake.
MOST_OVERLAY_ENTRIES = 1000
LARGEST_OVERLAY_BYTES = 2_000_000
#: Directories below one another that are looked into.
DEEPEST = 3
NAMES_TOLD = 3
#: Faults of an overlay that are told at once.
FAULTS_TOLD = 100


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
            told = self.overlay.lines[:FAULTS_TOLD]
            if len(self.overlay.lines) > FAULTS_TOLD:
                told.append(f"and {len(self.overlay.lines) - FAULTS_TOLD} more faults")
            raise InputError(
                "\n".join(told),
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
            laid = _parse_toml(theirs)
        except ValueError as error:
            message = f"{self.overlay}/{name}:1:file: {error}"
            raise InputError(message) from error
        faults = [f"{self.overlay}/{name}:{f}" for f in setting_faults(settings, laid)]
        if faults:
            raise InputError("\n".join(faults[:FAULTS_TOLD]))
        return _lay_over(settings, laid)

    def unknown_overlay_files(self) -> list[str]:
        """Return a fault for each overlay table whose name matches none of ours.

        Raises
        ------
        InputError
            If the overlay is no place for tables: very many or very large files, or
            something that is no file under the name of a table.
        """
        if self.overlay is None:
            return []
        known = [name for name, _ in self.files()]
        files_here = self.overlay_files()
        if not files_here:
            msg = (
                f"overlay {str(self.overlay)!r} holds no table, allowed tables of ours"
            )
            raise InputError(msg, hint="Their names: `formbuf knowledge list`.")
        found = []
        for name, path in files_here:
            if name in known:
                continue
            near = nearest(name, known, NAMES_TOLD)
            allowed = ", ".join(near) or "a name of `formbuf knowledge list`"
            found.append(f"{path}:1:file: no table of this name, allowed {allowed}")
        return found

    def overlay_files(self) -> list[tuple[str, Path]]:
        """Return name and path of every table of the overlay, sorted by name.

        Raises
        ------
        InputError
            As `unknown_overlay_files`.
        """
        if self.overlay is None:
            return []
        found = []
        try:
            for number, (name, path) in enumerate(_entries(self.overlay, "", 1)):
                if number >= MOST_OVERLAY_ENTRIES:
                    msg = (
                        f"overlay {str(self.overlay)!r} holds more than "
                        f"{MOST_OVERLAY_ENTRIES} files, allowed a directory with your "
                        "tables"
                    )
                    raise InputError(msg)
                if name.endswith(_SUFFIXES):
                    _check_overlay_file(path)
                    found.append((name, path))
        except OSError as error:
            raise _unreadable(self.overlay, error) from error
        return sorted(found)

    def files(self) -> Iterator[tuple[str, bytes]]:
        """Yield name and content of every file of knowledge, sorted by name."""
        yield from sorted(_walk(self.root, ""))

    def sha256(self) -> str:
        """Return the checksum over names and contents, line ends made equal."""
        return _digest(self.files())

    def overlay_sha256(self) -> str:
        """Return the checksum over the overlay, empty without one."""
        if self.overlay is None:
            return ""
        try:
            return _digest((name, p.read_bytes()) for name, p in self.overlay_files())
        except OSError as error:
            raise _unreadable(self.overlay, error) from error

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
        try:
            return place.read_bytes() if place.is_file() else None
        except OSError as error:
            raise _unreadable(place, error) from error


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


def _entries(folder: Path, prefix: str, depth: int) -> Iterator[tuple[str, Path]]:
    """Yield every entry of a directory, those of the ones below it too, not too deep."""
    for path in sorted(folder.iterdir()):
        name = f"{prefix}{path.name}"
        if not path.is_dir():
            yield name, path
        elif depth < DEEPEST and not path.name.startswith((".", "_")):
            yield from _entries(path, f"{name}/", depth + 1)


def _check_overlay_file(path: Path) -> None:
    """Refuse what is no file, or larger than a table can be."""
    if not path.is_file():
        msg = f"{path}:1:file: is no regular file, allowed a table"
        raise InputError(msg)
    size = path.stat().st_size
    if size > LARGEST_OVERLAY_BYTES:
        most = LARGEST_OVERLAY_BYTES / 1e6
        msg = f"{path}:1:file: holds {size / 1e6:.0f} MB, allowed up to {most:.0f} MB"
        raise InputError(msg)


def _unreadable(place: Traversable, error: OSError) -> InputError:
    reason = error.strerror or str(error)
    return InputError(f"{place}: cannot be read ({reason})")


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

    try:
        return tomllib.loads(data.decode("utf-8-sig"))
    except RecursionError as error:
        msg = "lists or tables are nested too deeply to read"
        raise ValueError(msg) from error


def _lay_over(below: dict[str, Any], above: dict[str, Any]) -> dict[str, Any]:
    merged = dict(below)
    for name, value in above.items():
        under = merged.get(name)
        if isinstance(under, dict) and isinstance(value, dict):
            merged[name] = _lay_over(under, value)
        else:
            merged[name] = value
    return merged
