"""What a qualification consists of: cases in groups, each group with its verdict.

A case is one published value beside the one found here. A group passes where every
case lies within its tolerance, the mean too where it has one. A miss that is known
and explained stays visible as such and is never a pass. Beside the tolerance, the
residuals of a group must be those recorded for this version: an installation that
computes something else is not the one that was tested.
"""

from __future__ import annotations

import math
from collections.abc import Mapping
from dataclasses import dataclass, field
from typing import Literal

Verdict = Literal["pass", "known miss", "shown", "fail"]


@dataclass(frozen=True, slots=True)
class Case:
    """One published value and what is found for it here.

    Parameters
    ----------
    label : str
        What was computed, with its conditions.
    published, found : float
        In the unit of the group.
    allowed : float or None
        Largest absolute difference; None where the case is only shown.
    source : str
        Work or works of the published value, as short references.
    basis : str
        Published, derived, memory ...; see the tables.
    """

    label: str
    published: float
    found: float
    allowed: float | None = None
    source: str = ""
    basis: str = "published"

    @property
    def miss(self) -> float:
        """Found minus published."""
        return self.found - self.published

    @property
    def is_within(self) -> bool:
        """Whether the miss is within what is allowed; true where it is only shown."""
        return self.allowed is None or abs(self.miss) <= self.allowed


@dataclass(frozen=True, slots=True)
class Statistics:
    """Residuals of a group in four numbers, in its unit.

    Parameters
    ----------
    count : int
    mean, rms : float
        Of found minus published.
    largest : float
        The miss with the largest absolute value, with its sign.
    """

    count: int
    mean: float
    rms: float
    largest: float


@dataclass(frozen=True, slots=True)
class Group:
    """Cases that are judged together.

    Parameters
    ----------
    id : str
        Unique and lasting; the record of this version refers to it.
    kind : str
        What the group belongs to, for example ``pH of standard solutions``.
    title : str
    unit : str
        Of the values; ``1`` where they have none.
    cases : tuple of Case
        At least one.
    mean_allowed : float or None
        Largest absolute mean difference.
    known_miss : str
        Why the group misses its tolerance; empty where it should pass.
    digits : int
        Decimals worth showing.
    """

    id: str
    kind: str
    title: str
    unit: str
    cases: tuple[Case, ...]
    mean_allowed: float | None = None
    known_miss: str = ""
    digits: int = 3

    def __post_init__(self) -> None:
        """Refuse an empty group and numbers that are not finite."""
        if not self.cases:
            msg = f"group {self.id} has no cases"
            raise ValueError(msg)
        for case in self.cases:
            if not (math.isfinite(case.published) and math.isfinite(case.found)):
                msg = f"group {self.id}: {case.label} is not finite"
                raise ValueError(msg)

    @property
    def statistics(self) -> Statistics:
        """Count, mean, root mean square and largest difference."""
        misses = [case.miss for case in self.cases]
        count = len(misses)
        return Statistics(
            count,
            math.fsum(misses) / count,
            math.sqrt(math.fsum(m * m for m in misses) / count),
            max(misses, key=abs),
        )

    @property
    def worst(self) -> Case:
        """The case with the largest absolute difference."""
        return max(self.cases, key=lambda case: abs(case.miss))

    @property
    def is_shown_only(self) -> bool:
        """Whether nothing in the group has a tolerance."""
        return self.mean_allowed is None and all(c.allowed is None for c in self.cases)

    @property
    def outside(self) -> tuple[Case, ...]:
        """Cases beyond their tolerance."""
        return tuple(case for case in self.cases if not case.is_within)

    @property
    def is_within(self) -> bool:
        """Whether every case, and the mean where it has a tolerance, is within it."""
        mean_misses = (
            self.mean_allowed is not None
            and abs(self.statistics.mean) > self.mean_allowed
        )
        return not self.outside and not mean_misses

    @property
    def sources(self) -> tuple[str, ...]:
        """Short references of all cases, each once."""
        return tuple(dict.fromkeys(c.source for c in self.cases if c.source))

    @property
    def tolerance(self) -> str:
        """The tolerance in words."""
        if self.is_shown_only:
            return "none: shown only"
        limits = sorted({c.allowed for c in self.cases if c.allowed is not None})
        unit = "" if self.unit == "1" else f" {self.unit}"
        words = []
        if limits and limits[-1] == 0.0:
            words.append("exact")
        elif limits:
            span = f"{limits[0]:.2g}"
            if limits[-1] > limits[0]:
                span += f" to {limits[-1]:.2g}"
            words.append(f"each within {span}{unit}")
        if self.mean_allowed is not None:
            words.append(f"mean within {self.mean_allowed:g}{unit}")
        return "; ".join(words)


@dataclass(frozen=True, slots=True)
class Judged:
    """A group with its verdict.

    Parameters
    ----------
    group : Group
    verdict : {"pass", "known miss", "shown", "fail"}
    reason : str
        Why it fails or is known to miss; empty for a pass.
    recorded : Statistics or None
        Residuals recorded for this version.
    """

    group: Group
    verdict: Verdict
    reason: str = ""
    recorded: Statistics | None = None


@dataclass(frozen=True, slots=True)
class Qualification:
    """The outcome on this installation.

    Parameters
    ----------
    groups : tuple of Judged
    versions : mapping of str to str
        Of formbuf, the knowledge, Python and the packages that compute.
    platform : mapping of str to str
    hashes : mapping of str to str
        Checksums of the knowledge, the overlay and the program.
    seed : int
        Of the random mixtures.
    seconds : float
        Time taken.
    performed : str
        Date and time in UTC, ISO 8601.
    notes : tuple of str
    """

    groups: tuple[Judged, ...]
    versions: Mapping[str, str]
    platform: Mapping[str, str]
    hashes: Mapping[str, str]
    seed: int
    seconds: float
    performed: str
    notes: tuple[str, ...] = field(default=())

    @property
    def failed(self) -> tuple[Judged, ...]:
        """Groups that fail."""
        return tuple(entry for entry in self.groups if entry.verdict == "fail")

    @property
    def passed(self) -> bool:
        """Whether no group fails."""
        return not self.failed

    def count(self, verdict: Verdict) -> int:
        """How many groups have a verdict."""
        return sum(entry.verdict == verdict for entry in self.groups)

    def __repr__(self) -> str:
        failed = len(self.failed)
        said = (
            f"{failed} group{'' if failed == 1 else 's'} failed" if failed else "passed"
        )
        return f"<Qualification: {len(self.groups)} groups, {self.cases} cases, {said}>"

    @property
    def cases(self) -> int:
        """How many cases were computed."""
        return sum(len(entry.group.cases) for entry in self.groups)


def judge(group: Group, recorded: Statistics | None) -> Judged:
    """Return a group with its verdict.

    Parameters
    ----------
    group : Group
    recorded : Statistics or None
        Residuals recorded for this version; None where there is no record of it.
    """
    if recorded is None:
        reason = "no residuals are recorded for this group in this version"
        return Judged(group, "fail", reason)
    changed = difference(group.statistics, recorded, group.digits)
    if not group.is_within and not group.known_miss:
        return Judged(group, "fail", _outside(group), recorded)
    if changed:
        return Judged(group, "fail", f"not as recorded: {changed}", recorded)
    if not group.is_within:
        return Judged(group, "known miss", group.known_miss, recorded)
    if group.known_miss:
        reason = "within tolerance, although a miss is recorded"
        return Judged(group, "fail", reason, recorded)
    return Judged(group, "shown" if group.is_shown_only else "pass", "", recorded)


def difference(found: Statistics, recorded: Statistics, digits: int) -> str:
    """Say how residuals differ from those recorded; empty where they do not.

    Differences below a tenth of the last decimal shown count as none: they come from
    the arithmetic of another machine.
    """
    if found.count != recorded.count:
        return f"{found.count} cases, recorded {recorded.count}"
    slack = 0.1 * 10.0**-digits * max(1.0, abs(recorded.largest))
    for name in ("mean", "rms", "largest"):
        here, there = getattr(found, name), getattr(recorded, name)
        if not abs(here - there) <= slack:
            more = digits + 1
            return f"{name} {here:.{more}f}, recorded {there:.{more}f}"
    return ""


def _outside(group: Group) -> str:
    outside = group.outside
    digits = group.digits
    if not outside:
        mean = group.statistics.mean
        return f"mean {mean:+.{digits}f}, allowed {group.mean_allowed:g}"
    worst = max(outside, key=lambda c: abs(c.miss) / (c.allowed or 1e-300))
    more = f" and {len(outside) - 1} more" if len(outside) > 1 else ""
    return (
        f"{worst.label}: published {worst.published:.{digits}f}, found "
        f"{worst.found:.{digits}f}, allowed {worst.allowed:.2g}{more}"
    )
