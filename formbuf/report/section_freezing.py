"""What freezing, or the freezing before drying, does to the pH."""

from __future__ import annotations

from formbuf.report.content import (
    Block,
    Column,
    Figure,
    Items,
    Note,
    OpenPoint,
    Paragraph,
    Section,
    Spans,
)
from formbuf.report.figures import Panel, freezing_figure
from formbuf.report.reading import Cursor, Piece, bare, cite, link, sentence, spans
from formbuf.report.story import (
    C,
    Story,
    counted_class,
    frozen_of,
    is_none,
    label_of,
    named,
    number,
    source_cell,
    table,
)

MOST_PANELS = 4
#: Words for the events of a path that have a solid.
EVENTS = {
    "onset": "crystallisation begins of",
    "supersaturated": "supersaturation begins with",
}
#: Classes after which a measurement decides more than the calculation.
WORRYING = ("moderate", "severe", "sources disagree", "unknown")


def freezing(story: Story) -> Section | None:
    """Return the section on freezing; None where the product is never frozen."""
    shown = [c for c in story.finalists if frozen_of(c) is not None]
    if not shown:
        return None
    dried = story.brief.text("product", "form") == "dried" or any(
        s.get("state") == "dried" for s in story.brief.each("storage")
    )
    why = "before it is dried" if dried else "during storage or handling"
    blocks: list[Block] = [
        Paragraph(
            spans(
                f"The product is frozen {why}. As ice forms, the liquid left concentrates "
                "until its water activity equals that of ice",
                cite("murphy_koop_2005"),
                ". Two bounding paths are given where data allow: on the crystallising "
                "path every salt leaves the liquid at its solubility, on the "
                "supersaturated path none does. The class tells the change that freezing "
                "adds to that of cooling: negligible below 0.3, moderate to 1, severe "
                "above.",
            )
        ),
        _classes(shown),
        *_figure(shown),
    ]
    parts = []
    for slug, c in zip(("lead", "backup"), story.first_two, strict=False):
        found = frozen_of(c)
        if found is not None:
            parts.append(_one(story, c, found, slug))
    if dried:
        blocks.append(
            Note(
                spans(
                    "Drying itself (loss of a volatile acid or base, state of the cake) is "
                    "judged by rules and observation only, not calculated."
                )
            )
        )
    _ask(story)
    return Section(
        "freezing",
        spans("Freezing and drying" if dried else "Freezing"),
        tuple(blocks),
        tuple(parts),
        placement="3.2.P.2.2.3, physicochemical and biological properties",
    )


def _classes(shown: list[Cursor]) -> Block:
    rows = []
    for c in shown:
        found = frozen_of(c)
        if found is None:
            continue
        counted, own = counted_class(c), found.text("freezing_class")
        rows.append(
            (
                spans(named(c)),
                spans(own),
                spans(counted if counted != own else "the same"),
                spans(found.value("freezing_shift", places=2, sign=True)),
                spans(found.value("cooling_shift", places=2, sign=True)),
                spans(found.quote("reason")),
                source_cell(found.get("sources"), found.text("basis")),
            )
        )
    return table(
        "t-frozen",
        spans("Change of pH on freezing"),
        (
            Column("Candidate", width=1.5),
            Column("Class", width=1.0),
            Column("Class that counts", width=1.0),
            number("By freezing, pH", 0.8),
            number("By cooling, pH", 0.8),
            Column("Reason", width=2.6),
            Column("Basis and source", width=1.1),
        ),
        rows,
        [
            spans(
                "By freezing: largest difference of a path from unfrozen liquid at the same "
                "temperature. By cooling: change of unfrozen liquid from preparation to "
                "that temperature, which any liquid shares."
            )
        ],
    )


def _figure(shown: list[Cursor]) -> list[Block]:
    panels = []
    for c in shown[:MOST_PANELS]:
        found = frozen_of(c)
        if found is None or not found.get("paths"):
            continue
        paths = []
        for path in found.each("paths"):
            points = path.each("points")
            at = [p.number("temperature_c") or 0.0 for p in points]
            paths.append(
                (path.text("assumption"), at, [p.number("ph") for p in points])
            )
        prepared = found.number("paths", 0, "ph_prepared") or 0.0
        panels.append(Panel(label_of(c), paths, prepared))
    if not panels:
        return []
    svg, png = freezing_figure(panels)
    names = ", ".join(panel.name for panel in panels)
    return [
        Figure(
            "f-freezing",
            spans("pH of the liquid between the ice crystals, on the bounding paths"),
            f"Line charts of pH against falling temperature, one for each of {names}: the "
            "supersaturated path and, where data allow, the crystallising path. A pale "
            "line marks the pH as prepared. The values of lead and back-up stand in the "
            "tables of this section.",
            svg,
            png,
        )
    ]


def _one(story: Story, c: Cursor, found: Cursor, slug: str) -> Section:
    blocks: list[Block] = [_points(story, c, found, slug)]
    where = found.at("where_samples_fall")
    items: list[Spans] = []
    if where.data and len(found.each("paths")) > 1:
        items.append(spans("Where real samples fall: ", where.quote(), "."))
    if c.get("frozen", "remark"):
        items.append(sentence(c.at("frozen", "remark")))
    items += [
        spans(
            f"Error of the {path.text('assumption')} bound against published values: ±",
            path.plain("error_ph"),
            " pH.",
        )
        for path in found.each("paths")
        if path.get("error_ph") is not None
    ]
    seen: set[str] = set()
    for place in _notes(found):
        if place.data not in seen:
            seen.add(str(place.data))
            items.append(sentence(place))
    if items:
        blocks.append(Items(tuple(items)))
    blocks += _observations(c, found, slug)
    label = "Lead" if slug == "lead" else "Back-up"
    return Section(f"freezing-{slug}", spans(f"{label}: ", named(c)), tuple(blocks))


def _notes(found: Cursor) -> list[Cursor]:
    places = [found.at("notes", i) for i in range(len(found.get("notes") or ()))]
    for path in found.each("paths"):
        places += [path.at("notes", i) for i in range(len(path.get("notes") or ()))]
    return places


def _points(story: Story, c: Cursor, found: Cursor, slug: str) -> Block:
    paths = found.each("paths")
    columns = [
        number(f"T, {C}", 0.8),
        *(number(f"pH, {path.text('assumption')}", 1.2) for path in paths),
        number("Ice, % of the water", 1.1),
        Column("State", width=1.8),
    ]
    rows = []
    for i, point in enumerate(paths[0].each("points")):
        cells = [spans(point.plain("temperature_c"))]
        cells += [spans(path.value("points", i, "ph", places=2)) for path in paths]
        ice = paths[-1].value("points", i, "ice_fraction", percent=True, places=0)
        states = list(dict.fromkeys(p.text("points", i, "state") for p in paths))
        cells += [spans(bare(ice)), spans("; ".join(states))]
        rows.append(tuple(cells))
    notes = [_events(story, path) for path in paths if path.get("events")]
    return table(
        f"t-path-{slug}",
        spans("Paths on freezing of ", named(c)),
        columns,
        rows,
        notes,
    )


def _events(story: Story, path: Cursor) -> Spans:
    parts: list[Piece] = [f"Events on the {path.text('assumption')} path: "]
    for position, event in enumerate(path.each("events")):
        parts.append("; " if position else "")
        solid = event.text("solid")
        parts += [
            EVENTS.get(event.text("event"), event.text("event")),
            " " if solid else "",
            story.solid(solid) if solid else "",
            " at ",
            event.value("temperature_c", places=1, unit=C),
        ]
    parts.append(".")
    return spans(*parts)


def _observations(c: Cursor, found: Cursor, slug: str) -> list[Block]:
    rows = [
        (
            spans(o.plain("concentration_mmol_l"))
            if o.get("concentration_mmol_l") is not None
            else spans(o.quote("concentration_text")),
            spans(o.plain("ph_initial")),
            _frozen_at(o),
            _reading(o),
            spans(o.quote("cosolutes")),
            spans(o.quote("method"), "; ", o.quote("cooling")),
            source_cell(o.get("source"), o.text("basis")),
        )
        for o in found.each("observations")
    ]
    if not rows:
        return [
            Paragraph(
                spans("No published observation of this system is in the tables.")
            )
        ]
    return [
        table(
            f"t-observed-{slug}",
            spans("Published observations of frozen ", named(c)),
            (
                number("mmol/L", 0.8),
                number("pH before", 0.7),
                number(f"Frozen at, {C}", 0.9),
                number("pH frozen (or change)", 1.2),
                Column("With", width=1.8),
                Column("Method", width=2.2),
                Column("Basis and source", width=1.1),
            ),
            rows,
        )
    ]


def _frozen_at(o: Cursor) -> Spans:
    if o.get("temperature_frozen_c") is not None:
        return spans(o.plain("temperature_frozen_c"))
    low, high = "temperature_frozen_low_c", "temperature_frozen_high_c"
    if o.get(low) is not None and o.get(high) is not None:
        return spans(o.plain(low), " to ", o.plain(high))
    return spans(o.quote("temperature_text"))


def _reading(o: Cursor) -> Spans:
    if o.get("ph_frozen") is not None:
        return spans(o.plain("ph_frozen"))
    if o.get("ph_change") is not None:
        return spans("change ", o.value("ph_change", digits=2, sign=True, trim=True))
    if o.get("ph_change_low") is not None and o.get("ph_change_high") is not None:
        return spans(
            "change ",
            o.value("ph_change_low", digits=2, trim=True),
            " to ",
            o.value("ph_change_high", digits=2, trim=True),
        )
    return spans(o.quote("direction"))


def _ask(story: Story) -> None:
    lead = story.lead
    if lead is None or is_none(lead) or frozen_of(lead) is None:
        return
    counted = counted_class(lead)
    found = frozen_of(lead)
    settled = found is not None and found.text("basis") in ("published", "derived")
    if counted not in WORRYING and settled:
        weight = 3
    else:
        weight = 1 if counted in WORRYING else 2
    story.add(
        OpenPoint(
            "freezing",
            spans(
                f"The change of pH of the lead on freezing is classed {counted} from bounds "
                "or from observations of other products (",
                link("freezing"),
                ").",
            ),
            spans(
                "Freeze the lead, with the drug, at the slowest and the fastest rate of the "
                "process; read the frozen pH by a low-temperature electrode or look for "
                "crystalline salt by X-ray diffraction or calorimetry; then thaw, and "
                "count aggregates and particles after three cycles."
            ),
            spans(
                "No crystalline salt and unchanged product quality keep the lead; a "
                "crystalline salt or a loss of quality moves the choice to the next "
                "candidate, to less buffer or to more amorphous sugar."
            ),
            weight,
        )
    )
