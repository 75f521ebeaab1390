"""What a dose and a day bring, and the acidity that the body has to neutralise."""

from __future__ import annotations

from formbuf.report.content import Block, Column, Paragraph, Spans
from formbuf.report.reading import Cursor, spans
from formbuf.report.story import Story, named, number, source_cell, table

#: Smaller amounts are left out, mmol per dose.
LEAST_MMOL_DOSE = 1e-4
#: Smaller titratable acidities are left out, mmol/L.
LEAST_ACIDITY_MMOL_L = 1e-3


def exposure(story: Story, c: Cursor, slug: str) -> list[Block]:
    """Return exposure per dose and day, and the titratable acidity."""
    rows = [
        _row(story, e)
        for e in c.each("exposures")
        if (e.number("mmol_dose") or 0.0) >= LEAST_MMOL_DOSE
    ]
    blocks: list[Block] = [_table(c, rows, slug)] if rows else []
    acidity = c.number("titratable_acidity_mmol_l")
    if acidity is not None and abs(acidity) >= LEAST_ACIDITY_MMOL_L:
        blocks.append(Paragraph(_acidity(story, c, acidity)))
    return blocks


def _row(story: Story, e: Cursor) -> tuple[Spans, ...]:
    limit = basis = spans("-")
    if e.get("limit") is not None:
        limit = spans(
            e.plain("limit"),
            " ",
            e.text("limit_unit"),
            " (",
            e.value("limit_share", percent=True, digits=2),
            " of it)",
        )
        basis = source_cell(e.get("limit_source"), e.text("limit_basis"))
    amounts = ("mmol_dose", "mmol_day", "mg_dose", "mg_day")
    return (
        spans(story.component(e.text("substance"))),
        *(spans(e.value(key)) for key in amounts),
        limit,
        basis,
    )


def _table(c: Cursor, rows: list[tuple[Spans, ...]], slug: str) -> Block:
    return table(
        f"t-exposure-{slug}",
        spans("Exposure of the patient to ions and buffer: ", named(c)),
        (
            Column("Substance", width=1.4),
            number("mmol per dose", 1.0),
            number("mmol per day", 1.0),
            number("mg per dose", 1.0),
            number("mg per day", 1.0),
            Column("Strictest limit that applies", width=1.9),
            Column("Basis and source", width=1.1),
        ),
        rows,
        [
            spans(
                "A day holds at least one dose. Species are weighed as their uncharged "
                "acid or base. Drug and water are left out."
            )
        ],
    )


def _acidity(story: Story, c: Cursor, acidity: float) -> Spans:
    more = story.more.at("room", c.text("system"))
    kind, place = "strong base", c.at("titratable_acidity_mmol_l")
    if acidity < 0.0:
        kind, place = "strong acid", more.at("alkalinity_mmol_l")
    return spans(
        "Titratable acidity: ",
        place.value(unit="mmol/L"),
        f" of {kind} brings the product to pH 7.4, that is ",
        more.value("acidity_mmol_dose", unit="mmol"),
        " per dose.",
    )
