"""A qualification to read, as data, and as a record to be signed."""

from __future__ import annotations

from collections.abc import Iterable
from typing import Any

from formbuf.library import Library
from formbuf.output import serialise
from formbuf.output.figures import counted, decimals
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
from formbuf.qualify.records import Group, Judged, Qualification

QUALIFY_SCHEMA = "formbuf.qualify/1"
PURPOSE = (
    "The published checks that come with formbuf, computed on this installation. A "
    "group passes where every value lies within its tolerance and the residuals are "
    "those recorded for this version. A known miss lies outside its tolerance for the "
    "reason given, as recorded; groups without a tolerance are shown only. Passing says "
    "that the program computes here what it computed when it was made, and how near "
    "that is to the literature; it does not say that it suits your use."
)
SUITED = "Passing does not say that it suits your use."
#: What a person fills in; nothing here is filled by the program.
UNSIGNED = ("Performed by", "Reviewed by", "Approved by")


def qualify_page(result: Qualification, library: Library) -> Page:
    """Return a qualification as a page.

    Parameters
    ----------
    result : Qualification
    library : Library
        The knowledge that was qualified.
    """
    return Page(
        payload=lambda: qualify_dict(result, library),
        records=lambda: [_record(entry) for entry in result.groups],
        blocks=lambda: blocks(result),
    )


def record_page(result: Qualification, library: Library) -> Page:
    """Return a qualification as a record: everything, with fields to be signed."""
    return Page(
        payload=lambda: qualify_dict(result, library),
        records=lambda: [_record(entry) for entry in result.groups],
        blocks=lambda: record_blocks(result),
    )


def verdict(result: Qualification) -> str:
    """Return the outcome in one sentence."""
    failed = len(result.failed)
    said = counted(failed, "fails", "fail") if failed else "none fails"
    misses = counted(result.count("known miss"), "known miss", "known misses")
    return (
        f"{counted(len(result.groups), 'group')} with {counted(result.cases, 'case')}: "
        f"{said}; {counted(result.count('pass'), 'passes', 'pass')}, {misses}, "
        f"{result.count('shown')} shown only, {result.seconds:.1f} s."
    )


def blocks(result: Qualification) -> list[Block]:
    """Return a qualification as blocks to read."""
    found: list[Block] = [
        Heading("Qualification of this installation", 1),
        Paragraph(_installation(result)),
    ]
    for kind, entries in by_kind(result.groups):
        found += section(kind, _grid(entries))
    found += section("Failed", _reasons(result.failed))
    known = [e for e in result.groups if e.verdict == "known miss"]
    found += section("Known misses", _reasons(known))
    found += section("Notes", Items(result.notes))
    found.append(Paragraph(verdict(result), strong=True))
    found.append(Paragraph(SUITED))
    return found


def record_blocks(result: Qualification) -> list[Block]:
    """Return a qualification as a record to be kept and signed."""
    found: list[Block] = [
        Heading("Qualification record", 1),
        Paragraph(verdict(result), strong=True),
        Paragraph(PURPOSE),
    ]
    found += section("Installation", _identity(result))
    found += section("To be filled in and signed", _fields())
    for kind, entries in by_kind(result.groups):
        found += section(kind, _grid(entries))
    found += section("Failed", _reasons(result.failed))
    known = [e for e in result.groups if e.verdict == "known miss"]
    found += section("Known misses", _reasons(known))
    found += section("Notes", Items(result.notes))
    found.append(Heading("Every case"))
    for entry in result.groups:
        if entry.group.kind != "shortlists" or entry.verdict == "fail":
            found += section(
                f"{entry.group.kind}: {entry.group.title}", _cases(entry.group), level=3
            )
    return found


def by_kind(entries: Iterable[Judged]) -> list[tuple[str, list[Judged]]]:
    """Return the groups by what they belong to, in their order."""
    kinds: dict[str, list[Judged]] = {}
    for entry in entries:
        kinds.setdefault(entry.group.kind, []).append(entry)
    return list(kinds.items())


def _installation(result: Qualification) -> str:
    v, p = result.versions, result.platform
    return (
        f"formbuf {v['formbuf']}, knowledge {v['knowledge']} (sha256 "
        f"{result.hashes['knowledge'][:12]}), {p['python']}, numpy {v['numpy']}, "
        f"{p['system']} {p['machine']}, {result.performed}."
    )


def _identity(result: Qualification) -> Grid:
    rows = [("Computed", result.performed), ("Seed of random mixtures", result.seed)]
    rows += [(f"Version of {name}", text) for name, text in result.versions.items()]
    rows += [(name.capitalize(), text) for name, text in result.platform.items()]
    rows += [
        (f"SHA-256 of the {name}", text or "none")
        for name, text in result.hashes.items()
    ]
    cells = tuple((name, str(text)) for name, text in rows)
    return Grid((Column("What", keep=True), Column("Value")), cells)


def _fields() -> Grid:
    columns = (Column("Role"), Column("Name"), Column("Signature"), Column("Date"))
    rows = [(role, "", "", "") for role in UNSIGNED]
    rows += [
        ("Computer (name, inventory number)", "", "", ""),
        ("Intended use and its requirements", "", "", ""),
        ("Conclusion", "", "", ""),
    ]
    return Grid(columns, tuple(rows))


def _grid(entries: Iterable[Judged]) -> Grid:
    rows = []
    for entry in entries:
        group, s = entry.group, entry.group.statistics
        rows.append(
            (
                group.title,
                str(s.count),
                _figure(s.mean, group),
                _figure(s.rms, group, sign=False),
                _figure(s.largest, group),
                group.tolerance,
                entry.verdict,
                "; ".join(group.sources),
            )
        )
    columns = (
        Column("Group"),
        number("Cases"),
        number("Mean"),
        number("RMS", 90),
        number("Largest"),
        Column("Tolerance", from_width=100),
        Column("Verdict", keep=True),
        Column("Source", from_width=140),
    )
    return Grid(columns, tuple(rows))


def _figure(value: float, group: Group, *, sign: bool = True) -> str:
    if value and abs(value) < 0.5 * 10.0**-group.digits:
        return f"{value:+.0e}" if sign else f"{value:.0e}"
    return decimals(value, group.digits, sign=sign)


def _reasons(entries: Iterable[Judged]) -> Items:
    return Items(tuple(f"{e.group.kind}, {e.group.title}: {e.reason}" for e in entries))


def _cases(group: Group) -> Grid:
    digits = group.digits
    columns = (
        Column("Case"),
        number("Published"),
        number("Found"),
        number("Miss"),
        number("Allowed"),
        Column("Basis"),
        Column("Source"),
    )
    rows = tuple(
        (
            case.label,
            decimals(case.published, digits),
            decimals(case.found, digits),
            _figure(case.miss, group),
            "-" if case.allowed is None else f"{case.allowed:.2g}",
            case.basis,
            case.source,
        )
        for case in group.cases
    )
    return Grid(columns, rows)


def _record(entry: Judged) -> dict[str, Any]:
    group, s = entry.group, entry.group.statistics
    worst = group.worst
    return {
        "kind": group.kind,
        "group": group.title,
        "unit": group.unit,
        "cases": s.count,
        "mean": s.mean,
        "root_mean_square": s.rms,
        "largest": s.largest,
        "largest_case": worst.label,
        "tolerance": group.tolerance,
        "verdict": entry.verdict,
        "reason": entry.reason,
        "sources": list(group.sources),
    }


def qualify_dict(result: Qualification, library: Library) -> dict[str, Any]:
    """Return a qualification as plain data."""
    return {
        **serialise.header(QUALIFY_SCHEMA, library),
        "passed": result.passed,
        "performed_utc": result.performed,
        "seconds": round(result.seconds, 3),
        "seed": result.seed,
        "versions": dict(result.versions),
        "platform": dict(result.platform),
        "sha256": {name: text or None for name, text in result.hashes.items()},
        "groups": [_group_dict(entry) for entry in result.groups],
        "unsigned": {role.lower().replace(" ", "_"): None for role in UNSIGNED},
        "warnings": list(result.notes),
    }


def _group_dict(entry: Judged) -> dict[str, Any]:
    group, recorded = entry.group, entry.recorded
    return {
        "id": group.id,
        **{k: v for k, v in _record(entry).items() if k != "cases"},
        "known_miss": group.known_miss or None,
        "recorded": None if recorded is None else serialise.plain(recorded),
        "cases": [
            {**serialise.plain(case), "miss": case.miss, "within": case.is_within}
            for case in group.cases
        ],
    }
