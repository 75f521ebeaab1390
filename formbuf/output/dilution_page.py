"""A dilution to read, as JSON and as flat rows."""

from __future__ import annotations

from typing import Any

from formbuf.bench.dilution import STATES, DilutedState, Dilution
from formbuf.output import serialise, words
from formbuf.output.bench_words import head, made_words, materials_list, target_words
from formbuf.output.figures import decimals, significant
from formbuf.output.page import (
    Block,
    Grid,
    Heading,
    Items,
    Page,
    Paragraph,
    number,
    section,
)

DILUTION_SCHEMA = "formbuf.dilution/1"


def dilution_page(result: Dilution) -> Page:
    """Return a dilution as a page."""
    return Page(
        payload=lambda: dilution_dict(result),
        records=lambda: [serialise.plain(state) for state in result.states],
        blocks=lambda: blocks(result),
    )


def dilution_dict(result: Dilution) -> dict[str, Any]:
    """Return a dilution as plain data."""
    diluent = result.diluent
    return {
        **head(DILUTION_SCHEMA, result.bench),
        "composition": materials_list(result.bench, result.made.materials_mmol_l),
        "diluent": {
            "id": diluent.id,
            "name": diluent.name,
            "contents_mmol_l": dict(diluent.contents_mmol_l),
            "ph_low": diluent.ph_low,
            "ph_high": diluent.ph_high,
            "basis": diluent.basis,
            "source": diluent.source or None,
        },
        "exposure": result.exposure,
        "states": [serialise.plain(state) for state in result.states],
        "warnings": list(result.notes),
    }


def blocks(result: Dilution) -> list[Block]:
    """Return a dilution as blocks to read."""
    bench, diluent = result.bench, result.diluent
    t = result.states[0].temperature_c if result.states else bench.measure_temperature_c
    found: list[Block] = [
        Heading(f"{made_words(bench)}, {target_words(bench)}, in {diluent.name}", 1),
        Paragraph(
            f"At {t:g} C, {result.exposure}. {diluent.name} may have pH "
            f"{diluent.ph_low:g} to {diluent.ph_high:g} ({diluent.basis}); with carbon "
            f"dioxide of the air alone it has {_air_ph(result)}."
        ),
        _grid(result),
    ]
    found += section("Notes", Items(result.notes))
    found.append(Paragraph(words.CAUTION))
    return found


def _air_ph(result: Dilution) -> str:
    return next(
        (decimals(s.diluent_ph, 2) for s in result.states if s.diluent_state == "air"),
        "-",
    )


def _grid(result: Dilution) -> Grid:
    by_fold: dict[float, dict[str, DilutedState]] = {}
    for state in result.states:
        by_fold.setdefault(state.fold, {})[state.diluent_state] = state
    has_dose = any(s.titratable_acidity_mmol_dose is not None for s in result.states)
    columns = [
        number("Fold"),
        number("pH, diluent\nat acid end"),
        number("pH with CO2\nof the air"),
        number("pH at basic\nend"),
        number("Capacity,\nmmol/L/pH"),
        number("mosmol/kg", short="mosmol\n/kg"),
        number("Acidity to 7.4,\n" + ("mmol/dose" if has_dose else "mmol/L")),
    ]
    rows = []
    for fold, states in by_fold.items():
        middle = states["air"]
        acidity = (
            middle.titratable_acidity_mmol_dose
            if has_dose
            else middle.titratable_acidity_mmol_l
        )
        rows.append(
            (
                f"{fold:g}",
                *(decimals(states[which].ph, 2) for which in STATES),
                significant(middle.capacity_mmol_l_ph),
                decimals(middle.osmolality_mosm_kg, 0),
                significant(acidity),
            )
        )
    return Grid(tuple(columns), tuple(rows))
