"""Read ``defaults.toml``: the cases of each key, and which one fits a brief."""

from __future__ import annotations

import functools
from collections.abc import Mapping
from dataclasses import dataclass
from typing import Any

from formbuf.errors import InputError, KnowledgeError
from formbuf.library import Library
from formbuf.library.records import BASES, SOURCELESS, Basis

FILE = "defaults.toml"
_CONDITIONS = ("routes", "route_groups", "forms", "kinds", "populations")
_REQUIRED = ("value", "unit", "basis", "reason")
_KNOWN = {*_REQUIRED, *_CONDITIONS, "source", "volume_from_ml"}


@dataclass(frozen=True, slots=True)
class Case:
    """One default of one key and when it applies.

    ``conditions`` maps a condition to the words that fulfil it; ``volume_from_ml`` is
    the smallest dose volume, mL.
    """

    key: str
    value: bool | float | str
    unit: str
    basis: Basis
    reason: str
    source: str
    conditions: Mapping[str, tuple[str, ...]]
    volume_from_ml: float

    def fits(self, words: Mapping[str, str], volume_ml: float) -> bool:
        """Whether every condition holds for the words of a brief."""
        return volume_ml >= self.volume_from_ml and all(
            words.get(condition) in allowed
            for condition, allowed in self.conditions.items()
        )


@functools.lru_cache(maxsize=8)
def read_cases(library: Library) -> Mapping[str, tuple[Case, ...]]:
    """Return the cases of every key, in the order in which they are tried.

    Raises
    ------
    KnowledgeError
        If a case of ours is broken; every fault at once.
    InputError
        If the overlay brings its own defaults and a case is broken.
    """
    faults: list[str] = []
    found: dict[str, tuple[Case, ...]] = {}
    for table, keys in library.defaults.items():
        if not isinstance(keys, Mapping):
            faults.append(f"{FILE}:{table}: no table, allowed [[{table}.key]]")
            continue
        for name, rows in keys.items():
            key = f"{table}.{name}"
            if not isinstance(rows, list) or not rows:
                faults.append(f"{FILE}:{key}: no list of cases, allowed [[{key}]]")
                continue
            cases = [
                _case(key, number, row, library, faults)
                for number, row in enumerate(rows, start=1)
            ]
            found[key] = tuple(case for case in cases if case is not None)
    if faults and library.overlay is not None and (library.overlay / FILE).is_file():
        raise InputError("\n".join(f"{library.overlay}/{fault}" for fault in faults))
    if faults:
        raise KnowledgeError(faults)
    return found


def _case(
    key: str, number: int, row: Any, library: Library, faults: list[str]
) -> Case | None:
    where = f"{FILE}:{key}:case {number}"
    if not isinstance(row, Mapping):
        faults.append(f"{where}: no table, allowed [[{key}]]")
        return None
    before = len(faults)
    faults.extend(
        f"{where}: {name} is missing, allowed a value"
        for name in _REQUIRED
        if name not in row
    )
    faults.extend(
        f"{where}: unknown key {name!r}, allowed {', '.join(sorted(_KNOWN))}"
        for name in row
        if name not in _KNOWN
    )
    basis, source = row.get("basis"), row.get("source", "")
    if basis is not None and basis not in BASES:
        faults.append(f"{where}: basis {basis!r}, allowed {', '.join(BASES)}")
    if source and source not in library.sources:
        faults.append(f"{where}: unknown source {source!r}, allowed ids of sources.csv")
    if not source and basis in BASES and basis not in SOURCELESS:
        faults.append(f"{where}: no source for a {basis} value, allowed a source id")
    if not isinstance(row.get("value", 0), bool | int | float | str):
        faults.append(f"{where}: value is neither number, text nor true or false")
    faults.extend(
        f"{where}: {name} is no list, allowed a list of words"
        for name in _CONDITIONS
        if not isinstance(row.get(name, []), list)
    )
    volume = row.get("volume_from_ml", 0.0)
    is_number = isinstance(volume, int | float) and not isinstance(volume, bool)
    if not is_number or not 0.0 <= volume < float("inf"):
        faults.append(f"{where}: volume_from_ml is no number, allowed 0 or more")
    if len(faults) > before:
        return None
    conditions = {name: tuple(row[name]) for name in _CONDITIONS if name in row}
    return Case(
        key=key,
        value=row["value"],
        unit=str(row["unit"]),
        basis=row["basis"],
        reason=str(row["reason"]),
        source=str(source),
        conditions={_SINGULAR[name]: words for name, words in conditions.items()},
        volume_from_ml=float(volume),
    )


_SINGULAR = {
    "routes": "route",
    "route_groups": "route_group",
    "forms": "form",
    "kinds": "kind",
    "populations": "population",
}
