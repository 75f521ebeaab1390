"""Audit of the whole knowledge: what loading is too short for.

Loading checks each table, the references between them and the ladders of
ionization. This goes through everything else: formulas against contents and masses,
limits in order, systems against their materials, every table read on demand, sources
that nothing uses. The comparison of ``water_properties.csv`` with the constants of
`formbuf.chemistry.water` belongs to the command, since the library knows no chemistry.
"""

from __future__ import annotations

import csv
import io
import re
from collections.abc import Callable, Iterable

from formbuf.errors import InputError, KnowledgeError
from formbuf.library import schemas
from formbuf.library.audit_materials import (
    MASS_TOLERANCE_G_MOL,
    MaterialCheck,
)
from formbuf.library.check_schemas import CHECKS
from formbuf.library.formulas import count_atoms, molar_mass_g_mol
from formbuf.library.library import Library
from formbuf.library.store import TableFaults
from formbuf.library.tables import Row, Schema

_WORD = re.compile(r"[a-z][a-z0-9_]+")


def audit(library: Library) -> list[str]:
    """Return every fault of the knowledge as ``file:line:column: what, allowed``.

    Parameters
    ----------
    library : Library
        As loaded; an overlay is audited with it.
    """
    faults = TableFaults()
    for schema in (*schemas.LAZY, *CHECKS.values()):
        faults.ours.lines += _table_faults(library, schema)
    check_materials(library, library.read_table(schemas.MATERIALS), faults)
    checks: tuple[tuple[Schema, Callable[[Library, Row, TableFaults], None]], ...] = (
        (schemas.IONS, _check_component),
        (schemas.NEUTRALS, _check_component),
        (schemas.SPECIES, _check_species),
        (schemas.ASSOCIATIONS, _check_association),
        (schemas.SYSTEMS, _check_system),
    )
    for schema, check in checks:
        for row in library.read_table(schema):
            check(library, row, faults)
    check_limits(library, faults)
    _check_glass(library.read_table(schemas.GLASS_ALKALI), faults)
    return [
        *faults.ours.lines,
        *faults.overlay.lines,
        *unknown_sources(library),
        *unused_sources(library),
    ]


def check_limits(library: Library, faults: TableFaults) -> None:
    """Check that the limits of precedent and routes rise."""
    for row in library.read_table(schemas.PRECEDENT):
        _check_precedent(row, faults)
    for row in library.read_table(schemas.ROUTES):
        _check_route(row, faults)


def check_materials(library: Library, rows: Iterable[Row], faults: TableFaults) -> None:
    """Check rows of ``materials.csv`` against the components of a library."""
    MaterialCheck(
        library.species,
        library.ions,
        library.neutrals,
        _formulas(library, schemas.IONS, faults),
        _formulas(library, schemas.NEUTRALS, faults),
    ).check(rows, faults)


def unknown_sources(library: Library) -> list[str]:
    """Return a fault for each source that a table of another layer cites in vain.

    Those tables are read in full by the layers that own them; this looks at their
    columns of sources only.
    """
    own = {s.name for s in (*schemas.EAGER, *schemas.LAZY, *CHECKS.values())}
    faults: list[str] = []
    for name, data in library.store.files():
        if not name.endswith(".csv") or name in own:
            continue
        reader = csv.reader(io.StringIO(data.decode("utf-8-sig"), newline=""))
        header = next(reader, [])
        columns = [
            (index, column)
            for index, column in enumerate(header)
            if column in ("source", "sources") or column.endswith("_source")
        ]
        for row in reader:
            for index, column in columns:
                cited = row[index].split() if index < len(row) else []
                faults += [
                    f"{name}:{reader.line_num}:{column}: unknown id {source!r}, "
                    "allowed ids of sources.csv"
                    for source in cited
                    if source not in library.sources
                ]
    return faults


def unused_sources(library: Library) -> list[str]:
    """Return a fault for each source of ours that nothing refers to.

    A source through which another was read, named in the notes of that other, counts.
    """
    used: set[str] = set()
    for name, data in library.store.files():
        if name.endswith(".csv"):
            used |= _cited(data)
        elif name.endswith(".toml"):
            used.update(_WORD.findall(data.decode("utf-8-sig")))
    return [
        f"{row.where('id')}: source {row.text('id')!r} is used nowhere, "
        "allowed sources that a row refers to"
        for row in library.read_table(schemas.SOURCES)
        if not row.overlay and row.text("id") not in used
    ]


def _cited(data: bytes) -> set[str]:
    """Return every id in a column of sources, and in the second values."""
    rows = csv.reader(io.StringIO(data.decode("utf-8-sig"), newline=""))
    header = next(rows, [])
    citing = [
        index
        for index, name in enumerate(header)
        if name in ("source", "sources", "confirmed_by", "conflict")
        or name.endswith(("_source", "note"))
    ]
    found: set[str] = set()
    for row in rows:
        for index in citing:
            found.update(_WORD.findall(row[index] if index < len(row) else ""))
    return found


def _table_faults(library: Library, schema: Schema) -> list[str]:
    try:
        library.read_table(schema)
    except KnowledgeError as error:
        return list(error.faults)
    except InputError as error:
        return error.message.splitlines()
    return []


def _formulas(library: Library, schema: Schema, faults: TableFaults) -> dict[str, str]:
    """Return the formulas of a table by id; what is none becomes a fault."""
    found = {}
    for row in library.read_table(schema):
        try:
            count_atoms(row.text("formula"))
        except ValueError as error:
            faults.add(row, "formula", f"{error}, allowed a chemical formula")
            continue
        found[row.text("id")] = row.text("formula")
    return found


def _check_component(library: Library, row: Row, faults: TableFaults) -> None:
    try:
        expected = molar_mass_g_mol(row.text("formula"))
    except ValueError as error:
        faults.add(row, "formula", f"{error}, allowed a chemical formula")
        return
    if abs(row.figure("molar_mass_g_mol") - expected) > MASS_TOLERANCE_G_MOL:
        faults.add(
            row,
            "molar_mass_g_mol",
            f"{row.figure('molar_mass_g_mol'):g} is not the mass of "
            f"{row.text('formula')}, allowed {expected:.3f}",
        )


def _check_species(library: Library, row: Row, faults: TableFaults) -> None:
    name = row.text("id")
    if not any(name in material.contents for material in library.materials.values()):
        faults.add(row, "id", f"{name!r} is in no material, allowed in at least one")


def _check_association(library: Library, row: Row, faults: TableFaults) -> None:
    charge = row.integer("charge")
    if charge != -row.integer("protons_released"):
        faults.add(
            row,
            "charge",
            f"{charge} with {row.integer('protons_released')} protons released from "
            "neutral units, allowed their negative",
        )


def _check_system(library: Library, row: Row, faults: TableFaults) -> None:
    species = set(row.ids("species"))
    if bool(species) == (row.text("role") == "none"):
        faults.add(row, "species", "allowed species for every role but 'none'")
    for column in ("acid_material", "base_material"):
        name = row.text(column)
        if not name:
            continue
        held = {c for c in library.materials[name].contents if c in library.species}
        if not held or not held <= species:
            faults.add(
                row,
                column,
                f"{name!r} holds {', '.join(sorted(held)) or 'no species'}, allowed "
                f"{', '.join(sorted(species))}",
            )


def _check_precedent(row: Row, faults: TableFaults) -> None:
    columns = ("usual_low_mmol_l", "usual_high_mmol_l", "ceiling_mmol_l")
    values = [row.number(column) for column in columns]
    known = [value for value in values if value is not None]
    if known != sorted(known):
        faults.add(
            row, columns[0], f"{known} is not rising, allowed low, high, ceiling"
        )
    if known and not row.text("concentration_basis"):
        faults.add(row, "concentration_basis", "empty beside a figure, allowed a basis")


def _check_route(row: Row, faults: TableFaults) -> None:
    pairs = (
        ("ph_low", "ph_high"),
        ("osmolality_low_mosm_kg", "osmolality_high_mosm_kg"),
    )
    for low, high in pairs:
        bottom, top = row.number(low), row.number(high)
        if bottom is not None and top is not None and bottom >= top:
            faults.add(row, low, f"{bottom:g} to {top:g}, allowed rising limits")


def _check_glass(rows: tuple[Row, ...], faults: TableFaults) -> None:
    ordered = sorted(rows, key=lambda row: row.figure("fill_volume_above_ml"))
    for index, row in enumerate(ordered):
        end = row.number("fill_volume_to_ml")
        last = index + 1 == len(ordered)
        following = None if last else ordered[index + 1].figure("fill_volume_above_ml")
        if end != following:
            faults.add(
                row,
                "fill_volume_to_ml",
                f"{end} but the next range begins at {following}, allowed no gap",
            )
