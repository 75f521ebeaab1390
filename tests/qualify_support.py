"""Overlays that change one cell of one table, and what a qualification says of them."""

from __future__ import annotations

import csv
import io
import tomllib
from collections.abc import Iterator
from dataclasses import dataclass
from pathlib import Path

from formbuf.bench.knowledge_audit import table_schemas
from formbuf.library.store import knowledge_root
from formbuf.library.tables import Column, read_cell

#: Cells whose change a calculation must see, not only the checksum of the table:
#: key of the row as its first cells, column, new text.
TELLING = {
    "ionization.csv": (("phosphate", "2"), "pka", "7.25"),
    "associations.csv": (("triborate",), "log10_k", "-5.5"),
    "osmotic.csv": (("pair", "sodium:1", "chloride:-1"), "coefficient_kg_mol", "0.2"),
    "water_properties.csv": (("osmotic_slope_chebyshev_00",), "value", "0.4"),
    "carbon_dioxide.csv": (("henry_solubility",), "value", "0.0004"),
    "freezing/solubility_constants.csv": (
        ("disodium_hydrogen_phosphate_dodecahydrate", "sodium"),
        "ln_k_a",
        "30.0",
    ),
    "freezing/phase_points.csv": (("nacl_eutectic",), "temperature_c", "-20.0"),
    "freezing/observations.csv": (("gomez_50_74",), "ph_frozen", "7.9"),
    "precedent.csv": (("histidine", "subcutaneous"), "level", "none"),
    "freezing/pitzer.csv": (("beta0", "sodium dihydrogen_phosphate"), "a0", "-0.08"),
    "checks/ph_standards.csv": (("standard_0001",), "value", "5.0"),
    "checks/tonicity.csv": (("tonicity_0002",), "value", "9.0"),
}


@dataclass(frozen=True)
class Change:
    """One cell of one table, before and after."""

    table: str
    row: str
    column: str
    before: str
    after: str

    def __str__(self) -> str:
        return (
            f"{self.table} {self.row} {self.column}: {self.before!r} to {self.after!r}"
        )


def tables() -> list[str]:
    """Every table of knowledge, settings included."""
    root = Path(str(knowledge_root()))
    found = [*root.rglob("*.csv"), *root.rglob("*.toml")]
    return sorted(path.relative_to(root).as_posix() for path in found)


def change_one_cell(name: str, folder: Path) -> Change:
    """Lay over a table a copy of one row with one cell changed."""
    source = Path(str(knowledge_root())) / name
    place = folder / name
    place.parent.mkdir(parents=True, exist_ok=True)
    if name.endswith(".toml"):
        return _change_setting(source, place, name)
    header, *rows = list(csv.reader(io.StringIO(source.read_text("utf-8"))))
    row, column, text = _chosen(name, header, rows)
    index = header.index(column)
    changed = [text if i == index else cell for i, cell in enumerate(row)]
    out = io.StringIO()
    csv.writer(out, lineterminator="\n").writerows([header, changed])
    place.write_text(out.getvalue(), "utf-8")
    return Change(name, row[0], column, row[index], text)


def _chosen(
    name: str, header: list[str], rows: list[list[str]]
) -> tuple[list[str], str, str]:
    if name in TELLING:
        key, column, text = TELLING[name]
        row = next(r for r in rows if tuple(r[: len(key)]) == key)
        return row, column, text
    schema = table_schemas()[name]
    for kinds in (("number", "integer"), ("text",), ("ids", "flag")):
        for column in schema.columns:
            if column.kind not in kinds or column.name in schema.key:
                continue
            index = header.index(column.name)
            for row in rows:
                for text in _others(row[index], column):
                    if row[index] and not read_cell(text, column)[1]:
                        return row, column.name, text
    raise AssertionError(f"{name}: no cell can be changed")


def _others(cell: str, column: Column) -> Iterator[str]:
    if column.kind in ("number", "integer") and cell:
        value = float(cell)
        for other in (value * 1.07, value * 0.93, value + 1.0, value - 1.0):
            text = f"{other:.6g}" if column.kind == "number" else str(round(other))
            if text != cell:
                yield text
    elif column.choices:
        yield from (c for c in column.choices if c != cell)
    elif column.kind == "flag":
        yield "no" if cell == "yes" else "yes"
    elif column.kind == "text":
        yield f"{cell} (changed)"


def _change_setting(source: Path, place: Path, name: str) -> Change:
    """Change the first number of a settings file, or one of its lists of cases."""
    settings = tomllib.loads(source.read_text("utf-8"))
    path, value = next(_numbers(settings, ()), ((), 0.0))
    if not path:
        (case,) = settings["ph"]["half_width"]
        text = f"{case['value'] * 2:g}"
        rest = "".join(f'{k} = "{v}"\n' for k, v in case.items() if k != "value")
        place.write_text(f"[[ph.half_width]]\nvalue = {text}\n{rest}", "utf-8")
        return Change(name, "ph.half_width", "value", str(case["value"]), text)
    text = f"{value * 1.07:.6g}"
    *tables_, key = path
    head = f"[{'.'.join(tables_)}]\n" if tables_ else ""
    place.write_text(f"{head}{key} = {text}\n", "utf-8")
    return Change(name, ".".join(path), "value", str(value), text)


def _numbers(
    settings: dict[str, object], path: tuple[str, ...]
) -> Iterator[tuple[tuple[str, ...], float]]:
    for key, value in settings.items():
        if isinstance(value, dict):
            yield from _numbers(value, (*path, key))
        elif isinstance(value, int | float) and not isinstance(value, bool):
            yield (*path, key), float(value)
