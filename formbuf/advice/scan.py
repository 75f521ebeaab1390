"""Shortlists over a grid of briefs, one after the other, nothing kept."""

from __future__ import annotations

import copy
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

from formbuf.advice.confidence import with_confidence
from formbuf.advice.results import Candidate, Shortlist
from formbuf.advice.scan_grid import Grid, Value, dotted
from formbuf.advice.shortlist import shortlist
from formbuf.errors import ConvergenceError, InputError
from formbuf.library import Library
from formbuf.product.brief import Brief, brief_from_mapping
from formbuf.product.brief_origin import Origin

#: Moves the target and, where the brief states them, both ends of the window.
TARGET = "target_ph"

_COLUMNS = (
    "rank",
    "system",
    "standing",
    "variant_of",
    "tied_with",
    "desirability",
    "limiting",
    "required_mmol_l",
    "concentration_mmol_l",
    "ph",
    "ph_drift",
    "capacity_mmol_l_ph",
    "osmolality_mosm_kg",
)
_DRAWN = (
    "lead_chance",
    "within_at_release_chance",
    "within_at_end_chance",
    "ph_low_95",
    "ph_high_95",
)


@dataclass(frozen=True)
class ShortlistScan:
    """A scan of shortlists.

    Attributes
    ----------
    brief : Brief
    library : Library
    grid : Grid
    draws : int
        0 makes none.
    seed : int
    top : int
        Places to keep per point; 0 keeps all.
    """

    brief: Brief
    library: Library
    grid: Grid
    draws: int = 0
    seed: int = 1
    top: int = 0

    @property
    def columns(self) -> tuple[str, ...]:
        """Names of the columns, units in them."""
        keys = tuple(axis.key for axis in self.grid.axes)
        drawn = _DRAWN if self.draws else ()
        return (*keys, *_COLUMNS, *drawn, "error")

    def check(self) -> None:
        """Refuse an axis that no brief can take at any of its values.

        Raises
        ------
        InputError
            With the message of its first value.
        """
        for axis in self.grid.axes:
            faults = []
            for value in axis.values:
                try:
                    varied(self.brief, {axis.key: value})
                except InputError as error:
                    faults.append(error)
                else:
                    break
            if len(faults) == len(axis.values):
                raise faults[0]

    def rows(self, start: int = 0) -> Iterator[tuple[int, list[dict[str, Any]]]]:
        """Yield (point, rows) from a point on; a point that fails has one row.

        Raises
        ------
        KnowledgeError
            When the tables are broken.
        """
        for index in range(start, self.grid.size):
            point = self.grid.point(index)
            try:
                result = shortlist(varied(self.brief, point), self.library)
                if self.draws:
                    result = with_confidence(result, draws=self.draws, seed=self.seed)
            except (InputError, ConvergenceError) as error:
                yield index, [self._row(point, error=str(error).replace("\n", "; "))]
                continue
            kept = [
                c for c in result.ranked if not self.top or (c.rank or 0) <= self.top
            ]
            found = [self._row(point, result, c) for c in kept]
            none = "no candidate is acceptable"
            yield index, found or [self._row(point, error=none)]

    def _row(
        self,
        point: Mapping[str, Value],
        result: Shortlist | None = None,
        c: Candidate | None = None,
        error: str = "",
    ) -> dict[str, Any]:
        row: dict[str, Any] = dict.fromkeys(self.columns)
        row.update(point)
        row["error"] = error or None
        if result is None or c is None:
            return row
        measured = c.state_at("measure")
        row.update(
            rank=c.rank,
            system=c.key,
            standing=c.standing,
            variant_of=c.variant_of,
            tied_with=list(c.tied_with),
            desirability=c.desirability,
            limiting=c.limiting,
            required_mmol_l=c.required_mmol_l,
            concentration_mmol_l=c.concentration_mmol_l,
            ph=measured.ph if measured else None,
            ph_drift=c.ph_drift,
            capacity_mmol_l_ph=measured.capacity_mmol_l_ph if measured else None,
            osmolality_mosm_kg=c.osmolality_mosm_kg,
        )
        if self.draws:
            row.update(_drawn(result, c))
        return row


def _drawn(result: Shortlist, c: Candidate) -> dict[str, float | None]:
    k = c.confidence
    if k is None:
        return {}
    found = k.at(result.brief.ph.measure_temperature_c)
    release, end = k.within_at_release, k.within_at_end
    return {
        "lead_chance": k.ranks.lead.value if k.ranks else None,
        "within_at_release_chance": release.value if release else None,
        "within_at_end_chance": end.value if end else None,
        "ph_low_95": found.ph.low_95 if found else None,
        "ph_high_95": found.ph.high_95 if found else None,
    }


def varied(brief: Brief, point: Mapping[str, Value]) -> Brief:
    """Return a brief with some keys changed.

    Parameters
    ----------
    brief : Brief
    point : mapping of key to value
        Keys of the brief with dots between tables (``loads.acid_mmol_l``); entries of
        a list by their number from 1 (``storage[1].temperature_c``, or with a dot,
        ``storage.1.temperature_c``).

    Raises
    ------
    InputError
        When a key does not exist or a value is not allowed.
    """
    data = copy.deepcopy(brief.to_dict())
    for key, value in point.items():
        if key == TARGET:
            _move_target(data, value)
        else:
            _put(data, key, value)
    return brief_from_mapping(data, origin=Origin(brief.origin.name))


def _move_target(data: dict[str, Any], value: Value) -> None:
    if isinstance(value, bool) or not isinstance(value, float):
        msg = f"--over: {TARGET} of {value!r}, allowed a pH"
        raise InputError(msg)
    ph = data["ph"]
    shift = value - ph["target"]
    ph["target"] = value
    for end in ("low", "high"):
        if end in ph:
            ph[end] = round(ph[end] + shift, 9)


def _put(data: dict[str, Any], key: str, value: Value) -> None:
    *tables, last = dotted(key).split(".")
    place: Any = data
    for name in tables:
        if isinstance(place, list):
            place = place[_position(place, name, key)]
        else:
            place = place.setdefault(name, {})
        if not isinstance(place, dict | list):
            msg = f"--over: {key}: {name} holds a value, allowed a table before a dot"
            raise InputError(msg)
    if isinstance(place, list):
        place[_position(place, last, key)] = value
    else:
        place[last] = value


def _position(place: list[Any], name: str, key: str) -> int:
    if not name.isdigit() or not 1 <= int(name) <= len(place):
        msg = (
            f"--over: {key}: {name!r} is no entry of a list of {len(place)}, allowed "
            f"1 to {len(place)}"
        )
        raise InputError(msg)
    return int(name) - 1
