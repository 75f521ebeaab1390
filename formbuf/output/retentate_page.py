"""A retentate and its diafiltration buffer to read, as JSON and as flat rows."""

from __future__ import annotations

from typing import Any

from formbuf.bench.retentate import Retentate
from formbuf.output import serialise, words
from formbuf.output.bench_words import head, made_words, materials_list, target_words
from formbuf.output.figures import significant
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

RETENTATE_SCHEMA = "formbuf.retentate/1"


def retentate_page(forward: Retentate, backward: Retentate) -> Page:
    """Return the retentate of a buffer and the buffer of a retentate as a page."""
    both = (forward, backward)
    return Page(
        payload=lambda: _payload(both),
        records=lambda: [row for one in both for row in _records(one)],
        blocks=lambda: blocks(both),
    )


def _payload(both: tuple[Retentate, Retentate]) -> dict[str, Any]:
    forward = both[0]
    return {
        **head(RETENTATE_SCHEMA, forward.bench),
        "protein": {
            "mg_ml": forward.protein.mg_ml,
            "mmol_l": forward.protein.mmol_l,
            "volume_ml_g": forward.protein.volume_ml_g,
        },
        "directions": [_dict(one) for one in both],
        "warnings": list(dict.fromkeys(n for one in both for n in one.notes)),
    }


def _dict(one: Retentate) -> dict[str, Any]:
    return {
        "direction": one.direction,
        "temperature_c": one.temperature_c,
        "buffer_ph": one.buffer_ph,
        "retentate_ph": one.retentate_ph,
        "ph_offset": one.ph_offset,
        "protein_charge": one.protein_charge,
        "potential_mv": one.potential_mv,
        "water_buffer_kg_l": one.water_buffer_kg_l,
        "water_retentate_kg_l": one.water_retentate_kg_l,
        "components": [serialise.plain(side) for side in one.sides],
        "buffer_composition": materials_list(one.bench, one.buffer_materials_mmol_l),
    }


def _records(one: Retentate) -> list[dict[str, Any]]:
    return [
        {
            "direction": one.direction,
            "buffer_ph": one.buffer_ph,
            "retentate_ph": one.retentate_ph,
            "protein_charge": one.protein_charge,
            **serialise.plain(side),
        }
        for side in one.sides
    ]


def blocks(both: tuple[Retentate, Retentate]) -> list[Block]:
    """Return both directions as blocks to read."""
    forward, backward = both
    bench, protein = forward.bench, forward.protein
    found: list[Block] = [
        Heading(f"Retentate with {protein.mg_ml:g} mg/mL of protein", 1),
        Paragraph(
            f"Donnan equilibrium at {forward.temperature_c:g} C, the volume of the "
            "protein excluded. "
            + forward.notes[0][0].upper()
            + forward.notes[0][1:]
            + "."
        ),
    ]
    found += section(
        f"Diafiltered against {made_words(bench)}, {target_words(bench)}",
        Paragraph(_offset(forward)),
        _sides(forward),
    )
    found += section(
        f"Wanted in the retentate: {made_words(bench)}, {target_words(bench)}",
        Paragraph(_offset(backward)),
        _sides(backward),
        _materials(backward),
    )
    notes = dict.fromkeys(n for one in both for n in one.notes[1:])
    found += section("Notes", Items(tuple(notes)))
    found.append(Paragraph(words.CAUTION))
    return found


def _offset(one: Retentate) -> str:
    return (
        f"Buffer pH {one.buffer_ph:.2f}, retentate pH {one.retentate_ph:.2f} (offset "
        f"{one.ph_offset:+.2f}); protein charge {one.protein_charge:+.1f}, potential "
        f"{one.potential_mv:+.1f} mV."
    )


def _sides(one: Retentate) -> Grid:
    return Grid(
        (
            Column("Component"),
            number("Buffer,\nmmol/L"),
            number("Retentate,\nmmol/L"),
            number("Buffer,\nmmol/kg"),
            number("Retentate,\nmmol/kg"),
        ),
        tuple(
            (
                side.component.replace("_", " "),
                significant(side.buffer_mmol_l, 4),
                significant(side.retentate_mmol_l, 4),
                significant(side.buffer_mmol_kg, 4),
                significant(side.retentate_mmol_kg, 4),
            )
            for side in one.sides
        ),
    )


def _materials(one: Retentate) -> Grid:
    rows = materials_list(one.bench, one.buffer_materials_mmol_l)
    return Grid(
        (Column("Diafiltration buffer made of"), number("mmol/L"), number("g/L")),
        tuple(
            (
                one.bench.library.find_material(row["material"]).name,
                significant(row["mmol_l"], 4),
                significant(row["g_l"], 4),
            )
            for row in rows
        ),
    )
