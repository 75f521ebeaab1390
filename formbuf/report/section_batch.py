"""The batch sheet of the lead as an annex to be filled in by hand."""

from __future__ import annotations

from formbuf.report.content import (
    Block,
    Column,
    Items,
    Note,
    Paragraph,
    Section,
    Span,
    Spans,
    Table,
)
from formbuf.report.reading import Cursor, sentence, spans
from formbuf.report.story import C, Story, number, table
from formbuf.report.words import STORAGE, word

#: Stands in a field to be filled in by hand.
BLANK = "\u2026\u2026\u2026"
FIELDS = ("Lot", "Weighed", "By", "Checked")
SMALL_PLACES = 3


def batch(story: Story) -> Section | None:
    """Return the annex with the batch sheet; None where there is none."""
    place = story.more.at("batch_sheet")
    if place.data is None:
        return None
    name = story.of(place.text("candidate"))
    title = (
        spans("Batch sheet")
        if name is None
        else spans("Batch sheet: ", name.quote("name"))
    )
    head = Paragraph(
        spans(
            "For ",
            place.plain("batch_l", unit="L"),
            " of the product with ",
            place.plain("inputs", "concentration_mmol_l", unit="mmol/L"),
            " of buffer; target pH ",
            place.value("inputs", "target_ph", places=2),
            " at ",
            place.plain("inputs", "measure_temperature_c", unit=C),
            ", made at ",
            place.plain("inputs", "prepare_temperature_c", unit=C),
            ". Lots, weights and signatures are filled in by hand.",
        )
    )
    ways = tuple(
        _way(story, way, index) for index, way in enumerate(place.each("ways"))
    )
    notes = [sentence(note) for note in place.each("warnings")]
    blocks: list[Block] = [head, *(Note(note) for note in notes)]
    return Section("batch-sheet", title, tuple(blocks), ways, annex=True)


def _way(story: Story, way: Cursor, index: int) -> Section:
    key = f"batch-{index + 1}"
    blocks: list[Block] = [
        _weigh(way, key),
        Paragraph(
            spans(
                "Water about ",
                way.value("check_sums", "water_g", unit="g", digits=5),
                "; density about ",
                way.value("check_sums", "density_kg_l", unit="kg/L", places=4),
                " (estimated).",
            )
        ),
        Items(tuple(sentence(step) for step in way.each("steps"))),
        _readings(way, key),
        _mistakes(story, way, key),
    ]
    if way.get("wrong_hydrates"):
        blocks.append(_hydrates(story, way, key))
    blocks.append(Paragraph(_allowance(way)))
    blocks += [Note(sentence(caution)) for caution in way.each("cautions")]
    return Section(
        key, spans("Way ", "AB"[index], ": ", way.quote("title")), tuple(blocks)
    )


def _weigh(way: Cursor, key: str) -> Table:
    rows = [
        (
            spans(line.quote("grade_name")),
            spans(line.value("weigh_g", digits=5)),
            spans(line.value("measure_ml", digits=5)),
            *(spans(BLANK) for _ in FIELDS),
        )
        for line in way.each("lines")
    ]
    return table(
        f"t-{key}-weigh",
        spans("What to weigh or measure"),
        (
            Column("Material", width=2.6),
            number("Weigh, g"),
            number("or mL"),
            *(Column(field) for field in FIELDS),
        ),
        rows,
    )


def _readings(way: Cursor, key: str) -> Table:
    rows = [
        (
            spans(r.plain("temperature_c")),
            spans(", ".join(word(STORAGE, k) for k in r.get("kinds") or ())),
            spans(r.value("ph", places=SMALL_PLACES)),
            spans("as made"),
        )
        for r in way.each("readings")
    ]
    rows += [
        (
            spans(r.plain("prepare_c")),
            spans(word(STORAGE, "prepare")),
            spans(r.value("meter_at_prepare", places=SMALL_PLACES)),
            spans("to have the target at ", r.plain("storage_c", unit=C)),
        )
        for r in way.each("storage_readings")
    ]
    return table(
        f"t-{key}-readings",
        spans("What the meter reads"),
        (
            number(f"T, {C}"),
            Column("Stands for", width=1.6),
            number("pH"),
            Column("When"),
        ),
        rows,
    )


def _mistakes(story: Story, way: Cursor, key: str) -> Table:
    rows = [
        (
            spans("1 % more ", _weighed(story, way, e.text("material"))),
            spans(e.value("d_ph", places=SMALL_PLACES, sign=True)),
            spans(e.value("d_osmolality_mosm_kg", places=1, sign=True)),
        )
        for e in way.each("weighing_errors_1_percent")
    ]
    for text, name in (
        ("solution 2 K warmer than taken", "warmer_solution_2_k_d_ph"),
        ("meter compensation set 2 K too high", "compensation_2_k_d_ph"),
    ):
        rows.append(
            (
                spans(text),
                spans(way.value(name, places=SMALL_PLACES, sign=True)),
                spans("-"),
            )
        )
    return table(
        f"t-{key}-mistakes",
        spans("What a small mistake does"),
        (Column("Mistake", width=2.6), number("Change of pH"), number("mosmol/kg")),
        rows,
    )


def _weighed(story: Story, way: Cursor, key: str) -> Span:
    """Return the name of what is weighed of a material."""
    lines = [line for line in way.each("lines") if line.get("material") == key]
    return lines[0].quote("grade_name") if lines else story.material(key)


def _hydrates(story: Story, way: Cursor, key: str) -> Table:
    rows = [
        (
            spans(story.material(w.text("weighed"))),
            spans(story.material(w.text("meant"))),
            spans(w.value("ph", places=2)),
            spans(w.value("d_ph", places=2, sign=True)),
        )
        for w in way.each("wrong_hydrates")
    ]
    return table(
        f"t-{key}-hydrates",
        spans("What another hydrate weighed by mistake gives"),
        (
            Column("Weighed", width=2.2),
            Column("instead of", width=2.2),
            number("pH"),
            number("change"),
        ),
        rows,
    )


def _allowance(way: Cursor) -> Spans:
    a = way.at("allowance")
    acid = (
        a.value("acid_ml", unit="mL")
        if a.get("acid_ml") is not None
        else a.value("acid_g", unit="g")
    )
    base = (
        a.value("base_ml", unit="mL")
        if a.get("base_ml") is not None
        else a.value("base_g", unit="g")
    )
    return spans(
        "Adjustment allowance for ",
        a.plain("tolerance_ph"),
        " pH: ",
        acid,
        " of ",
        a.quote("acid_grade", "name"),
        " to lower it, ",
        base,
        " of ",
        a.quote("base_grade", "name"),
        " to raise it.",
    )
