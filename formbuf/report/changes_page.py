"""Changes between two results as a page: data, flat rows, blocks to read."""

from __future__ import annotations

from collections.abc import Mapping
from typing import Any

from formbuf import __version__
from formbuf.output.figures import ABSENT, decimals, plainly, significant
from formbuf.output.page import (
    Block,
    Column,
    Grid,
    Heading,
    Page,
    Paragraph,
    number,
    section,
)
from formbuf.output.serialise import plain
from formbuf.report.changes import Change, Changes, Moved, Reason
from formbuf.report.content import clean
from formbuf.report.words import CRITERIA, OUTCOMES, SCREENS, STANDINGS, word

CHANGES_SCHEMA = "formbuf.changes/1"
SAME = "The two results say the same."


def changes_page(changes: Changes, names: Mapping[str, str]) -> Page:
    """Return changes as a page.

    Parameters
    ----------
    changes : Changes
    names : mapping of str to str
        Names of candidates by their key.
    """
    return Page(
        payload=lambda: payload(changes),
        records=lambda: records(changes),
        blocks=lambda: blocks(changes, names),
    )


def payload(changes: Changes) -> dict[str, Any]:
    """Return changes as plain data."""
    return {
        "schema": CHANGES_SCHEMA,
        "formbuf_version": __version__,
        "same": changes.is_empty,
        **plain(changes),
    }


def records(changes: Changes) -> list[dict[str, Any]]:
    """Return flat rows: one for each value, move and reason."""
    rows = []
    groups = (
        ("version", changes.versions),
        ("brief", changes.brief),
        ("ranking", changes.ranking),
        ("rule", changes.rules),
        ("choice", tuple(c for c in (changes.lead, changes.backup) if c is not None)),
    )
    for kind, found in groups:
        rows += [_record(kind, "", c.key, c.old, c.new) for c in found]
    for m in changes.moved:
        rows.append(_record("rank", m.system, "rank", m.old_rank, m.new_rank))
        rows.append(
            _record("standing", m.system, "standing", m.old_standing, m.new_standing)
        )
        rows += [_record("reason", m.system, r.what, r.old, r.new) for r in m.reasons]
    return rows


def _record(kind: str, system: str, key: str, old: Any, new: Any) -> dict[str, Any]:
    return {"kind": kind, "system": system, "key": key, "old": old, "new": new}


def blocks(changes: Changes, names: Mapping[str, str]) -> list[Block]:
    """Return changes as blocks to read."""
    if changes.is_empty:
        return [Heading("Changes", 1), Paragraph(SAME, strong=True)]
    found: list[Block] = [
        Heading("Changes", 1),
        Paragraph(headline(changes, names), strong=True),
    ]
    found += section("Program and knowledge", _values(changes.versions))
    found += section("Brief", _values(changes.brief))
    found += section("Weights, anchors and loads", _values(changes.ranking))
    found += section(
        "Rules that changed alike for every candidate", _values(changes.rules)
    )
    found += section(
        "Candidates that moved, or differ in what is proposed", _moves(changes)
    )
    return found


def headline(changes: Changes, names: Mapping[str, str]) -> str:
    """Say what became of lead and back-up."""
    parts = []
    for change, noun in ((changes.lead, "lead"), (changes.backup, "back-up")):
        if change is None:
            parts.append(f"The {noun} is the same.")
        else:
            old, new = (
                clean(names.get(k, str(k))) if k else "none"
                for k in (change.old, change.new)
            )
            parts.append(f"The {noun} was {old} and is now {new}.")
    return " ".join(parts)


def _values(found: tuple[Change, ...]) -> Grid:
    return Grid(
        (Column("Key"), Column("Before"), Column("Now")),
        tuple((clean(c.key), _shown(c.old), _shown(c.new)) for c in found),
    )


def _shown(value: Any) -> str:
    return clean(plainly(value)) or ABSENT


def _moves(changes: Changes) -> Grid:
    return Grid(
        (
            Column("Candidate"),
            Column("Before"),
            Column("Now"),
            number("Desirability"),
            Column("Why"),
        ),
        tuple(
            (
                clean(m.name),
                _stand(m.old_rank, m.old_standing),
                _stand(m.new_rank, m.new_standing),
                f"{decimals(m.old_desirability, 2)} to {decimals(m.new_desirability, 2)}",
                why(m),
            )
            for m in changes.moved
        ),
    )


def _stand(rank: int | None, standing: str) -> str:
    if not standing:
        return "not considered"
    shown = word(STANDINGS, standing)
    return shown if rank is None else f"{rank}, {shown}"


def why(moved: Moved) -> str:
    """Say why a candidate moved."""
    return "; ".join(_reason(r) for r in moved.reasons) or "the others moved"


def _reason(r: Reason) -> str:
    kind, _, name = r.what.partition(" ")
    if kind == "criterion":
        return f"{word(CRITERIA, name)} {decimals(r.old, 2)} to {decimals(r.new, 2)}"
    if kind == "screen":
        shown = clean(word(SCREENS, name))
        if r.new:
            return f"now screened out ({shown}): {_shown(r.new)}"
        return f"no longer screened out ({shown})"
    if kind == "rule":
        old, new = (
            word(OUTCOMES, _shown(x)) if x else "not judged" for x in (r.old, r.new)
        )
        return f"{clean(r.what)}: {old}, now {new}"
    unit = "required" if r.what.startswith("required") else "proposed"
    return f"{unit} {significant(r.old)} to {significant(r.new)} mmol/L"
