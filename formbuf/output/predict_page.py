"""A prediction to read, as JSON and as flat rows."""

from __future__ import annotations

from typing import Any

from formbuf.bench.predict import PredictedState, Prediction
from formbuf.output import serialise, words
from formbuf.output.figures import decimals, significant
from formbuf.output.page import (
    NARROW,
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
from formbuf.product.overlay_changes import overlay_notice

PREDICT_SCHEMA = "formbuf.predict/1"


def predict_page(result: Prediction) -> Page:
    """Return a prediction as a page."""
    return Page(
        payload=lambda: predict_dict(result),
        records=lambda: [_record(result, state) for state in result.states],
        blocks=lambda: blocks(result),
    )


def predict_dict(result: Prediction) -> dict[str, Any]:
    """Return a prediction as plain data."""
    per = "kg" if result.basis == "molal" else "l"
    return {
        **serialise.header(PREDICT_SCHEMA, result.library),
        "basis": result.basis,
        "composition": [
            {"material": a.material, f"mmol_{per}": a.mmol, f"g_{per}": a.grams}
            for a in result.added
        ],
        "water_kg_l": result.water_kg_l,
        "open_to_carbon_dioxide_pa": result.open_to_carbon_dioxide_pa,
        "states": [serialise.plain(state) for state in result.states],
        "warnings": list(_overlay(result)),
    }


def blocks(result: Prediction) -> list[Block]:
    """Return a prediction as blocks to read."""
    unit = "kg of water" if result.basis == "molal" else "L of solution"
    short = "kg" if result.basis == "molal" else "L"
    composition = Grid(
        (Column("Material"), number(f"mmol/{short}"), number(f"g/{short}")),
        tuple(
            (a.name, significant(a.mmol, 4), significant(a.grams, 4))
            for a in result.added
        ),
    )
    found: list[Block] = [
        Heading(f"Predicted from the composition, per {unit}", 1),
        composition,
        _states(result),
    ]
    pressure = result.open_to_carbon_dioxide_pa
    if pressure is not None:
        text = f"Open to {significant(pressure)} Pa of carbon dioxide."
        found.append(Paragraph(text))
    found += section("Notes", Items((*_overlay(result), *_notes(result))))
    found.append(Paragraph(words.CAUTION))
    return found


def _states(result: Prediction) -> Grid:
    has_gas = any(s.carbon_dioxide_pa is not None for s in result.states)
    columns = [
        number("C"),
        number("pH"),
        number("Ionic strength,\nmol/kg"),
        number("Capacity,\nmmol/kg/pH"),
        number("Osmolality,\nmosmol/kg"),
    ]
    rows = [
        [
            f"{s.temperature_c:g}",
            decimals(s.ph, 3),
            significant(s.ionic_strength_mol_kg),
            significant(s.capacity_mmol_kg_ph),
            decimals(s.osmolality_mosm_kg, 1),
        ]
        for s in result.states
    ]
    if has_gas:
        columns.append(number("CO2,\nPa", NARROW))
        for row, s in zip(rows, result.states, strict=True):
            row.append(significant(s.carbon_dioxide_pa))
    return Grid(tuple(columns), tuple(tuple(row) for row in rows))


def _overlay(result: Prediction) -> tuple[str, ...]:
    """Return the line on the overlay that the result rests on, if there is one."""
    return tuple(filter(None, (overlay_notice(result.library),)))


def _notes(result: Prediction) -> tuple[str, ...]:
    """Return each note once, with the temperatures at which it holds."""
    at: dict[str, list[str]] = {}
    for state in result.states:
        for note in state.notes:
            at.setdefault(note, []).append(f"{state.temperature_c:g} C")
    everywhere = len(result.states)
    return tuple(
        note if len(where) == everywhere else f"{', '.join(where)}: {note}"
        for note, where in at.items()
    )


def _record(result: Prediction, state: PredictedState) -> dict[str, Any]:
    return {
        "temperature_c": state.temperature_c,
        "ph": state.ph,
        "ionic_strength_mol_kg": state.ionic_strength_mol_kg,
        "capacity_mmol_kg_ph": state.capacity_mmol_kg_ph,
        "capacity_mmol_l_ph": state.capacity_mmol_l_ph,
        "osmolality_mosm_kg": state.osmolality_mosm_kg,
        "carbon_dioxide_pa": state.carbon_dioxide_pa,
        "basis": result.basis,
        "notes": list(state.notes),
    }
