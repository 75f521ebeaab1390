"""What would change the lead, and the map of the decision, as a page."""

from __future__ import annotations

from typing import TYPE_CHECKING, Any

from formbuf.output import words
from formbuf.output.figures import ABSENT, decimals, significant
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
from formbuf.output.serialise import header
from formbuf.product.overlay_changes import overlay_notice

if TYPE_CHECKING:
    from formbuf.advice.decision_map import DecisionMap, MapPoint, Place
    from formbuf.advice.requirement_changes import RequirementChange, Sensitivity
    from formbuf.library import Library

SCHEMA = "formbuf.sensitivity/1"
_REQUIREMENTS = {
    "target_ph": "target pH",
    "acid_load": "acid load",
    "base_load": "base load",
    "ceiling": "ceilings of concentration",
}


def sensitivity_page(found: Sensitivity, chart: DecisionMap, library: Library) -> Page:
    """Return sensitivity and decision map as a page.

    Parameters
    ----------
    found : Sensitivity
    chart : DecisionMap
    library : Library
    """
    return Page(
        payload=lambda: {
            **header(SCHEMA, library),
            "sensitivity": found.to_dict(),
            "decision_map": chart.to_dict(),
        },
        records=lambda: _records(chart),
        blocks=lambda: _blocks(found, chart, overlay_notice(library)),
    )


def _blocks(found: Sensitivity, chart: DecisionMap, overlay: str) -> list[Block]:
    blocks: list[Block] = [Heading(f"{chart.title}: what would change the lead", 1)]
    if found.lead is None:
        blocks.append(Paragraph("No buffer is acceptable as the brief stands."))
    else:
        blocks.append(Paragraph(f"Lead as it stands: {found.lead_name}.", strong=True))
    names = {p.system: p.name for point in chart.points for p in point.places}
    blocks += section("Requirements", _requirements(found))
    blocks += section("Weights", _weights(found, names))
    blocks += section("Lead and back-up over the target pH", _chart(chart))
    blocks += [Paragraph(f"{overlay[0].upper()}{overlay[1:]}.")] if overlay else []
    blocks.append(Paragraph(words.CAUTION))
    return blocks


def _requirements(found: Sensitivity) -> Grid:
    columns = (
        Column("Moved"),
        number("As it is"),
        number("Lead changes at"),
        Column("Then leads"),
    )
    return Grid(columns, tuple(_requirement(r) for r in found.requirements))


def _requirement(r: RequirementChange) -> tuple[str, ...]:
    name = f"{_REQUIREMENTS[r.requirement]}, {r.direction}"
    digits = 3 if r.requirement == "target_ph" else 2
    unit = {"pH": "", "times": " times"}.get(r.unit, f" {r.unit}")
    now = f"{significant(r.value, digits)}{unit}"
    if r.needed is None:
        limit = significant(r.limit, digits)
        return (name, now, f"not {r.direction} to {limit}{unit}", ABSENT)
    then = r.new_lead_name or "no candidate"
    return (name, now, f"{significant(r.needed, digits)}{unit}", then)


def _weights(found: Sensitivity, names: dict[str, str]) -> Items:
    texts = []
    for w in found.weights:
        name = words.criterion_name(w.criterion)
        if w.needed is None or w.new_lead is None:
            continue
        new = names.get(w.new_lead, w.new_lead)
        texts.append(f"{name}: from {w.weight:g} to {significant(w.needed, 2)}, {new}")
    fixed = [
        words.criterion_name(w.criterion) for w in found.weights if w.needed is None
    ]
    if fixed:
        texts.append(f"no weight changes the lead: {words.listed(fixed)}")
    return Items(tuple(texts))


def _chart(chart: DecisionMap) -> Grid:
    columns = (
        number("Target pH"),
        Column("Lead"),
        number("mmol/L"),
        number("Desirability", short="Desira-\nbility"),
        Column("Back-up"),
        number("Behind by", short="Behind\nby"),
    )
    return Grid(columns, tuple(_row(chart, p) for p in chart.points))


def _row(chart: DecisionMap, point: MapPoint) -> tuple[str, ...]:
    lead, backup = point.lead, point.backup
    here = " *" if abs(point.target_ph - chart.target_ph) < 1e-9 else ""
    at = f"{decimals(point.target_ph, 2)}{here}"
    if lead is None:
        return (at, "none is acceptable", ABSENT, ABSENT, ABSENT, ABSENT)
    gap = lead.desirability - backup.desirability if backup else None
    return (
        at,
        lead.name,
        significant(lead.concentration_mmol_l),
        decimals(lead.desirability, 3),
        _backup(lead, backup),
        decimals(gap, 3),
    )


def _backup(lead: Place, backup: Place | None) -> str:
    if backup is None:
        return ABSENT
    return f"{backup.name} (tied)" if backup.system in lead.tied_with else backup.name


def _records(chart: DecisionMap) -> list[dict[str, Any]]:
    return [
        {
            "target_ph": point.target_ph,
            "rank": rank,
            "system": place.system,
            "name": place.name,
            "desirability": place.desirability,
            "concentration_mmol_l": place.concentration_mmol_l,
            "ph_drift": place.ph_drift,
            "limiting": place.limiting,
            "tied_with": list(place.tied_with),
        }
        for point in chart.points
        for rank, place in enumerate(point.places, start=1)
    ]
