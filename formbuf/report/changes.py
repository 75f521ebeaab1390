"""What differs between two results, and which candidates moved and why."""

from __future__ import annotations

import math
from collections.abc import Iterator, Mapping
from dataclasses import dataclass
from typing import Any

#: Change of a desirability that is worth a word.
WORTH_SAYING = 0.005
#: Relative change of a concentration that is worth a word.
WORTH_SAYING_SHARE = 0.005
#: Standing of who is dropped; amounts of those who stay so are left out.
OUT = "screened out"


@dataclass(frozen=True, slots=True)
class Change:
    """One value that differs; None where it did not exist.

    Parameters
    ----------
    key : str
    old, new : any
        As the results hold them.
    """

    key: str
    old: Any
    new: Any


@dataclass(frozen=True, slots=True)
class Reason:
    """Why a candidate moved.

    Parameters
    ----------
    what : str
        A criterion (``criterion precedent``), a screen (``screen ceiling``), a rule
        (``rule R001``) or an amount; the heaviest criterion first.
    old, new : any
    """

    what: str
    old: Any
    new: Any


@dataclass(frozen=True, slots=True)
class Moved:
    """One candidate that stands elsewhere, or differs in what is proposed.

    Parameters
    ----------
    system, name : str
    old_rank, new_rank : int or None
    old_standing, new_standing : str
        Empty where it was not among the candidates.
    old_desirability, new_desirability : float or None
    old_concentration_mmol_l, new_concentration_mmol_l : float or None
    reasons : tuple of Reason
        The heaviest first.
    """

    system: str
    name: str
    old_rank: int | None
    new_rank: int | None
    old_standing: str
    new_standing: str
    old_desirability: float | None
    new_desirability: float | None
    old_concentration_mmol_l: float | None
    new_concentration_mmol_l: float | None
    reasons: tuple[Reason, ...]

    @property
    def changes_place(self) -> bool:
        """Whether rank or standing differ."""
        before = (self.old_rank, self.old_standing)
        return before != (self.new_rank, self.new_standing)


@dataclass(frozen=True, slots=True)
class Changes:
    """Everything that differs between two results.

    Parameters
    ----------
    versions : tuple of Change
        Program, knowledge, overlays.
    brief : tuple of Change
        By key of the brief.
    ranking : tuple of Change
        Weights, anchors, loads.
    lead, backup : Change or None
        None where they are the same.
    rules : tuple of Change
        Rules whose outcome changed alike for every candidate; they move nobody.
    moved : tuple of Moved
        By new place, then the others.
    """

    versions: tuple[Change, ...]
    brief: tuple[Change, ...]
    ranking: tuple[Change, ...]
    lead: Change | None
    backup: Change | None
    rules: tuple[Change, ...]
    moved: tuple[Moved, ...]

    @property
    def is_empty(self) -> bool:
        """Whether the two results say the same."""
        parts = (self.versions, self.brief, self.ranking, self.rules, self.moved)
        return not any(parts) and self.lead is None and self.backup is None


def compare(old: Mapping[str, Any], new: Mapping[str, Any]) -> Changes:
    """Compare two results.

    Parameters
    ----------
    old, new : mapping
        Shortlists or rationales as plain data.

    Returns
    -------
    Changes
    """
    common = _common_rules(old, new)
    return Changes(
        tuple(_differences(_versions(old), _versions(new))),
        tuple(_differences(_flat(old.get("brief")), _flat(new.get("brief")))),
        tuple(_differences(_settings(old), _settings(new))),
        _one("lead", old.get("lead"), new.get("lead")),
        _one("backup", old.get("backup"), new.get("backup")),
        common,
        tuple(_moves(old, new, {change.key for change in common})),
    )


def names_of(*results: Mapping[str, Any]) -> dict[str, str]:
    """Return the names of candidates by key; those of later results win."""
    return {
        str(c["system"]): str(c.get("name") or c["system"])
        for data in results
        for c in data.get("candidates") or ()
    }


def _versions(data: Mapping[str, Any]) -> dict[str, Any]:
    knowledge = data.get("knowledge") or {}
    return {
        "formbuf_version": data.get("formbuf_version"),
        "knowledge.version": knowledge.get("version"),
        "knowledge.sha256": knowledge.get("sha256"),
        "knowledge.overlay_sha256": knowledge.get("overlay_sha256"),
    }


def _settings(data: Mapping[str, Any]) -> dict[str, Any]:
    found = _flat(data.get("ranking"), "ranking")
    loads = data.get("loads") or {}
    for key in ("acid_mmol_l", "base_mmol_l"):
        found[f"loads.{key}"] = loads.get(key)
    return found


def _flat(value: Any, prefix: str = "") -> dict[str, Any]:
    """Return nested data by dotted keys; lists of records by position."""
    found: dict[str, Any] = {}
    if isinstance(value, Mapping) and value:
        for key, item in value.items():
            found.update(_flat(item, f"{prefix}.{key}" if prefix else str(key)))
    elif isinstance(value, list) and any(isinstance(x, Mapping | list) for x in value):
        for i, item in enumerate(value, start=1):
            found.update(_flat(item, f"{prefix}[{i}]"))
    elif isinstance(value, Mapping):
        found[prefix] = None
    else:
        found[prefix] = value
    return found


def _differences(old: Mapping[str, Any], new: Mapping[str, Any]) -> Iterator[Change]:
    for key in dict.fromkeys([*new, *old]):
        if not _same(old.get(key), new.get(key)):
            yield Change(key, old.get(key), new.get(key))


def _same(one: Any, other: Any) -> bool:
    """Whether two values are equal; numbers to twelve digits."""
    if _is_number(one) and _is_number(other):
        return math.isclose(one, other, rel_tol=1e-12, abs_tol=1e-12)
    return bool(one == other) or (
        one in (None, [], {}, "") and other in (None, [], {}, "")
    )


def _is_number(value: Any) -> bool:
    return isinstance(value, int | float) and not isinstance(value, bool)


def _one(key: str, old: Any, new: Any) -> Change | None:
    return None if old == new else Change(key, old, new)


def _by_system(data: Mapping[str, Any]) -> dict[str, Mapping[str, Any]]:
    return {c["system"]: c for c in data.get("candidates") or ()}


def _common_rules(old: Mapping[str, Any], new: Mapping[str, Any]) -> tuple[Change, ...]:
    """Rules that changed in the same way for every candidate of both results."""
    before, after = _outcomes(old), _outcomes(new)
    pairs: dict[str, list[tuple[Any, Any]]] = {}
    for system in before.keys() & after.keys():
        for name in before[system].keys() & after[system].keys():
            pair = (before[system][name], after[system][name])
            pairs.setdefault(name, []).append(pair)
    return tuple(
        Change(name, *found[0])
        for name, found in sorted(pairs.items())
        if len(found) > 1
        and len(set(found)) == 1
        and found[0][0] != found[0][1]
        and "fired" in found[0]
    )


def _outcomes(data: Mapping[str, Any]) -> dict[str, dict[str, Any]]:
    """Outcome of each rule for each candidate."""
    return {
        system: {str(f.get("rule")): f.get("outcome") for f in c.get("findings") or ()}
        for system, c in _by_system(data).items()
    }


def _moves(
    old: Mapping[str, Any], new: Mapping[str, Any], common: set[str]
) -> Iterator[Moved]:
    before, after = _by_system(old), _by_system(new)
    skipped = {f"rule {name}" for name in common}
    for system in [*after, *(s for s in before if s not in after)]:
        was, now = before.get(system), after.get(system)
        shown = now or was or {}
        moved = Moved(
            system,
            str(shown.get("name") or system),
            _rank(was),
            _rank(now),
            str((was or {}).get("standing") or ""),
            str((now or {}).get("standing") or ""),
            _number(was, "desirability"),
            _number(now, "desirability"),
            _number(was, "concentration_mmol_l"),
            _number(now, "concentration_mmol_l"),
            tuple(r for r in _reasons(was, now) if r.what not in skipped),
        )
        stays_out = moved.old_standing == moved.new_standing == OUT
        screens = any(r.what.startswith("screen ") for r in moved.reasons)
        if moved.changes_place or (moved.reasons and (screens or not stays_out)):
            yield moved


def _rank(candidate: Mapping[str, Any] | None) -> int | None:
    rank = (candidate or {}).get("rank")
    return rank if isinstance(rank, int) and not isinstance(rank, bool) else None


def _number(candidate: Mapping[str, Any] | None, key: str) -> float | None:
    value = (candidate or {}).get(key)
    return None if value is None or not _is_number(value) else float(value)


def _reasons(
    was: Mapping[str, Any] | None, now: Mapping[str, Any] | None
) -> tuple[Reason, ...]:
    if was is None or now is None:
        return ()
    found = [*_screens(was, now), *_criteria(was, now)]
    for key in ("required_mmol_l", "concentration_mmol_l"):
        one, other = _number(was, key), _number(now, key)
        if one is None and other is None:
            continue
        if one is None or other is None or _apart(one, other):
            found.append(Reason(key, one, other))
    found += _rules(was, now)
    return tuple(found)


def _apart(one: float, other: float) -> bool:
    return abs(one - other) > WORTH_SAYING_SHARE * max(abs(one), abs(other))


def _screens(was: Mapping[str, Any], now: Mapping[str, Any]) -> Iterator[Reason]:
    before = {str(s.get("id")): s.get("text") for s in was.get("screened_out_by") or ()}
    after = {str(s.get("id")): s.get("text") for s in now.get("screened_out_by") or ()}
    for name in dict.fromkeys([*after, *before]):
        if (name in before) != (name in after):
            yield Reason(f"screen {name}", before.get(name), after.get(name))


def _criteria(was: Mapping[str, Any], now: Mapping[str, Any]) -> list[Reason]:
    before, after = was.get("criteria") or {}, now.get("criteria") or {}
    found = []
    for name in dict.fromkeys([*after, *before]):
        one = _number(before.get(name), "desirability")
        other = _number(after.get(name), "desirability")
        if one is None and other is None:
            continue
        if one is None or other is None:
            found.append((math.inf, Reason(f"criterion {name}", one, other)))
        elif abs(one - other) > WORTH_SAYING:
            size = abs(math.log(max(other, 1e-6) / max(one, 1e-6)))
            found.append((size, Reason(f"criterion {name}", one, other)))
    found.sort(key=lambda pair: -pair[0])
    return [reason for _, reason in found]


def _rules(was: Mapping[str, Any], now: Mapping[str, Any]) -> Iterator[Reason]:
    before = {str(f.get("rule")): f.get("outcome") for f in was.get("findings") or ()}
    after = {str(f.get("rule")): f.get("outcome") for f in now.get("findings") or ()}
    for name in sorted({*before, *after}):
        pair = (before.get(name), after.get(name))
        if pair[0] != pair[1] and "fired" in pair:
            yield Reason(f"rule {name}", *pair)
