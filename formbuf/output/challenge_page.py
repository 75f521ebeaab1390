"""A challenge with acid, base and carbon dioxide to read, as JSON and as flat rows."""

from __future__ import annotations

from typing import Any

from formbuf.bench.challenge import Challenge
from formbuf.bench.exposure import Exposed
from formbuf.output import serialise, words
from formbuf.output.bench_words import (
    head,
    kinds_words,
    made_words,
    materials_list,
    target_words,
)
from formbuf.output.figures import decimals, significant
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

CHALLENGE_SCHEMA = "formbuf.challenge/1"


def challenge_page(result: Challenge) -> Page:
    """Return a challenge as a page."""
    return Page(
        payload=lambda: challenge_dict(result),
        records=lambda: [serialise.plain(point) for point in result.points],
        blocks=lambda: blocks(result),
    )


def challenge_dict(result: Challenge) -> dict[str, Any]:
    """Return a challenge as plain data."""
    return {
        **head(CHALLENGE_SCHEMA, result.bench),
        "composition": materials_list(result.bench, result.made.materials_mmol_l),
        "unbuffered_composition": materials_list(
            result.bench, result.unbuffered.materials_mmol_l
        ),
        "points": [serialise.plain(point) for point in result.points],
        "windows": [serialise.plain(room) for room in result.rooms],
        "carbon_dioxide": [
            {**_exposed(one), "ph_unbuffered": other.ph}
            for one, other in zip(
                result.exposures, result.exposures_unbuffered, strict=True
            )
        ],
        "warnings": list(result.notes),
    }


def _exposed(one: Exposed) -> dict[str, Any]:
    return {
        "exposure": one.exposure,
        "temperature_c": one.temperature_c,
        "ph": one.ph,
        "capacity_mmol_l_ph": one.capacity_mmol_l_ph,
        "carbonate_mmol_l": one.carbonate_mmol_l,
        "pressure_pa": one.pressure_pa,
    }


def blocks(result: Challenge) -> list[Block]:
    """Return a challenge as blocks to read."""
    bench = result.bench
    found: list[Block] = [
        Heading(f"Challenge: {made_words(bench)}, {target_words(bench)}", 1),
        Paragraph(
            f"Window {bench.low_ph:.2f} to {bench.high_ph:.2f}. Strong base is added; "
            "negative amounts are strong acid."
        ),
        _points(result),
    ]
    found += section("What uses up the window", _rooms(result))
    found += section("In contact with carbon dioxide", _gas(result))
    found += section("Notes", Items(result.notes))
    found.append(Paragraph(words.CAUTION))
    return found


def _points(result: Challenge) -> Grid:
    bench = result.bench
    several = len({p.temperature_c for p in result.points}) > 1
    rows = []
    for p in result.points:
        marks = []
        if p.temperature_c == bench.measure_temperature_c:
            inside = bench.low_ph <= p.ph <= bench.high_ph
            marks.append("in window" if inside else "outside")
        row = [
            decimals(p.added_mmol_l, 3, sign=True),
            decimals(p.ph, 2),
            decimals(p.ph_unbuffered, 2),
            significant(p.capacity_mmol_l_ph),
            " ".join(marks),
        ]
        rows.append(tuple([f"{p.temperature_c:g}", *row] if several else row))
    columns = [
        number("Added,\nmmol/L"),
        number("pH"),
        number("pH without\nbuffer"),
        number("Capacity,\nmmol/L/pH"),
        Column("Note"),
    ]
    return Grid(tuple([number("C"), *columns] if several else columns), tuple(rows))


def _rooms(result: Challenge) -> Grid:
    return Grid(
        (
            number("C"),
            Column("Stands for"),
            number("pH"),
            number("Acid,\nmmol/L"),
            number("Base,\nmmol/L"),
            number("Acid without\nbuffer,\nmmol/L"),
            number("Base without\nbuffer,\nmmol/L"),
        ),
        tuple(
            (
                f"{r.temperature_c:g}",
                kinds_words(r.kinds),
                decimals(r.ph, 2),
                significant(r.acid_mmol_l),
                significant(r.base_mmol_l),
                significant(r.acid_unbuffered_mmol_l),
                significant(r.base_unbuffered_mmol_l),
            )
            for r in result.rooms
        ),
    )


def _gas(result: Challenge) -> Grid:
    return Grid(
        (
            Column("Exposure"),
            number("pH"),
            number("pH without\nbuffer"),
            number("CO2, Pa"),
            number("Carbonate,\nmmol/L"),
        ),
        tuple(
            (
                one.exposure,
                decimals(one.ph, 2),
                decimals(bare.ph, 2),
                significant(one.pressure_pa),
                significant(one.carbonate_mmol_l),
            )
            for one, bare in zip(
                result.exposures, result.exposures_unbuffered, strict=True
            )
        ),
    )
