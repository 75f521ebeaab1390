"""Run the published checks on this installation and judge every group."""

from __future__ import annotations

import hashlib
import os
import platform
import time
from collections.abc import Callable, Iterable, Iterator, Mapping
from datetime import UTC, datetime
from importlib import metadata
from importlib.resources import files
from importlib.resources.abc import Traversable
from typing import Any, TypeAlias

from formbuf import __version__
from formbuf.errors import FormbufError
from formbuf.library import Library
from formbuf.qualify import (
    brines,
    freezing,
    installed,
    numerics,
    osmolality,
    pk_series,
    standards,
    water,
    worked,
)
from formbuf.qualify.record import load_record, recorded_statistics
from formbuf.qualify.records import Case, Group, Qualification, judge

#: Packages that compute, and those a record names because results pass through them.
PACKAGES = ("numpy", "scipy", "pandas", "pydantic", "typer", "rich")
Part: TypeAlias = Callable[[Library, Mapping[str, Any]], Iterator[Group]]
#: Each part of the checks, given the library and the record of this version; a part
#: that cannot be computed becomes a failing group.
PARTS: Mapping[str, Part] = {
    "water": lambda library, _: water.groups(library),
    "standards": lambda library, _: standards.groups(library),
    "pk_series": lambda library, _: pk_series.groups(library),
    "worked": lambda library, _: worked.groups(library),
    "osmolality": lambda library, _: osmolality.groups(library),
    "brines": lambda library, _: brines.groups(library),
    "freezing": lambda library, _: freezing.groups(library),
    "numerics": lambda library, _: numerics.groups(library),
    "installed": installed.groups,
}


def qualify(
    library: Library, *, record: Mapping[str, Any] | None = None
) -> Qualification:
    """Run every check and judge it.

    Parameters
    ----------
    library : Library
        As loaded; an overlay is qualified with it.
    record : mapping, optional
        What to compare with; that of this version if absent.

    Returns
    -------
    Qualification

    Raises
    ------
    KnowledgeError
        A table is broken, or the record of this version.
    """
    start = time.perf_counter()
    kept = load_record() if record is None else record
    judged = tuple(
        judge(group, recorded_statistics(kept, group.id))
        for group in all_groups(library, kept)
    )
    return Qualification(
        judged,
        versions(library),
        {
            "system": platform.system(),
            "release": platform.release(),
            "machine": platform.machine(),
            "python": f"{platform.python_implementation()} {platform.python_version()}",
        },
        {
            "knowledge": library.sha256,
            "overlay": library.overlay_sha256,
            "program": program_sha256(),
        },
        numerics.SEED,
        time.perf_counter() - start,
        _now(),
        _notes(library),
    )


def all_groups(library: Library, record: Mapping[str, Any]) -> Iterator[Group]:
    """Yield every group; what cannot be computed becomes one that fails."""
    for name, part in PARTS.items():
        yield from _guarded(
            name, part(library, record), overlaid=library.overlay is not None
        )


def _guarded(name: str, groups: Iterable[Group], *, overlaid: bool) -> Iterator[Group]:
    """Yield groups; what cannot be computed becomes a failing one.

    Rows of published checks that a user has changed may ask for what is not there, a
    step or a value; without an overlay that would be a bug and keeps its traceback.
    """
    try:
        yield from groups
    except (FormbufError, LookupError, TypeError, ValueError) as error:
        if not isinstance(error, FormbufError) and not overlaid:
            raise
        text = " ".join(str(error).split()) or repr(error)
        case = Case(text, 0.0, 1.0, 0.0, "", "derived")
        yield Group(f"{name} not computed", name, "not computed", "1", (case,))


def versions(library: Library) -> dict[str, str]:
    """Return the versions of what takes part in a calculation."""
    found = {"formbuf": __version__, "knowledge": library.version}
    for package in PACKAGES:
        try:
            found[package] = metadata.version(package)
        except metadata.PackageNotFoundError:
            found[package] = "not installed"
    return found


def program_sha256() -> str:
    """Return the checksum over the program's own source files."""
    digest = hashlib.sha256()
    for name, data in sorted(_sources(files("formbuf"), "")):
        digest.update(f"{name} {len(data)}\n".encode())
        digest.update(data)
    return digest.hexdigest()


def _sources(root: Traversable, prefix: str) -> Iterator[tuple[str, bytes]]:
    for entry in root.iterdir():
        name = f"{prefix}{entry.name}"
        if entry.is_dir():
            if not entry.name.startswith(("_", ".")):
                yield from _sources(entry, f"{name}/")
        elif name.endswith(".py"):
            yield name, entry.read_bytes().replace(b"\r\n", b"\n")


def _now() -> str:
    """Return the time in UTC, that of ``SOURCE_DATE_EPOCH`` where it is set."""
    fixed = os.environ.get("SOURCE_DATE_EPOCH", "")
    if fixed.isascii() and fixed.isdigit() and len(fixed) <= 11:
        moment = datetime.fromtimestamp(int(fixed), UTC)
    else:
        moment = datetime.now(UTC)
    return moment.strftime("%Y-%m-%dT%H:%M:%SZ")


def _notes(library: Library) -> tuple[str, ...]:
    if library.overlay is None:
        return ()
    note = (
        f"tables of {library.overlay} lie over those of the installation: what they "
        "change cannot be as recorded; run without them to qualify the installation"
    )
    return (note,)
