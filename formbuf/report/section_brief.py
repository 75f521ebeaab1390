"""What the product asks for, and what was assumed."""

from __future__ import annotations

from collections.abc import Iterable

from formbuf.report.content import Block, Column, Items, Paragraph, Section, Spans
from formbuf.report.origins import assumed_keys
from formbuf.report.reading import (
    Cursor,
    link,
    sentence,
    spans,
)
from formbuf.report.story import C, Story, source_cell, table
from formbuf.report.words import (
    BOOKS,
    CONTAINERS,
    EXPOSURES,
    FORMS,
    POPULATIONS,
    ROUTES,
    STORAGE,
    unit_words,
    word,
)

Row = tuple[str, Spans, str]


def requirements(story: Story) -> Section:
    """Return the brief and every value that was assumed for it."""
    assumed = assumed_keys(story)
    rows = [
        (
            spans(label),
            value,
            spans(_origin(keys, assumed)),
        )
        for label, value, keys in _rows(story)
    ]
    blocks: list[Block] = [
        Paragraph(
            spans(
                "The brief below is the input of every calculation. What it does not "
                "state is assumed (",
                link("assumed"),
                ") and should be replaced by facts.",
            )
        ),
        table(
            "t-brief",
            spans("Product requirements"),
            (
                Column("Requirement", width=2.2),
                Column("Value", width=3.6),
                Column("Origin", width=1.2),
            ),
            rows,
        ),
    ]
    return Section(
        "requirements",
        spans("Product requirements"),
        tuple(blocks),
        (_assumed(story), *_warnings(story)),
        placement="3.2.P.2.2.1, quality target product profile",
    )


def _origin(keys: str, assumed: set[str]) -> str:
    parts = keys.split()
    taken = [key for key in parts if key in assumed]
    if not taken:
        return "stated"
    return "assumed" if len(taken) == len(parts) else "partly assumed"


def _rows(story: Story) -> list[tuple[str, Spans, str]]:
    b = story.brief
    return [
        *_product_rows(b),
        *_ph_rows(b),
        *_storage_rows(b),
        *_dose_rows(b),
        *_container_rows(b),
        *_tonicity_rows(story),
        *_wishes(b),
    ]


def _product_rows(b: Cursor) -> Iterable[Row]:
    route = b.text("product", "route")
    near = b.text("product", "precedent_route")
    yield "Dosage form", spans(word(FORMS, b.text("product", "form"))), "product.form"
    yield (
        "Route",
        spans(word(ROUTES, route))
        if near == route
        else spans(
            word(ROUTES, route), f" (precedents of the {word(ROUTES, near)} route)"
        ),
        "product.precedent_route" if near != route else "",
    )
    yield (
        "Patients",
        spans(word(POPULATIONS, b.text("product", "population"))),
        "product.population",
    )
    if b.get("dose", "age_years") is not None:
        yield "Age", spans(b.plain("dose", "age_years", unit="years")), ""
    books = b.get("product", "pharmacopoeias") or []
    if books:
        yield "Pharmacopoeias", spans(", ".join(word(BOOKS, x) for x in books)), ""
    if b.get("product", "filing"):
        yield "Filing", spans(b.text("product", "filing").upper()), ""


def _ph_rows(b: Cursor) -> Iterable[Row]:
    at = b.plain("ph", "measure_temperature_c", unit=C)
    yield (
        "pH, target",
        spans(b.plain("ph", "target")),
        "",
    )
    yield "Temperature of pH measurement", spans(at), "ph.measure_temperature_c"
    yield (
        "pH window over shelf life",
        spans(b.plain("ph", "low"), " to ", b.plain("ph", "high")),
        "ph.low ph.high",
    )
    yield (
        "pH tolerance at release",
        spans("±", b.plain("ph", "release_tolerance")),
        "ph.release_tolerance",
    )
    if b.get("ph", "storage_low") is not None:
        yield (
            "pH window at storage temperature",
            spans(b.plain("ph", "storage_low"), " to ", b.plain("ph", "storage_high")),
            "",
        )
    yield (
        "Temperature of preparation",
        spans(b.plain("ph", "prepare_temperature_c", unit=C)),
        "ph.prepare_temperature_c",
    )


def _storage_rows(b: Cursor) -> Iterable[Row]:
    for position, entry in enumerate(b.each("storage"), start=1):
        kind = entry.text("kind")
        state = entry.text("state")
        hours = entry.plain("hours", unit="h") if entry.get("hours") else None
        yield (
            f"Temperature, {word(STORAGE, kind)}",
            spans(
                entry.plain("temperature_c", unit=C),
                f", {state}" if state else None,
                ", for " if hours else None,
                hours,
            ),
            f"storage[{position}].temperature_c",
        )


def _dose_rows(b: Cursor) -> Iterable[Row]:
    yield (
        "Dose volume and frequency",
        spans(
            b.plain("dose", "volume_ml", unit="mL"),
            ", ",
            b.plain("dose", "per_day"),
            " a day",
        ),
        "dose.volume_ml dose.per_day",
    )
    if b.get("dose", "infusion_rate_ml_h") is not None:
        rate = b.plain("dose", "infusion_rate_ml_h", unit="mL/h")
        yield "Infusion rate", spans(rate), ""
    yield (
        "Body mass",
        spans(b.plain("dose", "body_mass_kg", unit="kg")),
        "dose.body_mass_kg",
    )


def _container_rows(b: Cursor) -> Iterable[Row]:
    yield (
        "Container",
        spans(
            word(CONTAINERS, b.text("container", "type")),
            ", filled with ",
            b.plain("container", "fill_volume_ml", unit="mL"),
        ),
        "container.type container.fill_volume_ml",
    )
    counted = b.get("container", "count_alkali")
    permeable = b.get("container", "gas_permeable")
    yield (
        "Alkali from the container",
        spans("counted" if counted else "not counted"),
        "container.count_alkali",
    )
    if permeable is not None:
        yield (
            "Container wall",
            spans("lets gas through" if permeable else "keeps gas in and out"),
            "container.gas_permeable",
        )
    yield (
        "Carbon dioxide",
        spans(
            word(EXPOSURES, b.text("carbon_dioxide", "exposure")),
            "; outside ",
            b.value("carbon_dioxide", "pressure_pa", unit="Pa"),
        ),
        "carbon_dioxide.exposure carbon_dioxide.pressure_pa",
    )


def _tonicity_rows(story: Story) -> Iterable[Row]:
    b = story.brief
    t = b.at("tonicity")
    if t.get("target_mosm_kg") is not None:
        yield (
            "Osmolality, target",
            spans(t.plain("target_mosm_kg", unit="mosmol/kg")),
            "tonicity.target_mosm_kg",
        )
    if t.get("low_mosm_kg") is not None and t.get("high_mosm_kg") is not None:
        yield (
            "Osmolality, limits",
            spans(
                t.plain("low_mosm_kg"),
                " to ",
                t.plain("high_mosm_kg", unit="mosmol/kg"),
            ),
            "tonicity.low_mosm_kg tonicity.high_mosm_kg",
        )
    if t.get("agent"):
        fills = "fills up to the target" if t.get("fill") else "not used to fill up"
        yield (
            "Tonicity agent",
            spans(story.material(t.text("agent")), f", {fills}"),
            "tonicity.agent",
        )
    if t.get("amorphous_sugar_is_assumed"):
        yield (
            "Amorphous sugar",
            spans(t.plain("amorphous_sugar_percent_w_v", unit="% w/v")),
            "tonicity.amorphous_sugar_percent_w_v",
        )
    for entry in b.each("excipient"):
        yield (
            "Excipient",
            spans(
                story.material(entry.text("material")),
                ", ",
                entry.value("mmol_l", unit="mmol/L"),
                " (stated as ",
                entry.plain("stated"),
                " ",
                entry.text("stated_unit").replace("_", " "),
                ")",
            ),
            "",
        )


def _wishes(b: Cursor) -> Iterable[Row]:
    for key, label in (
        ("exclude", "Excluded"),
        ("require", "Required among the candidates"),
        ("consider_roles", "Further roles considered"),
    ):
        if b.get(key):
            yield label, spans(b.plain(key)), ""


def _assumed(story: Story) -> Section:
    rows = [
        (
            spans(a.quote("key")),
            spans(
                a.plain("value")
                if a.number("value") is None
                else a.value("value", trim=True),
                " " if a.get("unit") else None,
                unit_words(a.text("unit")),
            ),
            spans(a.quote("reason")),
            source_cell(a.get("source"), a.text("basis")),
        )
        for a in story.root.each("assumptions")
    ]
    blocks: tuple[Block, ...]
    if rows:
        blocks = (
            table(
                "t-assumed",
                spans("Values assumed, since the brief does not state them"),
                (
                    Column("Key of the brief", width=2.0),
                    Column("Value", width=1.3),
                    Column("Reason", width=3.2),
                    Column("Basis and source", width=1.3),
                ),
                rows,
            ),
        )
    else:
        blocks = (
            Paragraph(spans("The brief states everything; nothing was assumed.")),
        )
    return Section("assumed", spans("Assumed values"), blocks)


def _warnings(story: Story) -> list[Section]:
    found = [
        spans(sentence(story.root.at("warnings", i)))
        for i in range(len(story.root.get("warnings") or ()))
    ]
    if not found:
        return []
    return [
        Section(
            "warnings",
            spans("What the reader should know first"),
            (Items(tuple(found)),),
        )
    ]
