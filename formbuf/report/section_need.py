"""Whether a buffer is needed: loads, and what the product does without one."""

from __future__ import annotations

from collections.abc import Sequence

from formbuf.product.product_brief import LARGE_VOLUME_ML
from formbuf.report.content import (
    Block,
    Column,
    Note,
    OpenPoint,
    Paragraph,
    Section,
    Spans,
)
from formbuf.report.reading import Cursor, link, sentence, spans
from formbuf.report.story import Story, is_none, number, source_cell, state_of, table


def need(story: Story) -> Section:
    """Return the load budget, the arm without buffer, and how sizes follow."""
    return Section(
        "need",
        spans("Need for a buffer"),
        (
            Paragraph(
                spans(
                    "The size of the buffer follows from what will attack the pH over "
                    "shelf life. The budget counts strong acid and strong base per litre "
                    "of product."
                )
            ),
            _budget(story),
            *_defaults(story),
            *_without(story),
            Paragraph(_sizing(story)),
        ),
        placement="3.2.P.2.2.1, formulation development",
    )


def _budget(story: Story) -> Block:
    loads = story.root.at("loads")
    rows = [
        (
            spans("acid and ", base.quote("name"))
            if both
            else spans(acid.quote("name")),
            spans(acid.value("acid_mmol_l", trim=True)),
            spans(base.value("base_mmol_l", trim=True)),
            spans(acid.quote("reason")),
            source_cell(
                acid.get("source"),
                _basis(acid),
            ),
        )
        for acid, base, both in _told_once(loads.each("items"))
    ]
    rows.append(
        (
            spans("total"),
            spans(loads.value("acid_mmol_l", trim=True)),
            spans(loads.value("base_mmol_l", trim=True)),
            spans("-"),
            spans("-"),
        )
    )
    return table(
        "t-loads",
        spans("Load budget over shelf life"),
        (
            Column("Load", width=1.8),
            number("Acid, mmol/L", 0.9),
            number("Base, mmol/L", 0.9),
            Column("Reason", width=3.0),
            Column("Basis and source", width=1.4),
        ),
        rows,
    )


def _basis(item: Cursor) -> str:
    """Say what a load rests on; what the author of the brief states is no judgement."""
    if item.get("is_default"):
        return f"{item.text('basis')} (default)"
    basis = item.text("basis")
    return "stated" if basis == "judgement" else basis


def _told_once(items: Sequence[Cursor]) -> list[tuple[Cursor, Cursor, bool]]:
    """Return loads for the table: acid and base over shelf life as one row.

    Only where the same note stands behind both; then each cell still shows its own
    value, the other one being zero.
    """
    told: list[tuple[Cursor, Cursor, bool]] = []
    notes = ("basis", "source", "reason", "is_default")
    for item in items:
        last = told[-1][0] if told else None
        if (
            last is not None
            and last.text("name").removeprefix("acid ")
            == item.text("name").removeprefix("base ")
            and last.text("name") != item.text("name")
            and all(last.get(key) == item.get(key) for key in notes)
        ):
            told[-1] = (last, item, True)
        else:
            told.append((item, item, False))
    return told


def _defaults(story: Story) -> list[Block]:
    items = story.root.each("loads", "items")
    if not any(item.get("is_default") for item in items):
        return []
    story.add(
        OpenPoint(
            "loads",
            spans(
                "Loads are defaults or screening bounds"
                if all(item.get("is_default") for item in items)
                else "Some of the loads are defaults or screening bounds",
                ", and the concentration of every candidate is in proportion to the "
                "budget (",
                link("need"),
                ").",
            ),
            spans(
                "Store the product with the least buffer (or none) at the storage and the "
                "accelerated condition in its container; at each time point measure pH and "
                "titrate back to the initial pH."
            ),
            spans(
                "Acid or base found, extrapolated to shelf life, replaces the default; the "
                "concentration is sized again."
            ),
            1,
        )
    )
    return [
        Note(
            spans(
                "Entries marked as default are allowances, not findings; alkali from glass "
                "is the limit of a surface test, not a forecast."
            )
        )
    ]


def _without(story: Story) -> list[Block]:
    """Say what the product does without an added buffer."""
    arm = next((c for c in story.candidates if is_none(c)), None)
    if arm is None:
        return []
    blocks: list[Block] = []
    standing = arm.text("standing")
    notes = [sentence(arm.at("notes", i)) for i in range(len(arm.get("notes") or ()))]
    first = notes[0] if notes else spans("")
    words = spans("Product without an added buffer. ", first)
    share = arm.number("carried_share")
    if share is not None and share > 1.0:
        words = spans(
            words,
            " An added buffer is not needed for the loads."
            if arm.get("rank") == 1
            else " An added buffer is a margin, not a need, as far as the loads go.",
        )
    state = state_of(arm, "measure")
    if state is not None:
        words = spans(
            words,
            " Its capacity at pH ",
            state.value("ph", places=2),
            " is ",
            state.value("capacity_mmol_l_ph", unit="mmol/L per pH"),
            ".",
        )
    blocks.append(Paragraph(words))
    if (
        standing in ("not evaluable", "viable")
        and story.brief.text("drug", "kind") != "none"
    ):
        _ask_titration(story, arm)
    return blocks


def _ask_titration(story: Story, arm: Cursor) -> None:
    if story.brief.get("drug", "titration"):
        return
    if arm.number("carried_share") is not None:
        known = spans(
            "What the drug and the excipients buffer by themselves is calculated (",
            arm.value("carried_share", percent=True, places=0),
            " of the loads), not measured.",
        )
    else:
        known = spans(
            "What the drug and the excipients buffer by themselves is not known; a buffer "
            "may be larger than needed, or not needed at all."
        )
    story.add(
        OpenPoint(
            "titration",
            known,
            spans(
                "Titrate the product without buffer at its concentration and at the "
                "temperature of measurement across the pH window, in both directions, from "
                "the target pH."
            ),
            spans(
                "If acid and base between the release limits and the window exceed the "
                "budget of ",
                link("need"),
                ", the product holds its pH alone; enter the readings in the brief.",
            ),
            1 if arm.number("carried_share") is None else 3,
        )
    )


def _sizing(story: Story) -> Spans:
    ph = story.brief.at("ph")
    start = spans(
        "The required concentration of a candidate is the smallest at which its own "
        "species take up the acid load from the lowest release pH, and the base load from "
        "the highest (target ± ",
        ph.plain("release_tolerance"),
        "), without leaving ",
        ph.plain("low"),
        " to ",
        ph.plain("high"),
        "; at every liquid storage temperature the same room holds around the unloaded pH. "
        "The proposed concentration is the next figure that is usually weighed",
    )
    least = story.more.at("settings", "sizing", "minimum_mmol_l")
    large = (
        story.brief.text("product", "route") == "intravenous"
        and (story.brief.number("dose", "volume_ml") or 0.0) >= LARGE_VOLUME_ML
    )
    if large:
        start = spans(
            start,
            ", not more than the ceiling of the route; at this volume given into a "
            "vein no minimum is set.",
        )
    else:
        start = spans(
            start,
            ", not less than ",
            least.plain(unit="mmol/L"),
            " (practice) and not more than the ceiling of the route.",
        )
    lead = story.lead
    if lead is None or is_none(lead) or lead.get("required_mmol_l") is None:
        return start
    return spans(start, " ", _lead_size(story, lead))


def _lead_size(story: Story, lead: Cursor) -> Spans:
    load = lead.text("limiting_load")
    limit = f", set by the {load} load" if load in ("acid", "base") else ""
    words = spans(
        "For the lead the loads require ",
        lead.value("required_mmol_l", unit="mmol/L"),
        limit,
        "; ",
        "the formula has " if lead.get("is_own_formula") else "proposed are ",
        lead.value("concentration_mmol_l", unit="mmol/L", trim=True),
    )
    share = lead.number("carried_share")
    if share is None:
        return spans(words, ".")
    if share >= 1.0:
        return spans(
            words,
            ", which carry ",
            lead.value("carried_share", digits=3),
            " times the budget.",
        )
    return spans(
        words,
        ", which carry ",
        lead.value("carried_share", percent=True, places=0),
        " of the budget.",
    )
