"""Grids of what lies behind a candidate: particles, freezing, doses, ionization."""

from __future__ import annotations

from collections.abc import Sequence
from typing import Any

from formbuf.advice.results import Candidate, Exposure, Shortlist
from formbuf.library.records import Quantity
from formbuf.output import serialise, words
from formbuf.output.figures import ABSENT, decimals, plainly, significant
from formbuf.output.page import Block, Column, Grid, Items, number


def species_grid(c: Candidate) -> Grid:
    """Return every dissolved particle at the measurement temperature."""
    rows = tuple(
        (s.component, f"{s.charge:+d}" if s.charge else "0", significant(s.mmol_l, 4))
        for s in c.species_states
    )
    return Grid((Column("Component"), number("Charge"), number("mmol/L")), rows)


def frozen_blocks(c: Candidate) -> list[Block]:
    """Return what freezing or drying does, with the bounding paths."""
    found = serialise.frozen_dict(c.frozen)
    if found is None:
        return []
    plain_rows = [
        ("class", found.get("freezing_class")),
        ("class that counts", found.get("counted_class")),
        ("why it differs", found.get("remark")),
        ("basis", found.get("basis")),
        ("reason", found.get("reason")),
        ("shift of pH by freezing", _shift(found.get("freezing_shift"))),
        ("shift of pH by cooling alone", _shift(found.get("cooling_shift"))),
        ("where samples fall", found.get("where_samples_fall")),
    ]
    rows = tuple((name, plainly(value)) for name, value in plain_rows if value)
    grid = Grid((Column("Freezing", keep=True), Column("Finding")), rows)
    return [grid, _paths(found), Items(tuple(found.get("notes", ())))]


def _shift(value: float | None) -> str:
    return "" if value is None else words.ph_words(value, sign=True)


def _paths(found: dict[str, Any]) -> Grid:
    """Return the pH of each bounding path by temperature, side by side."""
    paths = found.get("paths", ())
    at = sorted(
        {p["temperature_c"] for path in paths for p in path["points"]}, reverse=True
    )
    rows = []
    for temperature in at:
        cells = [decimals(temperature, 1)]
        for path in paths:
            point = next(
                (p for p in path["points"] if p["temperature_c"] == temperature), None
            )
            cells += [
                ABSENT if point is None else decimals(point["ph"], 2),
                "" if point is None else str(point["state"]),
            ]
        rows.append(tuple(cells))
    columns = [number("C")]
    for path in paths:
        columns += [number(f"pH,\n{path['assumption']}"), Column("State")]
    return Grid(tuple(columns), tuple(rows))


def _limit(row: Exposure) -> str:
    """Return a limit; one that only decides what the leaflet says is marked."""
    if row.limit is None:
        return ABSENT
    label = ", for labelling" if row.limit_use == "label" else ""
    return f"{significant(row.limit)} {row.limit_unit}{label}"


def exposures_grid(exposures: Sequence[Exposure]) -> Grid:
    """Return what a dose and a day bring of each substance, against its limit."""
    rows = tuple(
        (
            row.substance,
            significant(row.mmol_dose),
            significant(row.mmol_day),
            significant(row.mg_dose),
            significant(row.mg_day),
            _limit(row),
            ABSENT
            if row.limit_share is None
            else f"{significant(100 * row.limit_share)} %",
            row.limit_basis,
        )
        for row in exposures
    )
    columns = (
        Column("Substance"),
        number("mmol,\ndose"),
        number("mmol,\nday"),
        number("mg,\ndose"),
        number("mg,\nday", 100),
        Column("Limit"),
        number("Share"),
        Column("Basis", from_width=100),
    )
    return Grid(columns, rows)


def ionization_grid(result: Shortlist, c: Candidate) -> Grid:
    """Return the ionization steps of the buffering species, with their sources."""
    rows = []
    for species in c.system.species:
        for step in result.library.species[species].steps:
            dh = step.dh_kj_mol
            rows.append(
                (
                    species,
                    str(step.step),
                    decimals(step.pka.value, 3),
                    ABSENT if dh is None else decimals(dh.value, 2),
                    ABSENT
                    if step.dcp_j_mol_k is None
                    else decimals(step.dcp_j_mol_k.value, 0),
                    step.pka.basis,
                    _cited(step.pka),
                )
            )
    columns = (
        Column("Species"),
        number("Step"),
        number("pK"),
        number("Enthalpy,\nkJ/mol"),
        number("Heat capacity,\nJ/mol/K"),
        Column("Basis", keep=True),
        Column("Source", from_width=100),
    )
    return Grid(columns, tuple(rows))


def _cited(quantity: Quantity) -> str:
    return ", ".join(text for text in (quantity.source, quantity.locator) if text)
