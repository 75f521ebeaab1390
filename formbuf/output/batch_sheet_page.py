"""A batch sheet to read and fill in, as JSON and as flat rows."""

from __future__ import annotations

from typing import Any

from formbuf.bench.batch_records import BatchSheet, Line, WaySheet
from formbuf.bench.grades import Grade
from formbuf.library import Library
from formbuf.output import serialise, words
from formbuf.output.bench_words import (
    head,
    kinds_words,
    made_words,
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

BATCH_SHEET_SCHEMA = "formbuf.batch_sheet/1"
BLANKS = ("lot", "weighed", "by", "checked")
#: What stands in a field to be filled in by hand.
BLANK = "______"
DIGITS = 5


def batch_sheet_page(sheet: BatchSheet) -> Page:
    """Return a batch sheet as a page."""
    return Page(
        payload=lambda: batch_sheet_dict(sheet),
        records=lambda: _records(sheet),
        blocks=lambda: blocks(sheet),
    )


def batch_sheet_dict(sheet: BatchSheet) -> dict[str, Any]:
    """Return a batch sheet as plain data."""
    return {**head(BATCH_SHEET_SCHEMA, sheet.bench), **sheet_dict(sheet)}


def sheet_dict(sheet: BatchSheet) -> dict[str, Any]:
    """Return what a batch sheet adds to its inputs, as plain data."""
    return {
        "batch_l": sheet.batch_l,
        "batch_kg": sheet.batch_kg,
        "target_temperature_c": sheet.target_temperature_c,
        "mole_ratio": dict(sheet.mole_ratio),
        "ways": [_way_dict(way) for way in sheet.ways],
        "warnings": list(sheet.notes),
    }


def _way_dict(way: WaySheet) -> dict[str, Any]:
    return {
        "way": way.way.id,
        "title": way.way.title,
        "lines": [{**_line_dict(line), **dict.fromkeys(BLANKS)} for line in way.lines],
        "steps": list(way.steps),
        "readings": serialise.plain(way.readings),
        "storage_readings": serialise.plain(way.storage_readings),
        "osmolality_mosm_kg": way.osmolality_mosm_kg,
        "capacity_mmol_l_ph": way.capacity_mmol_l_ph,
        "ionic_strength_mol_kg": way.ionic_strength_mol_kg,
        "weighing_errors_1_percent": serialise.plain(way.weighing_errors),
        "warmer_solution_2_k_d_ph": way.warmer_solution_d_ph,
        "compensation_2_k_d_ph": way.compensation_d_ph,
        "wrong_hydrates": serialise.plain(way.wrong_hydrates),
        "allowance": serialise.plain(way.allowance),
        "check_sums": serialise.plain(way.sums),
        "by_product_mmol_l": dict(way.way.by_product),
        "cautions": list(way.cautions),
    }


def _line_dict(line: Line) -> dict[str, Any]:
    grade = line.grade
    return {
        "material": line.material,
        "name": line.name,
        "formula": line.formula,
        "role": line.role,
        "grade": grade.id,
        "grade_name": grade.name,
        "assay_percent": grade.assay_percent,
        "water_percent": grade.water_percent,
        "strength_mol_l": grade.strength_mol_l,
        "density_kg_l": grade.density_kg_l,
        "mmol_l": line.mmol_l,
        "mmol": line.mmol,
        "pure_g": line.pure_g,
        "weigh_g": line.weigh_g,
        "measure_ml": line.measure_ml,
    }


def _records(sheet: BatchSheet) -> list[dict[str, Any]]:
    return [
        {"way": way.way.id, **_line_dict(line), **dict.fromkeys(BLANKS)}
        for way in sheet.ways
        for line in way.lines
    ]


def blocks(sheet: BatchSheet) -> list[Block]:
    """Return a batch sheet as blocks to read."""
    bench = sheet.bench
    size = f"{sheet.batch_l:.5g} L"
    if sheet.batch_kg is not None:
        size = f"{sheet.batch_kg:.5g} kg ({size})"
    found: list[Block] = [
        Heading(f"Batch sheet: {size} of {made_words(bench)}", 1),
        Paragraph(
            f"Target {target_words(bench).removeprefix('target ')}"
            + (
                f", to hold at {sheet.target_temperature_c:g} C"
                if sheet.target_temperature_c != bench.measure_temperature_c
                else ""
            )
            + f"; made at {bench.prepare_temperature_c:g} C."
        ),
    ]
    if sheet.mole_ratio:
        shares = ", ".join(
            f"{name} {100.0 * share:.1f} %" for name, share in sheet.mole_ratio.items()
        )
        found.append(Paragraph(f"Of the total: {shares}."))
    for letter, way in zip("AB", sheet.ways, strict=False):
        found += _way_blocks(bench.library, letter, way)
    found += section("Notes", Items(sheet.notes))
    found.append(Paragraph(words.CAUTION))
    return found


def _way_blocks(library: Library, letter: str, way: WaySheet) -> list[Block]:
    found: list[Block] = [
        Heading(f"Way {letter}: {way.way.title}"),
        _weigh_grid(way),
        Paragraph(
            f"Water about {significant(way.sums.water_g, DIGITS)} g, to "
            f"{significant(way.sums.batch_l, DIGITS)} L "
            f"({significant(way.sums.batch_g, DIGITS)} g at {way.sums.density_kg_l:.4f} "
            "kg/L, estimated)."
        ),
        Grid(
            (Column("Grade", keep=False), Column("Taken as"), Column("Basis")),
            tuple(
                (line.name, _grade_words(line.grade), _basis(line))
                for line in way.lines
            ),
        ),
    ]
    found += section("Order of addition", _steps(way), level=3)
    found += section("What the meter reads", _readings(way), _storage(way), level=3)
    found += section(
        "If something is off", _errors(library, way), _wrong(library, way), level=3
    )
    found += section("Checks", Items(_checks(way)), level=3)
    found += section("Cautions", Items(way.cautions), level=3)
    return found


def _weigh_grid(way: WaySheet) -> Grid:
    columns = (
        Column("Material"),
        number("mmol/L", 100),
        number("Weigh, g"),
        number("or mL"),
        *(Column(name.capitalize(), keep=True) for name in BLANKS),
    )
    rows = tuple(
        (
            _material_words(line),
            significant(line.mmol_l, 4),
            significant(line.weigh_g, DIGITS),
            significant(line.measure_ml, DIGITS),
            *(BLANK for _ in BLANKS),
        )
        for line in way.lines
    )
    return Grid(columns, rows)


def _material_words(line: Line) -> str:
    if line.role in ("titrant", "tonicity agent"):
        return f"{line.grade.name} ({line.role})"
    return line.grade.name


def _grade_words(grade: Grade) -> str:
    if grade.strength_mol_l is not None:
        return f"{grade.strength_mol_l:g} mol/L"
    text = f"assay {grade.assay_percent:g} %"
    if grade.water_percent:
        text += f", water {grade.water_percent:g} %"
    if grade.form == "liquid" and grade.density_kg_l:
        text += f", {grade.density_kg_l:g} kg/L"
    return text


def _basis(line: Line) -> str:
    if line.grade.stated:
        return "as stated"
    return "label to be checked" if line.grade.basis == "memory" else "as labelled"


def _steps(way: WaySheet) -> Grid:
    return Grid(
        (number("Step"), Column("What"), Column("By", keep=True)),
        tuple((str(n), text, BLANK) for n, text in enumerate(way.steps, start=1)),
    )


def _readings(way: WaySheet) -> Grid:
    return Grid(
        (number("C"), Column("Stands for"), number("pH"), number("dpH/dT, 1/K")),
        tuple(
            (
                f"{r.temperature_c:g}",
                kinds_words(r.kinds),
                decimals(r.ph, 3),
                decimals(r.slope_per_k, 4, sign=True),
            )
            for r in way.readings
        ),
    )


def _storage(way: WaySheet) -> Grid:
    return Grid(
        (
            number("To hold the target at, C"),
            number("Meter at preparation, pH", short="Meter at pre-\nparation, pH"),
            number("Meter at 25 C, pH", short="Meter at\n25 C, pH"),
        ),
        tuple(
            (
                f"{r.storage_c:g}",
                f"{r.meter_at_prepare:.3f} ({r.prepare_c:g} C)",
                decimals(r.meter_at_25, 3),
            )
            for r in way.storage_readings
        ),
    )


def _errors(library: Library, way: WaySheet) -> Grid:
    names = {line.material: line.grade.name for line in way.lines}
    names = {
        e.material: names.get(e.material, library.find_material(e.material).name)
        for e in way.weighing_errors
    }
    rows = [
        (
            f"1 % more {names[e.material]}",
            decimals(e.d_ph, 3, sign=True),
            decimals(e.d_osmolality_mosm_kg, 1, sign=True),
        )
        for e in way.weighing_errors
    ]
    rows.append(
        (
            "solution 2 K warmer than taken",
            decimals(way.warmer_solution_d_ph, 3, sign=True),
            "-",
        )
    )
    rows.append(
        (
            "meter compensation set 2 K too high",
            decimals(way.compensation_d_ph, 3, sign=True),
            "-",
        )
    )
    return Grid(
        (
            Column("What"),
            number("pH changes by", short="pH changes\nby"),
            number("mosmol/kg changes by", short="mosmol/kg\nchanges by"),
        ),
        tuple(rows),
    )


def _wrong(library: Library, way: WaySheet) -> Grid:
    return Grid(
        (
            Column("Weighed by mistake"),
            Column("Instead of", from_width=120),
            number("pH"),
            number("pH changes by", short="pH changes\nby"),
            number("Moles, %"),
        ),
        tuple(
            (
                library.find_material(w.weighed).name,
                library.find_material(w.meant).name,
                decimals(w.ph, 2),
                decimals(w.d_ph, 2, sign=True),
                decimals(100.0 * w.amount_share, 0),
            )
            for w in way.wrong_hydrates
        ),
    )


def _checks(way: WaySheet) -> tuple[str, ...]:
    sums, a = way.sums, way.allowance
    lower = _amount(a.acid_ml, a.acid_g, a.acid_grade.name)
    raise_ = _amount(a.base_ml, a.base_g, a.base_grade.name)
    masses = [
        significant(x, DIGITS) for x in (sums.weighed_g, sums.water_g, sums.batch_g)
    ]
    charge = f"{sums.positive_meq_l:.4f} positive, {sums.negative_meq_l:.4f} negative"
    shown = (
        f"osmolality {way.osmolality_mosm_kg:.0f} mosmol/kg, capacity "
        f"{significant(way.capacity_mmol_l_ph)} mmol/L per pH, ionic strength "
        f"{significant(way.ionic_strength_mol_kg)} mol/kg"
    )
    room = (
        f"adjustment allowance ({a.tolerance_ph:g} pH): {lower} to lower it, {raise_} to "
        "raise it"
    )
    return (
        f"charge: {charge} mmol/L",
        f"mass: {masses[0]} g weighed + {masses[1]} g water = {masses[2]} g",
        shown,
        room,
    )


def _amount(ml: float | None, grams: float, name: str) -> str:
    if ml is None:
        return f"{significant(grams)} g {name}"
    return f"{significant(ml)} mL {name}"
