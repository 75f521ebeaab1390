"""Everything behind one candidate, as sections of rows."""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import replace
from typing import Any

from formbuf.advice.loads import LoadItem
from formbuf.advice.results import Candidate, Shortlist
from formbuf.output import explain_parts as parts
from formbuf.output import serialise, words
from formbuf.output.bench_words import kinds_words
from formbuf.output.figures import ABSENT, decimals, plainly, significant
from formbuf.output.leaves import leaves
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

#: A titratable acidity below this is the noise of the solution [mmol/L].
NEXT_TO_NOTHING = 1e-4


def explain_page(
    result: Shortlist, candidate: Candidate, notes: Sequence[str] = ()
) -> Page:
    """Return everything behind one candidate as a page.

    Parameters
    ----------
    result : Shortlist
    candidate : Candidate
        Of that shortlist, screened out or not.
    notes : sequence of str
        What else to say about the question, for example that the candidate was judged
        only because it was asked for.
    """
    return Page(
        payload=lambda: serialise.explain_dict(result, candidate, notes),
        records=lambda: records(result, candidate, notes),
        blocks=lambda: blocks(result, candidate, notes),
    )


def blocks(
    result: Shortlist, candidate: Candidate, notes: Sequence[str] = ()
) -> list[Block]:
    """Return everything behind one candidate as blocks to read."""
    c = candidate
    found: list[Block] = [
        Heading(words.title_of(result.brief), 1),
        Paragraph(_verdict(result, c), strong=True),
    ]
    found += [Items(tuple(notes))] if notes else []
    found += section("Screens", _screens(c))
    found += section("Why this place", _criteria(result, c))
    found += section("Size and loads", _size(result, c), _loads(result))
    found += section("Composition, per litre", words.composition_grid(result, [c]))
    found += section("States", _states(c), Paragraph(_state_legend(result, c)))
    found += section("Dissolved at the measurement temperature", parts.species_grid(c))
    found += section("Freezing and drying", *parts.frozen_blocks(c))
    found += section("Findings that apply or are open", _findings(c))
    found += section("What a dose brings", parts.exposures_grid(c.exposures))
    found += section("Ionization", parts.ionization_grid(result, c))
    found += section("Notes", Items(c.notes))
    found += section("Assumptions", words.assumptions_grid(result.assumptions))
    found += section("Warnings", words.warnings_items(result.warnings))
    found += section("Sources", _sources(result, c))
    found.append(Paragraph(words.CAUTION))
    return found


def _verdict(result: Shortlist, c: Candidate) -> str:
    place = words.standing_words(c)
    if c.variant_of:
        place += f", listed under {c.variant_of}"
    figure = ""
    if c.desirability is not None:
        figure = f"; desirability {decimals(c.desirability, 3)}"
    limit = f", limited by {words.criterion_name(c.limiting)}" if c.limiting else ""
    names = {other.key: other.name for other in result.candidates}
    tied = words.listed([names[key] for key in c.tied_with])
    ties = f"; tied within uncertainty with {tied}"
    return f"{words.made(c)}: {place}{figure}{limit}{ties if c.tied_with else ''}."


def _screens(c: Candidate) -> Grid:
    rows = tuple(
        (
            s.id,
            s.text,
            s.basis,
            f"set aside by {s.overridden_by}" if s.overridden_by else "screens it out",
        )
        for s in c.screens
    )
    columns = (
        Column("Screen", keep=True),
        Column("Text"),
        Column("Basis", from_width=100),
        Column("Effect"),
    )
    return Grid(columns, rows)


def _criteria(result: Shortlist, c: Candidate) -> Grid:
    rows = []
    for name, judged in c.criteria.items():
        rows.append(
            (
                words.criterion_name(name),
                significant(judged.value),
                "share" if judged.unit == "1" else judged.unit,
                decimals(judged.desirability, 3),
                plainly(result.settings.weights.get(name)),
                _anchors(result, c, name),
                "limits it" if judged.limiting else "",
                judged.text,
            )
        )
    columns = (
        Column("Criterion", keep=True),
        number("Value"),
        Column("Unit", keep=True),
        number("Desirability", short="Desira-\nbility"),
        number("Weight", 100),
        Column("1 at / floor at", from_width=100, keep=True),
        Column("Note", from_width=100),
        Column("Finding"),
    )
    return Grid(columns, tuple(rows))


def _anchors(result: Shortlist, c: Candidate, name: str) -> str:
    anchors = result.settings.anchors.get(name)
    if anchors is None:
        return "classes"
    floor = anchors.floor
    if floor is None:
        floor = c.ceiling_mmol_l if name == "capacity" else None
    return f"{plainly(anchors.full)} / {plainly(floor)} ({anchors.scale})"


def _size(result: Shortlist, c: Candidate) -> Grid:
    carried = ABSENT if c.carried_share is None else f"{100 * c.carried_share:.0f} %"
    required = "more than considered"
    if c.required_mmol_l is not None:
        required = f"{significant(c.required_mmol_l)} mmol/L"
    rows = (
        ("required to carry the loads", required),
        ("load that sets it", c.limiting_load),
        ("concentration", f"{significant(c.concentration_mmol_l)} mmol/L"),
        ("share of the loads it carries", carried),
        ("ceiling of the route", _amount(c.ceiling_mmol_l, "mmol/L")),
        ("osmolality of the product", _amount(c.osmolality_mosm_kg, "mosmol/kg")),
        ("osmolality of the buffer", _amount(c.buffer_osmolality_mosm_kg, "mosmol/kg")),
        _to_physiological(c.titratable_acidity_mmol_l),
        (
            "tonicity aimed at",
            _amount(result.brief.tonicity.target_mosm_kg, "mosmol/kg"),
        ),
    )
    return Grid((Column("Size", keep=True), Column("Value")), rows)


def _to_physiological(acidity_mmol_l: float | None) -> tuple[str, str]:
    """Return which titrant brings the product to pH 7.4, and how much of it."""
    which = "acid" if (acidity_mmol_l or 0.0) < -NEXT_TO_NOTHING else "base"
    amount = None if acidity_mmol_l is None else abs(acidity_mmol_l)
    if amount is not None and amount < NEXT_TO_NOTHING:
        amount = 0.0
    return f"strong {which} to pH 7.4", _amount(amount, "mmol/L")


def _amount(value: float | None, unit: str) -> str:
    return ABSENT if value is None else f"{significant(value)} {unit}"


def merged_loads(items: Sequence[LoadItem]) -> list[LoadItem]:
    """Return loads with acid and base over shelf life as one, where one note says both."""
    merged: list[LoadItem] = []
    for item in items:
        before = merged[-1] if merged else None
        if before is not None and _same_note(before, item):
            merged[-1] = replace(
                before,
                name=f"acid and {item.name}",
                acid_mmol_l=before.acid_mmol_l + item.acid_mmol_l,
                base_mmol_l=before.base_mmol_l + item.base_mmol_l,
            )
        else:
            merged.append(item)
    return merged


def _same_note(one: LoadItem, other: LoadItem) -> bool:
    said = [(i.basis, i.source, i.reason, i.is_default) for i in (one, other)]
    names = one.name.removeprefix("acid "), other.name.removeprefix("base ")
    return said[0] == said[1] and names[0] == names[1] and one.name != other.name


def _loads(result: Shortlist) -> Grid:
    rows: list[tuple[str, ...]] = [
        (
            item.name,
            significant(item.acid_mmol_l),
            significant(item.base_mmol_l),
            item.told_basis,
            item.reason,
        )
        for item in merged_loads(result.loads.items)
    ]
    total = result.loads
    rows.append(
        (
            "total",
            significant(total.acid_mmol_l),
            significant(total.base_mmol_l),
            "",
            "",
        )
    )
    columns = (
        Column("Load", keep=True),
        number("Acid,\nmmol/L"),
        number("Base,\nmmol/L"),
        Column("Basis", keep=True),
        Column("Reason"),
    )
    return Grid(columns, tuple(rows))


def _states(c: Candidate) -> Grid:
    rows = tuple(
        (
            decimals(s.temperature_c, 1).removesuffix(".0"),
            kinds_words(s.kinds),
            decimals(s.ph, 3),
            decimals(s.ph_slope_per_k, 4, sign=True),
            significant(s.capacity_mmol_l_ph),
            significant(s.acid_to_low_mmol_l),
            significant(s.base_to_high_mmol_l),
            significant(s.buffer_capacity_mmol_l_ph),
            significant(s.ionic_strength_mol_kg),
            "extrapolated" if s.is_extrapolated else "",
        )
        for s in c.states
    )
    columns = (
        number("C"),
        Column("Kind"),
        number("pH"),
        number("dpH/dT,\n1/K"),
        number("Capacity,\nmmol/L/pH"),
        number("Acid room,\nmmol/L"),
        number("Base room,\nmmol/L"),
        number("of the buffer,\nmmol/L/pH", WIDE),
        number("Ionic strength,\nmol/kg", WIDE),
        Column("Note", from_width=WIDE),
    )
    return Grid(columns, rows)


def _state_legend(result: Shortlist, c: Candidate) -> str:
    if not c.states:
        return ""
    ph = result.brief.ph
    text = (
        "Acid and base room: strong acid and base that move pH to the limits of the "
        f"window, {ph.low:.2f} to {ph.high:.2f} at {ph.measure_temperature_c:g} C and as "
        "wide around the unloaded pH elsewhere."
    )
    if any(s.is_extrapolated for s in c.states):
        text += " Below 0 C and above 77 C the ionization data are extrapolated."
    return text


def _findings(c: Candidate) -> Grid:
    order = {"exclude": 0, "warn": 1, "note": 2}
    kept = [f for f in c.findings if f.outcome != "not fired"]
    kept.sort(key=lambda f: (f.outcome != "fired", order.get(f.severity, 3), f.rule))
    rows = tuple(
        (
            f.rule,
            words.SEVERITY_WORDS.get(f.severity, f.severity),
            words.OUTCOME_WORDS.get(f.outcome, f.outcome),
            f.basis,
            _finding_text(f),
        )
        for f in kept
    )
    columns = (
        Column("Rule", keep=True),
        Column("Severity", keep=True),
        Column("Outcome", keep=True),
        Column("Basis", from_width=100, keep=True),
        Column("Finding"),
    )
    return Grid(columns, rows)


def _finding_text(finding: Any) -> str:
    record = getattr(finding, "record", None)
    text = f"{record.title}. {record.effect}" if record else str(finding.text)
    missing = getattr(finding, "missing", ())
    values = getattr(finding, "values", {})
    if finding.outcome == "fired" and values:
        text += f" [{', '.join(f'{k} = {plainly(v)}' for k, v in values.items())}]"
    if finding.outcome == "not evaluable" and missing:
        text += f" [not known: {', '.join(missing)}]"
    override = getattr(finding, "override", None)
    if override is not None:
        text += f" [set aside by {override.name}, {override.date}: {override.reason}]"
    return text


def _sources(result: Shortlist, c: Candidate) -> Items:
    known = result.library.sources
    return Items(
        tuple(
            f"{source}: {known[source].text}"
            for source in serialise.sources_of(result, c)
            if source in known
        )
    )


def records(
    result: Shortlist, candidate: Candidate, notes: Sequence[str] = ()
) -> list[dict[str, Any]]:
    """Return the candidate as rows of path and value, every leaf of the JSON data."""
    data = serialise.explain_dict(result, candidate, notes)
    return [{"key": key, "value": value} for key, value in leaves(data)]
