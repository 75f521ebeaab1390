"""The shortlist to read, and as flat rows."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from formbuf.advice.criteria_table import CRITERIA
from formbuf.advice.results import Candidate, LiquidState, Shortlist
from formbuf.advice.wording import upper_first
from formbuf.library.rule_tables import ANY, ANY_BUFFER
from formbuf.output import serialise, words
from formbuf.output.confidence_page import confidence_blocks, confidence_row
from formbuf.output.figures import decimals, plainly, significant
from formbuf.output.page import (
    WIDE,
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

#: Most systems that are named where any number could stand.
MOST_NAMES = 3


def shortlist_page(result: Shortlist, *, top: int | None = None) -> Page:
    """Return a shortlist as a page.

    Parameters
    ----------
    result : Shortlist
    top : int, optional
        Best places to show; candidates without a place are always shown.
    """
    return Page(
        payload=lambda: serialise.shortlist_dict(result, top=top),
        records=lambda: records(result, top),
        blocks=lambda: blocks(result, top),
    )


def blocks(result: Shortlist, top: int | None = None) -> list[Block]:
    """Return a shortlist as blocks to read."""
    shown = [c for c in result.ranked if serialise.within(c, top)]
    best = [c for c in (result.lead, result.backup) if c is not None]
    found: list[Block] = [
        Heading(words.title_of(result.brief), 1),
        Paragraph(result.verdict, strong=True),
    ]
    if shown:
        found += [_ranking(result, shown), Paragraph(_legend(result))]
    places = len(result.heads)
    if top is not None and top < places:
        found.append(Paragraph(f"Showing {top} of {places} places (--top)."))
    ties = _ties(shown)
    found += [Paragraph(ties)] if ties else []
    found += _without_buffer(result)
    found += confidence_blocks(result, shown)
    found += section("Composition", words.composition_grid(result, best))
    found += section(
        "Rules that apply or stay open, by candidate",
        _worst([c for c in shown if c.variant_of is None]),
    )
    found += section("Warnings on the lead and the back-up", _findings(result, best))
    found += section("Findings on the product, whatever the buffer", _common(result))
    found += section("What to find out next", _missing(result))
    found += section("Notes", _notes(shown))
    found += section("Set aside", _set_aside(result))
    found += section("Screened out", _dropped(result))
    found += section("Assumptions", words.assumptions_grid(result.assumptions))
    found += section("Warnings", words.warnings_items(result.warnings))
    found.append(Paragraph(words.CAUTION))
    return found


def _ranking(result: Shortlist, shown: Sequence[Candidate]) -> Grid:
    columns = (
        number("Rank", short="#"),
        Column("System"),
        number("mmol/L"),
        number("pH\ndrift"),
        number("mosmol/kg", short="mosmol\n/kg"),
        number("Desirability", short="Desira-\nbility"),
        Column("Limited by", keep=True),
        number("Required,\nmmol/L", WIDE),
        number("Capacity,\nmmol/L/pH", WIDE),
        number("Buffer,\nmosmol/kg", WIDE),
    )
    return Grid(columns, tuple(_row(result, c) for c in shown))


def _row(result: Shortlist, c: Candidate) -> tuple[str, ...]:
    own = " (own formula)" if c.is_own_formula else ""
    measured = c.state_at("measure")
    return (
        "" if c.variant_of else str(c.rank),
        f"  or {c.name}{own}" if c.variant_of else f"{c.name}{own}",
        significant(c.concentration_mmol_l),
        words.ph_words(c.ph_drift, sign=True),
        decimals(c.osmolality_mosm_kg, 0),
        decimals(c.desirability, 3),
        words.criterion_name(c.limiting) if c.limiting else "nothing",
        _required(c),
        significant(measured.capacity_mmol_l_ph if measured else None),
        decimals(c.buffer_osmolality_mosm_kg, 0),
    )


def _required(c: Candidate) -> str:
    if c.required_mmol_l is None:
        return "too much"
    return significant(c.required_mmol_l)


def _legend(result: Shortlist) -> str:
    at = result.brief.ph.measure_temperature_c
    return (
        "mmol/L: buffer in total. pH drift: largest change from "
        f"{at:g} C to a liquid storage temperature. mosmol/kg: the whole product. "
        "Desirability: 1 is best, "
        f"{plainly(result.settings.floor_value)} the floor."
    )


def _ties(shown: Sequence[Candidate]) -> str:
    """Say which places could swap within uncertainty, pair by pair."""
    by_key = {c.key: c for c in shown}
    said: list[str] = []
    seen: set[str] = set()
    for c in shown:
        seen.add(c.key)
        later = [by_key[k].name for k in c.tied_with if k in by_key and k not in seen]
        if later:
            said.append(f"{c.name} with {words.listed(later)}")
    return f"Tied within uncertainty: {'; '.join(said)}." if said else ""


def _without_buffer(result: Shortlist) -> list[Block]:
    arm = next((c for c in result.candidates if c.system.id == "none"), None)
    if arm is None or arm.standing == "screened out":
        return []
    reasons = [f" {upper_first(note)}." for note in arm.notes]
    standing = words.standing_words(arm)
    return [Paragraph(f"Without a buffer: {standing}.{''.join(reasons)}")]


def _worst(shown: Sequence[Candidate]) -> Grid:
    """Return the worst finding of each candidate and how many rules came out how."""
    columns = (
        Column("System"),
        number("Warnings"),
        number("Notes"),
        number("Open"),
        Column("Worst finding of its own"),
    )
    rows = []
    for c in shown:
        found = c.criteria.get("compatibility")
        count = c.finding_counts
        rows.append(
            (
                c.name,
                str(count.get("warn", 0)),
                str(count.get("note", 0)),
                str(count.get("not evaluable", 0)),
                found.text if found is not None else "",
            )
        )
    return Grid(columns, tuple(rows))


def _findings(result: Shortlist, candidates: Sequence[Candidate]) -> Grid:
    """Return what warns of the best candidates; notes are left to explain."""
    common = {finding.rule for finding in result.product_findings}
    common |= open_alike(result)
    rows = [
        (c.name if first else "", words.finding_words(f))
        for c in candidates
        for first, f in _marked(
            [
                f
                for f in c.findings
                if _weighs(f) and f.severity != "note" and f.rule not in common
            ]
        )
    ]
    return Grid((Column("System"), Column("Finding")), tuple(rows))


def open_alike(result: Shortlist) -> set[str]:
    """Open rules about no buffer in particular, behind a question that is asked.

    Each is said once, as that question, and not again for each candidate.
    """
    asked = {rule for missing in result.missing_facts for rule in missing.rules}
    return {
        f.rule
        for c in result.heads
        for f in c.findings
        if f.outcome == "not evaluable"
        and f.rule in asked
        and {ANY, ANY_BUFFER} & set(f.record.concerns)
    }


def _marked(items: Sequence[Any]) -> list[tuple[bool, Any]]:
    return [(position == 0, item) for position, item in enumerate(items)]


def _weighs(finding: Any) -> bool:
    """Whether a finding speaks against the candidate itself."""
    scope = getattr(finding, "scope", "candidate")
    return words.is_against(finding) and scope == "candidate"


def _common(result: Shortlist) -> Items:
    return Items(tuple(words.finding_words(f) for f in result.product_findings))


def _missing(result: Shortlist) -> Items:
    """Return the questions whose answers could change the order, worst first."""
    names = {c.key: c.name for c in result.candidates} | {"none": "no added buffer"}
    return Items(
        tuple(
            f"{m.fact.question} ({m.fact.held_in}; could "
            f"{'exclude' if m.could_exclude else 'lower'} "
            f"{_some([names[key] for key in m.systems])})"
            for m in result.missing_facts
        )
    )


def _some(names: Sequence[str]) -> str:
    """Return the first names of a list, and how many more there are."""
    if len(names) <= MOST_NAMES:
        return words.listed(names)
    return f"{', '.join(names[:MOST_NAMES])} and {len(names) - MOST_NAMES} more"


def _notes(shown: Sequence[Candidate]) -> Items:
    """Return what is noted of the candidates, each note once."""
    by_note: dict[str, list[str]] = {}
    for c in shown:
        for note in c.notes:
            by_note.setdefault(note, []).append(c.name)
    return Items(tuple(f"{_some(names)}: {note}" for note, names in by_note.items()))


def _set_aside(result: Shortlist) -> Items:
    return Items(
        tuple(
            f"{c.name}: {s.text} ({s.id}); set aside by {s.overridden_by}"
            for c in result.candidates
            for s in c.screens
            if s.overridden_by
        )
    )


def _dropped(result: Shortlist) -> Grid:
    rows = [
        (c.name if first else "", f"{screen.text} ({screen.id})", screen.basis)
        for c in result.dropped
        for first, screen in _marked(c.dropped_by)
    ]
    columns = (Column("System"), Column("Reason"), Column("Basis", from_width=100))
    return Grid(columns, tuple(rows))


def records(result: Shortlist, top: int | None = None) -> list[dict[str, Any]]:
    """Return one flat row per candidate; units in the names of the columns."""
    temperatures = sorted(
        {s.temperature_c for c in result.candidates for s in c.states}
    )
    drawn = result.confidence is not None
    return [
        {**_record(c, temperatures), **(confidence_row(c) if drawn else {})}
        for c in result.candidates
        if serialise.within(c, top)
    ]


def _record(c: Candidate, temperatures: Sequence[float]) -> dict[str, Any]:
    measured = c.state_at("measure")
    states: dict[float, LiquidState] = {s.temperature_c: s for s in c.states}
    fill = c.tonicity_fill
    fired = [f for f in c.findings if _weighs(f) and f.outcome == "fired"]
    frozen = serialise.frozen_dict(c.frozen) or {}
    row: dict[str, Any] = {
        "rank": c.rank,
        "system": c.key,
        "name": c.name,
        "standing": c.standing,
        "variant_of": c.variant_of,
        "tied_with": list(c.tied_with),
        "desirability": c.desirability,
        "limiting": c.limiting,
        "required_mmol_l": c.required_mmol_l,
        "concentration_mmol_l": c.concentration_mmol_l,
        "ceiling_mmol_l": c.ceiling_mmol_l,
        "ph_drift": c.ph_drift,
        "capacity_mmol_l_ph": measured.capacity_mmol_l_ph if measured else None,
        "osmolality_mosm_kg": c.osmolality_mosm_kg,
        "buffer_osmolality_mosm_kg": c.buffer_osmolality_mosm_kg,
        "titratable_acidity_mmol_l": c.titratable_acidity_mmol_l,
        "composition_mmol_l": [f"{w.material}={w.mmol_l!r}" for w in c.composition],
        "tonicity_fill_mmol_l": f"{fill.material}={fill.mmol_l!r}" if fill else None,
    }
    for name in CRITERIA:
        judged = c.criteria.get(name)
        row[f"{name}_desirability"] = judged.desirability if judged else None
    for at in temperatures:
        row[f"ph_at_{at:g}_c"] = states[at].ph if at in states else None
    row["frozen_class"] = frozen.get("counted_class") or frozen.get("freezing_class")
    for severity in ("exclude", "warn", "note"):
        row[f"{severity}_findings"] = [f.rule for f in fired if f.severity == severity]
    row["screened_out_by"] = [s.id for s in c.dropped_by]
    row["screened_out_reason"] = [s.text for s in c.dropped_by]
    row["notes"] = list(c.notes)
    return row
