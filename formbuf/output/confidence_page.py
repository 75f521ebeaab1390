"""What draws tell of a shortlist, to read and as rows."""

from __future__ import annotations

from collections.abc import Sequence
from typing import TYPE_CHECKING, Any

from formbuf.output import words
from formbuf.output.figures import ABSENT, decimals, significant
from formbuf.output.page import (
    WIDE,
    Block,
    Column,
    Grid,
    Items,
    Paragraph,
    number,
    section,
)

if TYPE_CHECKING:
    from formbuf.advice.chance_records import Chance
    from formbuf.advice.confidence_records import (
        CandidateConfidence,
        Confidence,
        Interval,
    )
    from formbuf.advice.results import Candidate, Shortlist

#: Ranks whose chances are shown.
SHOWN_RANKS = 3


def confidence_blocks(result: Shortlist, shown: Sequence[Candidate]) -> list[Block]:
    """Return chances, intervals and what they rest on; nothing without draws.

    Parameters
    ----------
    result : Shortlist
    shown : sequence of Candidate
        Ranked candidates, in order.
    """
    found = result.confidence
    if found is None:
        return []
    placed = [c for c in shown if c.variant_of is None]
    blocks = section(
        "Confidence",
        _ranks(result, placed),
        Paragraph(_legend(result, found)),
        _intervals(result, placed),
    )
    blocks += section("What to measure to be surer", _shares(found))
    blocks += section("What would change the lead", _changes(result, found))
    return blocks


def _ranks(result: Shortlist, placed: Sequence[Candidate]) -> Grid:
    columns = (
        Column("System"),
        *(
            number(f"Rank {k + 1}, %", short=f"Rank\n{k + 1}, %")
            for k in range(SHOWN_RANKS)
        ),
        number("Leads at weights near by, %", WIDE, short="Near by"),
        number("Leads at any weights, %", short="Any\nweights"),
        number("Expected loss", short="Loss"),
        number("In window at release, %", short="At re-\nlease"),
        number("In window at end, %", short="At\nend"),
    )
    rows = []
    for c in placed:
        k = c.confidence
        if k is None or k.ranks is None:
            continue
        near, any_ = k.ranks_around, k.ranks_any
        ranks = [*k.ranks.ranks, *([None] * SHOWN_RANKS)][:SHOWN_RANKS]
        rows.append(
            (
                c.name,
                *(percent(one) for one in ranks),
                percent(near.lead if near else None),
                percent(any_.lead if any_ else None),
                decimals(k.ranks.expected_loss, 3),
                percent(k.within_at_release),
                percent(k.within_at_end),
            )
        )
    return Grid(columns, tuple(rows))


def percent(one: Chance | None) -> str:
    """Return a chance in per cent; above 0 and below 100 it never rounds to them."""
    if one is None:
        return ABSENT
    value = 100.0 * one.value
    if 0.0 < value < 0.5:
        return "<1"
    return ">99" if 99.5 <= value < 100.0 else f"{value:.0f}"


def _legend(result: Shortlist, found: Confidence) -> str:
    made = {
        "weighed": "pH comes from the weighed amounts alone",
        "adjusted": "pH is set with acid or base when it is prepared",
    }[found.preparation]
    low, high = result.brief.ph.low, result.brief.ph.high
    return (
        f"{found.statement}; {made}. Any weights: every set of weights alike. Loss: mean "
        "desirability given up by choosing it. At release: read within "
        f"{low:g} to {high:g}. At end: still so at the end of shelf life, whichever of "
        "the loads comes."
    )


def _intervals(result: Shortlist, placed: Sequence[Candidate]) -> Grid:
    at = result.brief.ph.measure_temperature_c
    stored = [t for t in result.brief.liquid_storage_temperatures_c if t != at]
    columns = (
        Column("System"),
        number(f"pH at {at:g} C, 95 %", short=f"pH at {at:g} C,\n95 %"),
        *(
            number(f"pH at {t:g} C, 95 %", short=f"pH at {t:g} C,\n95 %")
            for t in stored
        ),
        number("Required mmol/L, 90 %", WIDE),
        number("Capacity mmol/L/pH, 95 %", WIDE),
        number("mosmol/kg, 95 %", short="mosmol/kg,\n95 %"),
    )
    rows = []
    for c in placed:
        k = c.confidence
        if k is None or not k.temperatures:
            continue
        rows.append(
            (
                c.name,
                *(_ph_range(k, t) for t in (at, *stored)),
                _span(k.required_mmol_l, wide=False),
                _span(k.capacity_mmol_l_ph),
                _span(k.osmolality_mosm_kg),
            )
        )
    return Grid(columns, tuple(rows))


def _ph_range(k: CandidateConfidence, temperature_c: float) -> str:
    found = k.at(temperature_c)
    if found is None:
        return ABSENT
    return f"{decimals(found.ph.low_95, 2)} to {decimals(found.ph.high_95, 2)}"


def _span(one: Interval | None, *, wide: bool = True) -> str:
    if one is None:
        return ABSENT
    low, high = (one.low_95, one.high_95) if wide else (one.low_90, one.high_90)
    return f"{significant(low)} to {significant(high)}"


def _shares(found: Confidence) -> Grid:
    rows = []
    for quantity in found.shares:
        for place, one in enumerate(quantity.inputs):
            rows.append(
                (
                    f"{quantity.quantity} (sd {significant(quantity.deviation, 2)})"
                    if place == 0
                    else "",
                    one.label,
                    f"{100.0 * one.share:.0f}",
                    one.advice,
                )
            )
    columns = (
        Column("Spread of"),
        Column("comes from"),
        number("Share, %", short="%"),
        Column("What would help"),
    )
    return Grid(columns, tuple(rows))


def _changes(result: Shortlist, found: Confidence) -> Items:
    names = {c.key: c.name for c in result.candidates}
    texts = [
        f"weight of {words.criterion_name(w.criterion)} from {w.weight:g} to "
        f"{significant(w.needed, 2)}: {names[w.new_lead]} leads"
        for w in found.weight_changes
        if w.needed is not None and w.new_lead is not None
    ]
    fixed = [w.criterion for w in found.weight_changes if w.needed is None]
    if fixed:
        listed = words.listed([words.criterion_name(n) for n in fixed])
        texts.append(f"no weight of {listed} changes the lead")
    return Items(tuple(texts))


def confidence_row(c: Candidate) -> dict[str, Any]:
    """Return what draws tell of a candidate as flat columns, units in their names.

    Parameters
    ----------
    c : Candidate
        Every column is empty where it was not drawn.
    """
    k = c.confidence
    row: dict[str, Any] = {}
    for name in ("ranks", "ranks_around", "ranks_any"):
        ranks = getattr(k, name, None)
        column = {"ranks": "", "ranks_around": "_near_weights"}.get(
            name, "_any_weights"
        )
        row[f"lead_chance{column}"] = ranks.lead.value if ranks else None
        row[f"lead_chance{column}_standard_error"] = (
            ranks.lead.standard_error if ranks else None
        )
        row[f"expected_loss{column}"] = ranks.expected_loss if ranks else None
    for name in ("within_at_release", "within_at_end", "carries_loads", "over_head"):
        one = getattr(k, name, None)
        row[f"{name}_chance"] = one.value if one else None
        row[f"{name}_standard_error"] = one.standard_error if one else None
    for name in (
        "read_ph",
        "required_mmol_l",
        "capacity_mmol_l_ph",
        "osmolality_mosm_kg",
    ):
        span = getattr(k, name, None)
        row[f"{name}_low_95"] = span.low_95 if span else None
        row[f"{name}_high_95"] = span.high_95 if span else None
    return row


def confidence_rows(result: Shortlist) -> list[dict[str, Any]]:
    """Return one flat row per candidate that was drawn, pH by temperature included.

    Parameters
    ----------
    result : Shortlist
        With draws; an empty list without.
    """
    rows = []
    for c in result.candidates:
        if c.confidence is None:
            continue
        row = {"system": c.key, "rank": c.rank, **confidence_row(c)}
        for t in c.confidence.temperatures:
            row[f"ph_low_95_at_{t.temperature_c:g}_c"] = t.ph.low_95
            row[f"ph_high_95_at_{t.temperature_c:g}_c"] = t.ph.high_95
        rows.append(row)
    return rows
