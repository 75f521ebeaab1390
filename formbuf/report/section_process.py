"""Process, container and administration; control strategy and life-cycle."""

from __future__ import annotations

from collections.abc import Collection

from formbuf.report.content import Column, Items, Paragraph, Section, Spans
from formbuf.report.reading import Cursor, joined, link, spans
from formbuf.report.story import C, Story, is_none, state_of, table
from formbuf.report.words import CONTAINERS, EXPOSURES, ROUTES, word

#: Topics of rules that belong here.
PROCESS_TOPICS = ("process", "heat_sterilisation", "drying")
CONTAINER_TOPICS = ("container",)
ADMINISTRATION_TOPICS = ("admixture", "pain", "route_ph", "route_tissue", "exposure")


def process(story: Story) -> Section | None:
    """Return what the choice means for process, container and use."""
    lead = story.lead
    if lead is None:
        return None
    return Section(
        "process",
        spans("Process, container and administration"),
        (
            Paragraph(spans("Points that follow from the choice of the lead.")),
            Items(
                (
                    *_making(story, lead),
                    *_container(story, lead),
                    *_administration(story, lead),
                )
            ),
        ),
        placement="3.2.P.2.3, 3.2.P.2.4 and 3.2.P.2.6",
    )


def _fired(lead: Cursor, topics: tuple[str, ...]) -> list[Cursor]:
    return [
        f
        for f in lead.each("findings")
        if f.get("outcome") == "fired" and f.get("topic") in topics
    ]


def _rules(lead: Cursor, topics: tuple[str, ...], what: str) -> list[Spans]:
    found = _fired(lead, topics)
    if not found:
        return []
    names = joined([spans(f.quote("rule")) for f in found])
    noun = "rules" if len(found) > 1 else "rule"
    verb = "apply" if len(found) > 1 else "applies"
    return [spans(f"{what}: {noun} ", names, f" {verb} (", link("compatibility"), ").")]


def _making(story: Story, lead: Cursor) -> list[Spans]:
    items: list[Spans] = []
    made, read = state_of(lead, "prepare"), state_of(lead, "measure")
    if made is not None and read is not None:
        words = spans(
            "pH end-point: ",
            read.value("ph", places=2),
            " ± ",
            story.brief.plain("ph", "release_tolerance"),
            " at ",
            read.plain("temperature_c", unit=C),
        )
        if made.path != read.path:
            words = spans(
                words,
                ", that is ",
                made.value("ph", places=2),
                " where the batch is adjusted at ",
                made.plain("temperature_c", unit=C),
            )
        items.append(
            spans(words, ". Read it with an electrode calibrated at that temperature.")
        )
    if not is_none(lead):
        items.append(
            spans(
                "Weigh the hydrate that the sheet names (",
                link("design-lead"),
                "); another hydrate changes the mass.",
            )
        )
    if story.more.get("batch_sheet") is not None:
        sheet = story.more.at("batch_sheet", "ways", 0, "allowance")
        items.append(
            spans(
                "Small corrections of the pH are made at ",
                sheet.plain("make_up_first_percent"),
                " % of the volume, within the adjustment allowance of ",
                link("batch-sheet"),
                "; they count in the osmolality.",
            )
        )
    items += [
        spans(
            "At the process temperature of ",
            state.plain("temperature_c", unit=C),
            " the product has pH ",
            state.value("ph", places=2),
            " (the ionization data are extrapolated to this temperature)."
            if state.get("is_extrapolated")
            else ".",
        )
        for state in lead.each("states")
        if "process" in (state.get("kinds") or ())
    ]
    return [*items, *_rules(lead, PROCESS_TOPICS, "Process")]


def _container(story: Story, lead: Cursor) -> list[Spans]:
    b = story.brief
    words = spans(
        "Container: ",
        word(CONTAINERS, b.text("container", "type")),
        " filled with ",
        b.plain("container", "fill_volume_ml", unit="mL"),
        ", ",
        word(EXPOSURES, b.text("carbon_dioxide", "exposure")),
        ".",
    )
    for item in story.root.each("loads", "items"):
        if "glass" in item.text("name"):
            words = spans(
                words,
                " Alkali from its glass counts with ",
                item.value("base_mmol_l", unit="mmol/L", trim=True),
                " in the load budget.",
            )
        if "carbon dioxide" in item.text("name"):
            words = spans(
                words,
                " Carbon dioxide taken up counts with ",
                item.value("acid_mmol_l", unit="mmol/L", trim=True),
                " in the load budget.",
            )
    return [words, *_rules(lead, CONTAINER_TOPICS, "Container")]


def _administration(story: Story, lead: Cursor) -> list[Spans]:
    b = story.brief
    words = spans(
        "Administration: ",
        b.plain("dose", "volume_ml", unit="mL"),
        " by the ",
        word(ROUTES, b.text("product", "route")),
        " route",
    )
    if b.get("dose", "infusion_rate_ml_h") is not None:
        rate = b.plain("dose", "infusion_rate_ml_h", unit="mL/h")
        words = spans(words, " at ", rate)
    words = spans(words, ".")
    body = state_of(lead, "body")
    if body is not None:
        words = spans(
            words,
            " At ",
            body.plain("temperature_c", unit=C),
            " the product has pH ",
            body.value("ph", places=2),
            ".",
        )
    diluents = b.get("facts", "diluents")
    if diluents and isinstance(diluents, list):
        words = spans(words, " Diluents named: ", b.plain("facts", "diluents"), ".")
    return [words, *_rules(lead, ADMINISTRATION_TOPICS, "Administration")]


def control(story: Story) -> Section | None:
    """Return limits that follow from the design, each with what has to support it."""
    lead = story.lead
    if lead is None:
        return None
    return Section(
        "control",
        spans("Control strategy and life-cycle"),
        (
            table(
                "t-control",
                spans("Limits that follow from the design"),
                (
                    Column("Attribute", width=1.3),
                    Column("Limit", width=2.6),
                    Column("Support", width=2.2),
                ),
                _control_rows(story, lead),
            ),
            Paragraph(
                spans(
                    "Reopen this rationale when supplier, salt form or hydrate, container, "
                    "fill volume, concentration of the drug, storage or device change, and "
                    "when the tables behind it are renewed."
                )
            ),
        ),
        placement="3.2.P.5.1, 3.2.P.5.6 and 3.2.P.4",
    )


def _control_rows(story: Story, lead: Cursor) -> list[tuple[Spans, ...]]:
    ph, t = story.brief.at("ph"), story.brief.at("tonicity")
    at = ph.plain("measure_temperature_c", unit=C)
    assumed = {a.text("key") for a in story.root.each("assumptions")}
    rows: list[tuple[Spans, ...]] = [
        (
            spans("pH at release"),
            spans(ph.plain("target"), " ± ", ph.plain("release_tolerance"), " at ", at),
            spans(
                "brief, tolerance assumed"
                if "ph.release_tolerance" in assumed
                else "brief",
                "; batch experience not yet entered",
            ),
        ),
        (
            spans("pH over shelf life"),
            spans(ph.plain("low"), " to ", ph.plain("high"), " at ", at),
            spans(
                _set_by(assumed, "ph.low", "ph.high"),
                "; stability study not yet entered",
            ),
        ),
    ]
    if t.get("low_mosm_kg") is not None and t.get("high_mosm_kg") is not None:
        high = t.plain("high_mosm_kg", unit="mosmol/kg")
        rows.append(
            (
                spans("Osmolality"),
                spans(t.plain("low_mosm_kg"), " to ", high),
                _osmolality_support(assumed),
            )
        )
    if not is_none(lead):
        made = [
            spans(story.material(w.text("material"))) for w in lead.each("composition")
        ]
        what = "identity with hydrate, assay, metals and endotoxin of "
        rows.append(
            (
                spans("Buffer materials"),
                spans(what, joined(made)),
                spans("monographs (", link("precedents"), ")"),
            )
        )
    return rows


def _set_by(assumed: Collection[str], *keys: str) -> str:
    """Say whether the limits under some keys are those of the brief."""
    taken = [key for key in keys if key in assumed]
    if not taken:
        return "brief"
    return "assumed" if len(taken) == len(keys) else "brief, partly assumed"


def _osmolality_support(assumed: Collection[str]) -> Spans:
    """Say where the limits of osmolality come from."""
    told = _set_by(assumed, "tonicity.low_mosm_kg", "tonicity.high_mosm_kg")
    if told == "brief":
        return spans("brief; tighten to what batches show")
    return spans(
        told,
        ", the range that the route bears (",
        link("assumed"),
        "); set limits from batches",
    )
