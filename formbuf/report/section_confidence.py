"""Intervals and chances, where the result carries draws of its inputs."""

from __future__ import annotations

from formbuf.report.content import Block, Column, Figure, Paragraph, Section, Spans
from formbuf.report.figures import Interval, interval_figure
from formbuf.report.reading import Cursor, bare, parted, spans
from formbuf.report.story import C, Story, label_of, named, number, table

#: Quantities whose spread is traced, and inputs told of each.
MOST_SHARES, MOST_INPUTS = 6, 3


def confidence(story: Story) -> Section | None:
    """Return what the draws tell; None without draws."""
    place = story.root.at("confidence")
    shown = [c for c in story.finalists if c.get("confidence") is not None]
    if not place.data or not shown:
        return None
    blocks: list[Block] = [
        Paragraph(_drawn(place)),
        _chances(shown),
        *_figure(story, shown),
        _intervals(story),
    ]
    blocks += _pairs(story, place)
    blocks += _shares(place)
    return Section("confidence", spans("Confidence"), tuple(blocks))


def _drawn(place: Cursor) -> Spans:
    made = place.text("preparation")
    how = {
        "weighed": "Batches are taken to be weighed to the composition. ",
        "adjusted": "Batches are taken to be adjusted to the target pH. ",
    }.get(made, "")
    return spans(
        "Constants, activity model, weighing, readings, loads and judged classes were "
        "drawn ",
        place.plain("draws"),
        " times within their uncertainties (seed ",
        place.plain("seed"),
        f") and the whole calculation repeated. {how}",
        "The standard error of a chance is at most ",
        place.value("largest_standard_error", percent=True, digits=2),
        ".",
    )


def _chances(shown: list[Cursor]) -> Block:
    rows = []
    for c in shown:
        k = c.at("confidence")
        rows.append(
            (
                spans(named(c)),
                _chance(k, "within_at_release"),
                _chance(k, "within_at_end"),
                _chance(k, "carries_loads"),
                _chance(k, "ranks", "lead"),
                _chance(k, "ranks_around", "lead"),
                _chance(k, "ranks_any", "lead"),
            )
        )
    return table(
        "t-chances",
        spans("Chances of the finalists, in % of the draws"),
        (
            Column("Candidate", width=2.0),
            number("In the window at release", 1.1),
            number("at the end of shelf life", 1.1),
            number("Carries the loads", 1.0),
            number("Leads", 0.8),
            number("with weights near these", 1.1),
            number("with any weights", 1.0),
        ),
        rows,
        [
            spans(
                "The end of shelf life counts every liquid storage temperature at once, "
                "whichever load comes."
            )
        ],
    )


def _chance(k: Cursor, *keys: str) -> Spans:
    value = k.at(*keys, "value")
    if value.number() is None:
        return spans("-")
    shown = value.value(percent=True, places=0)
    return (bare(shown),)


def _figure(story: Story, shown: list[Cursor]) -> list[Block]:
    lead = shown[0]
    wanted = [
        t.number("temperature_c")
        for t in lead.each("confidence", "temperatures")
        if {"measure", "storage"} & set(t.get("kinds") or ())
    ]
    panels = []
    for at in wanted:
        rows = []
        for c in shown:
            for t in c.each("confidence", "temperatures"):
                if t.number("temperature_c") == at:
                    ph = t.at("ph")
                    ends = [
                        ph.number(key)
                        for key in ("low_95", "low_50", "median", "high_50", "high_95")
                    ]
                    if None not in ends:
                        rows.append(
                            Interval(label_of(c), tuple(x or 0.0 for x in ends))
                        )
        if rows and at is not None:
            panels.append((f"{at:g} °C", rows))
    if not panels:
        return []
    ph = story.brief.at("ph")
    svg, png = interval_figure(
        panels, ph.number("low") or 0.0, ph.number("high") or 14.0
    )
    names = ", ".join(label_of(c) for c in shown)
    return [
        Figure(
            "f-confidence",
            spans("pH of the finalists with central intervals"),
            f"Interval chart of pH, one row for each of {names} and one panel for each "
            "temperature of measurement and storage: thick bars hold half of the draws, "
            "thin bars ninety-five in a hundred. The window at measurement is shaded. The "
            "values of lead and back-up stand in the tables of this section.",
            svg,
            png,
        )
    ]


def _intervals(story: Story) -> Block:
    rows = []
    for c in story.first_two:
        k = c.at("confidence")
        if k.data is None:
            continue
        rows += [
            (
                spans(named(c)),
                spans("pH at ", t.plain("temperature_c", unit=C)),
                spans(t.value("ph", "median", places=2)),
                _ends(t.at("ph"), 2),
            )
            for t in k.each("temperatures")
        ]
        for key, label, places in (
            ("read_ph", "pH as read at release", 2),
            ("required_mmol_l", "required concentration, mmol/L", 1),
            ("capacity_mmol_l_ph", "capacity, mmol/L per pH", 2),
            ("osmolality_mosm_kg", "osmolality, mosmol/kg", 0),
        ):
            q = k.at(key)
            if q.data is not None:
                rows.append(
                    (
                        spans(named(c)),
                        spans(label),
                        spans(q.value("median", places=places)),
                        _ends(q, places),
                    )
                )
    return table(
        "t-intervals",
        spans(
            "Intervals of lead and back-up"
            if len(story.first_two) > 1
            else "Intervals of the lead"
        ),
        (
            Column("Candidate", width=2.0),
            Column("Quantity", width=2.4),
            number("Median", 1.0),
            number("Central 90 %", 1.5),
        ),
        rows,
    )


def _ends(q: Cursor, places: int) -> Spans:
    return spans(
        q.value("low_90", places=places), " to ", q.value("high_90", places=places)
    )


def _pairs(story: Story, place: Cursor) -> list[Block]:
    """Chance that another place is better than the lead."""
    lead = story.root.text("lead")
    rows = [
        (
            story.name_of(f.text("second")),
            (bare(f.value("chance", "value", percent=True, places=0)),),
        )
        for f in place.each("flips")
        if f.text("first") == lead
    ]
    if not rows:
        return []
    return [
        table(
            "t-flips",
            spans("Chance that a candidate is better than the lead, in % of the draws"),
            (Column("Candidate", width=3.0), number("Better than the lead", 1.5)),
            rows,
            [
                spans(
                    "Two are tied where this exceeds ",
                    place.value("tie_share", percent=True, places=0),
                    ".",
                )
            ],
        )
    ]


def _shares(place: Cursor) -> list[Block]:
    rows = []
    for q in place.each("shares")[:MOST_SHARES]:
        inputs = q.each("inputs")[:MOST_INPUTS]
        rows.append(
            (
                spans(q.quote("quantity")),
                spans(q.value("deviation", digits=2)),
                parted(
                    [
                        spans(
                            i.quote("label"),
                            " ",
                            i.value("share", percent=True, places=0),
                        )
                        for i in inputs
                    ]
                ),
                parted([spans(i.quote("advice")) for i in inputs if i.get("advice")]),
            )
        )
    if not rows:
        return []
    return [
        table(
            "t-shares",
            spans("Where the spread comes from, and what would narrow it"),
            (
                Column("Quantity", width=2.2),
                number("Standard deviation", 1.0),
                Column("Largest shares of the variance", width=2.6),
                Column("What would narrow it", width=2.4),
            ),
            rows,
        )
    ]
