"""Published buffer tables run backwards: the batch sheet for the listed pH.

Each amount of the sheet must meet the listed one within the error that the tolerance
of the pH (0.11 for a table of the modern scale) implies at that place. That the listed
amounts give the listed pH is the matter of ``tests/reference``.
"""

from __future__ import annotations

from dataclasses import dataclass, replace

import pytest
from bench_support import library
from reference_tables import (
    SOERENSEN_OFFSET,
    Check,
    Residual,
    composition,
    select,
    show,
    sources,
    temperature_c,
)

from formbuf.bench.batch_sheet import batch_sheet
from formbuf.bench.grades import InHand
from formbuf.bench.setup import Bench, bench_from_options
from formbuf.errors import ConvergenceError, InputError
from formbuf.library.records import System

TOLERANCE_PH = 0.11
#: Relative rounding of the volumes in the tables (a tenth of a millilitre).
ROUNDING_MMOL_L = 0.06


@dataclass(frozen=True)
class Table:
    """How a published table is made: its system and what stands beside it."""

    file: str
    where: dict[str, str]
    species: tuple[str, ...]
    acid: str | None
    base: str | None
    varied: tuple[str, ...]
    fixed: tuple[str, ...] = ()


TABLES = {
    "USP hydrochloric acid": Table(
        "pharmacopoeia_buffers.csv",
        {"body": "USP", "buffer": "Hydrochloric Acid Buffer"},
        (),
        None,
        None,
        ("hydrochloric_acid",),
        ("potassium_chloride",),
    ),
    "USP acid phthalate": Table(
        "pharmacopoeia_buffers.csv",
        {"body": "USP", "buffer": "Acid Phthalate Buffer"},
        ("phthalate",),
        "potassium_hydrogen_phthalate",
        None,
        ("hydrochloric_acid",),
    ),
    "USP neutralized phthalate": Table(
        "pharmacopoeia_buffers.csv",
        {"body": "USP", "buffer": "Neutralized Phthalate Buffer"},
        ("phthalate",),
        "potassium_hydrogen_phthalate",
        None,
        ("sodium_hydroxide",),
    ),
    "USP phosphate": Table(
        "pharmacopoeia_buffers.csv",
        {"body": "USP", "buffer": "Phosphate Buffer"},
        ("phosphate",),
        "potassium_dihydrogen_phosphate",
        None,
        ("sodium_hydroxide",),
    ),
    "USP acetate": Table(
        "pharmacopoeia_buffers.csv",
        {"body": "USP", "buffer": "Acetate Buffer"},
        ("acetate",),
        "acetic_acid_glacial",
        "sodium_acetate_trihydrate",
        ("acetic_acid_glacial", "sodium_acetate_trihydrate"),
    ),
    "Walpole acetate": Table(
        "handbook_buffers.csv",
        {"table": "Walpole/Pearse 0.1 N"},
        ("acetate",),
        "acetic_acid_glacial",
        "sodium_acetate_trihydrate",
        ("acetic_acid_glacial", "sodium_acetate_trihydrate"),
    ),
    "Gomori acetate": Table(
        "handbook_buffers.csv",
        {"table": "Gomori 0.2 M stocks"},
        ("acetate",),
        "acetic_acid_glacial",
        "sodium_acetate_trihydrate",
        ("acetic_acid_glacial", "sodium_acetate_trihydrate"),
    ),
    "Gomori phosphate": Table(
        "handbook_buffers.csv",
        {"table": "Gomori/Soerensen Na-Na"},
        ("phosphate",),
        "",
        "",
        ("", ""),
    ),
    "Temple maleate": Table(
        "handbook_buffers.csv",
        {"table": "Temple (Gomori)"},
        ("maleate",),
        "monosodium_maleate_anhydrous",
        None,
        ("sodium_hydroxide",),
    ),
    "Clark & Lubs phthalate": Table(
        "handbook_buffers.csv",
        {"table": "Clark & Lubs"},
        ("phthalate",),
        "potassium_hydrogen_phthalate",
        None,
        ("hydrochloric_acid",),
    ),
}


def _bench(table: Table, row: Check, ph: float) -> Bench:
    """The bench whose sheet is the row's recipe, at its total strength."""
    listed = composition(row)
    records = {key: library().find_material(key) for key in listed}
    if table.species and not table.acid and not table.base:
        forms = sorted(listed, key=lambda key: records[key].contents["sodium"])
        table = replace(table, acid=forms[0], base=forms[-1])
    total = sum(
        listed[key] * record.contents.get(name, 0.0)
        for name in table.species
        for key, record in records.items()
    )
    system = System(
        "table",
        "table",
        "buffer" if table.species else "none",
        table.species,
        table.acid,
        table.base,
        "hydrochloric_acid",
        "sodium_hydroxide",
    )
    return bench_from_options(
        library(),
        system,
        concentration_mmol_l=total or 1.0,
        ph=ph,
        measure_temperature_c=temperature_c(row),
        materials_mmol_l={key: listed[key] for key in table.fixed},
    )


def _amounts(table: Table, row: Check, ph: float) -> dict[str, float] | None:
    """Amounts of the sheet [mmol/L]; None where the materials cannot reach the pH."""
    try:
        sheet = batch_sheet(_bench(table, row, ph), volume_l=1.0)
    except (InputError, ConvergenceError):
        return None
    return {line.material: line.mmol_l for line in sheet.ways[0].lines}


def _rows(table: Table) -> list[Check]:
    return [
        r for r in select(table.file, use="test", **table.where) if r["composition"]
    ]


@pytest.mark.parametrize("name", TABLES)
def test_the_sheet_for_a_listed_ph_gives_the_listed_amounts(name: str) -> None:
    table = TABLES[name]
    residuals, outside = [], []
    for row in _rows(table):
        listed = composition(row)
        offset = SOERENSEN_OFFSET if row["scale"] == "soerensen" else 0.0
        ph = float(row["target_ph"]) + offset
        found = _amounts(table, row, ph)
        ends = [_amounts(table, row, ph + d) for d in (-TOLERANCE_PH, TOLERANCE_PH)]
        varied = [key for key in listed if key not in table.fixed]
        varied = [key for key in varied if key in table.varied or not table.varied[0]]
        assert varied
        for key in varied:
            low, high = sorted(
                (listed[key] if end is None else end.get(key, 0.0)) for end in ends
            )
            if found is not None:
                residuals.append(
                    Residual(
                        f"{name} pH {row['target_ph']} {key}",
                        listed[key],
                        found.get(key, 0.0),
                        sources(row),
                        row["status"],
                    )
                )
            if not low - ROUNDING_MMOL_L <= listed[key] <= high + ROUNDING_MMOL_L:
                outside.append((row["id"], key, listed[key], low, high))
    show(f"amounts of the sheet, mmol/L: {name}", residuals, 2)

    assert residuals
    assert not outside


def test_volumes_as_the_table_prints_them() -> None:
    """USP phosphate buffer: 50 mL of 0.2 M KH2PO4 with x mL of 0.2 M NaOH to 200 mL."""
    table = TABLES["USP phosphate"]
    residuals = []
    for row in _rows(table):
        bench = _bench(table, row, float(row["target_ph"]))
        hand = InHand(strength_mol_l={"sodium_hydroxide": 0.2})
        sheet = batch_sheet(bench, volume_l=0.2, in_hand=hand)
        line = next(x for x in sheet.ways[0].lines if x.role == "titrant")
        assert line.measure_ml is not None
        residuals.append(
            Residual(
                f"pH {row['target_ph']}",
                float(row["component_ml"]),
                line.measure_ml,
                sources(row),
                row["status"],
            )
        )
    show("millilitres of 0.2 mol/L sodium hydroxide", residuals, 1)

    assert len(residuals) == 12
    assert max(abs(r.miss) for r in residuals) < 1.5
