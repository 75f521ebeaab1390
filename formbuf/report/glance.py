"""Key figures of lead and back-up side by side."""

from __future__ import annotations

from formbuf.report.content import Column, Spans, Table
from formbuf.report.reading import Cursor, parted, spans
from formbuf.report.story import (
    C,
    Story,
    counted_class,
    is_none,
    named,
    state_of,
    table,
)
from formbuf.report.words import CRITERIA, word


def glance(story: Story) -> Table:
    """Key figures of lead and back-up side by side."""
    both = story.first_two
    columns = [Column("Figure", width=3.0)]
    heads = ("Lead", "Back-up")
    columns += [Column(heads[i], width=2.5) for i in range(len(both))]
    rows: list[tuple[Spans, ...]] = [
        (spans("System"), *(spans(named(c)) for c in both)),
        (
            spans("Concentration proposed, mmol/L"),
            *(
                spans("-" if is_none(c) else c.value("concentration_mmol_l", trim=True))
                for c in both
            ),
        ),
        (
            spans("Concentration that the loads require, mmol/L"),
            *(spans("-" if is_none(c) else c.value("required_mmol_l")) for c in both),
        ),
        (spans("To weigh for one litre"), *(_weighed(story, c) for c in both)),
        (spans("Tonicity agent for one litre"), *(_fill(story, c) for c in both)),
        (
            spans("pH at the temperature of measurement"),
            *(_ph_at(c, "measure") for c in both),
        ),
        (spans("pH at storage"), *(_ph_at(c, "storage") for c in both)),
        (
            spans("Capacity of the product at measurement, mmol/L per pH"),
            *(_measured(c, "capacity_mmol_l_ph") for c in both),
        ),
        (
            spans("Osmolality of the product, mosmol/kg"),
            *(spans(c.value("osmolality_mosm_kg", places=0)) for c in both),
        ),
    ]
    if story.is_cold:
        rows.append(
            (
                spans("Change of pH on freezing (class)"),
                *(spans(counted_class(c) or "-") for c in both),
            )
        )
    rows += [
        (
            spans("Weakest criterion"),
            *(spans(word(CRITERIA, c.text("limiting")) or "none") for c in both),
        ),
        (
            spans("Overall desirability"),
            *(spans(c.value("desirability", places=2)) for c in both),
        ),
    ]
    caption = "Lead and back-up" if len(both) > 1 else "The lead"
    return table("t-glance", spans(caption), columns, rows)


def _weighed(story: Story, candidate: Cursor) -> Spans:
    parts: list[Spans] = [
        spans(
            w.value("g_l", digits=4, unit="g"), " ", story.material(w.text("material"))
        )
        for w in candidate.each("composition")
    ]
    return parted(parts) or spans("-")


def _fill(story: Story, candidate: Cursor) -> Spans:
    if candidate.get("tonicity_fill") is None:
        return spans("-")
    fill = candidate.at("tonicity_fill")
    return spans(
        fill.value("g_l", digits=4, unit="g"),
        " ",
        story.material(fill.text("material")),
    )


def _ph_at(candidate: Cursor, kind: str) -> Spans:
    parts: list[Spans] = []
    for state in candidate.each("states"):
        if kind in (state.get("kinds") or ()):
            at = state.plain("temperature_c", unit=C)
            parts.append(spans(state.value("ph", places=2), " at ", at))
    return parted(parts) or spans("-")


def _measured(candidate: Cursor, key: str) -> Spans:
    state = state_of(candidate, "measure")
    return spans("-") if state is None else spans(state.value(key))
