"""Turn the rows of the tables into records, and check what ties them together.

Faults found here (a reference that leads nowhere, a ladder of charges with a gap,
pKa out of order) would make every later result wrong, so loading stops on them. The
slower checks of what the tables mean are in `formbuf.library.audit`.
"""

from __future__ import annotations

import re
from collections.abc import Iterable, Mapping
from itertools import pairwise
from types import MappingProxyType
from typing import cast

from formbuf.library.records import (
    SOURCELESS,
    Association,
    Basis,
    Crosscheck,
    Ion,
    IonizationStep,
    Material,
    Neutral,
    Quantity,
    Solubility,
    Source,
    Species,
    System,
)
from formbuf.library.store import TableFaults
from formbuf.library.tables import Column, Row, Schema

Tables = Mapping[str, tuple[Row, ...]]

_CROSSCHECK = re.compile(r"(\w+) (-?\d+(?:\.\d+)?) ([a-z][a-z0-9_]*)")
#: Amount column, source column and basis column of values that need a source.
_VALUES = {
    "ionization.csv": (
        ("pka", "pka_source", "pka_basis"),
        ("dh_kj_mol", "dh_source", "dh_basis"),
        ("dcp_j_mol_k", "dcp_source", "dcp_basis"),
    ),
    "materials.csv": (("molar_mass_g_mol", "molar_mass_source", "molar_mass_basis"),),
    "precedent.csv": (("level", "source", "level_basis"),),
}


def basis_of(row: Row, column: str = "basis") -> Basis:
    """Return the basis held by a column; the reader has checked the word."""
    return cast("Basis", row.text(column))


def quantity(row: Row, column: str, unit: str, uncertainty: str = "") -> Quantity:
    """Return the number of a table that has one source, locator and basis per row."""
    values = row.values
    return Quantity(
        value=row.figure(column),
        unit=unit,
        source=row.text("source"),
        locator=row.text("locator") if "locator" in values else "",
        basis=basis_of(row),
        uncertainty=row.number(uncertainty) if uncertainty else None,
        note=row.text("note") if "note" in values else "",
    )


def check_references(
    schema: Schema,
    rows: Iterable[Row],
    keys: Mapping[str, set[str]],
    faults: TableFaults,
) -> None:
    """Note every id that leads nowhere and every value without source or basis.

    Parameters
    ----------
    schema : Schema
    rows : iterable of Row
        Rows of that table.
    keys : mapping of str to set of str
        Ids of each table that may be referred to.
    faults : TableFaults
        Receives the faults.
    """
    referring = [column for column in schema.columns if column.refers_to]
    counting = [column for column in schema.columns if column.kind == "counts"]
    values = _VALUES.get(schema.name, _one_value(schema))
    for row in rows:
        for column in referring:
            if row.values[column.name] is not None:
                _check_ids(row, column, keys[column.refers_to], faults)
        for column in counting:
            for name in row.counts(column.name):
                if name not in keys["components"]:
                    faults.add(
                        row,
                        column.name,
                        f"unknown component {name!r}, allowed ids of species.csv, "
                        "ions.csv, neutrals.csv",
                    )
        for value, source, basis in values:
            _check_value(row, value, source, basis, faults)


def _one_value(schema: Schema) -> tuple[tuple[str, str, str], ...]:
    names = {column.name for column in schema.columns}
    return (("", "source", "basis"),) if {"source", "basis"} <= names else ()


def _check_ids(row: Row, column: Column, known: set[str], faults: TableFaults) -> None:
    pairs = row.counts(column.name)
    for name in pairs or row.ids(column.name):
        if name not in known:
            faults.add(
                row,
                column.name,
                f"unknown id {name!r}, allowed ids of {column.refers_to}",
            )


def _check_value(
    row: Row, value: str, source: str, basis: str, faults: TableFaults
) -> None:
    if value and row.values[value] is None:
        for column in (source, basis):
            if row.values[column] is not None:
                faults.add(row, column, f"given without {value}, allowed with it only")
        return
    word = row.text(basis)
    if not word:
        faults.add(row, basis, f"empty beside {value}, allowed a basis")
    elif row.values[source] is None and word not in SOURCELESS:
        faults.add(
            row,
            source,
            f"no source for a {word} value, allowed empty only for "
            f"{', '.join(SOURCELESS)}",
        )


def build_sources(rows: Iterable[Row]) -> Mapping[str, Source]:
    """Return the sources by id."""
    found = {
        row.text("id"): Source(
            id=row.text("id"),
            authors=row.text("authors"),
            year=row.text("year"),
            title=row.text("title"),
            container=row.text("container"),
            locator_note=row.text("locator_note"),
            doi=row.text("doi"),
            note=row.text("note"),
            overlay=row.overlay,
        )
        for row in rows
    }
    return MappingProxyType(found)


def build_ions(rows: Iterable[Row]) -> Mapping[str, Ion]:
    """Return the ions by id."""
    found = {
        row.text("id"): Ion(
            row.text("id"),
            row.text("name"),
            row.integer("charge"),
            row.figure("molar_mass_g_mol"),
            row.overlay,
        )
        for row in rows
    }
    return MappingProxyType(found)


def build_neutrals(rows: Iterable[Row]) -> Mapping[str, Neutral]:
    """Return the neutral components by id."""
    found = {
        row.text("id"): Neutral(
            row.text("id"),
            row.text("name"),
            row.text("kind"),
            row.figure("molar_mass_g_mol"),
            row.overlay,
        )
        for row in rows
    }
    return MappingProxyType(found)


def build_species(tables: Tables, faults: TableFaults) -> Mapping[str, Species]:
    """Return the species by id, each with its ladder in order of the steps."""
    ladders: dict[str, list[Row]] = {}
    for row in tables["ionization.csv"]:
        ladders.setdefault(row.text("species"), []).append(row)
    products: dict[str, list[Association]] = {}
    for row in tables["associations.csv"]:
        products.setdefault(row.text("species"), []).append(_association(row))
    sources = {row.text("id") for row in tables["sources.csv"]}
    found: dict[str, Species] = {}
    for row in tables["species.csv"]:
        name = row.text("id")
        ladder = sorted(ladders.get(name, []), key=lambda step: step.integer("step"))
        if not ladder:
            faults.add(
                row, "id", f"{name!r} has no step in ionization.csv, allowed one"
            )
            continue
        check_ladder(ladder, faults)
        found[name] = Species(
            id=name,
            name=row.text("name"),
            cas=row.text("cas"),
            family=row.text("family"),
            is_candidate=row.flag("candidate"),
            steps=tuple(_step(step, sources, faults) for step in ladder),
            associations=tuple(products.get(name, [])),
            overlay=row.overlay or any(step.overlay for step in ladder),
        )
    return MappingProxyType(found)


def check_ladder(ladder: list[Row], faults: TableFaults) -> None:
    """Note a step that is missing, a charge that does not descend, pKa out of order."""
    for above, below in pairwise(ladder):
        row = below if below.overlay or not above.overlay else above
        step = above.integer("step") + 1
        if below.integer("step") != step:
            faults.add(
                row, "step", f"{below.integer('step')} after {step - 1}, allowed {step}"
            )
        charge = above.integer("acid_charge") - 1
        if below.integer("acid_charge") != charge:
            faults.add(
                row,
                "acid_charge",
                f"{below.integer('acid_charge')} after {charge + 1}, allowed {charge}",
            )
        if below.figure("pka") <= above.figure("pka"):
            faults.add(
                row,
                "pka",
                f"{below.figure('pka'):g} at step {below.integer('step')} after "
                f"{above.figure('pka'):g}, allowed larger values at later steps",
            )


def _step(row: Row, sources: set[str], faults: TableFaults) -> IonizationStep:
    return IonizationStep(
        species=row.text("species"),
        step=row.integer("step"),
        acid_charge=row.integer("acid_charge"),
        pka=_required(_ionization_value(row, "pka", "pka", "pka_uncertainty", "1")),
        dh_kj_mol=_ionization_value(
            row, "dh_kj_mol", "dh", "dh_uncertainty_kj_mol", "kJ/mol"
        ),
        dcp_j_mol_k=_ionization_value(
            row, "dcp_j_mol_k", "dcp", "dcp_uncertainty_j_mol_k", "J/(mol K)"
        ),
        note=row.text("note"),
        confirmed_by=_crosschecks(row, "confirmed_by", sources, faults),
        conflict=_crosschecks(row, "conflict", sources, faults),
        overlay=row.overlay,
    )


def _required(value: Quantity | None) -> Quantity:
    if value is None:
        msg = "a required value is missing"
        raise TypeError(msg)
    return value


def _ionization_value(
    row: Row, column: str, stem: str, uncertainty: str, unit: str
) -> Quantity | None:
    value = row.number(column)
    if value is None:
        return None
    return Quantity(
        value=value,
        unit=unit,
        source=row.text(f"{stem}_source"),
        locator=row.text(f"{stem}_locator"),
        basis=basis_of(row, f"{stem}_basis"),
        uncertainty=row.number(uncertainty),
    )


def _crosschecks(
    row: Row, column: str, known: set[str], faults: TableFaults
) -> tuple[Crosscheck, ...]:
    text = row.text(column)
    if not text:
        return ()
    found = []
    for part in text.split("; "):
        match = _CROSSCHECK.fullmatch(part)
        if match is None:
            faults.add(
                row,
                column,
                f"{part!r} is not a second value, allowed 'column value source'",
            )
            continue
        if match[3] not in known:
            faults.add(
                row, column, f"unknown source {match[3]!r}, allowed ids of sources.csv"
            )
        found.append(Crosscheck(match[1], float(match[2]), match[3]))
    return tuple(found)


def _association(row: Row) -> Association:
    return Association(
        product=row.text("product"),
        species=row.text("species"),
        units=row.integer("units"),
        charge=row.integer("charge"),
        protons_released=row.integer("protons_released"),
        log10_k=quantity(row, "log10_k", "1"),
        note=row.text("note"),
        overlay=row.overlay,
    )


def build_materials(tables: Tables) -> Mapping[str, Material]:
    """Return the materials by id, each with its solubilities by temperature."""
    solubilities: dict[str, list[Solubility]] = {}
    for row in tables["solubilities.csv"]:
        solubilities.setdefault(row.text("material"), []).append(_solubility(row))
    found = {}
    for row in tables["materials.csv"]:
        name = row.text("id")
        found[name] = Material(
            id=name,
            name=row.text("name"),
            formula=row.text("formula"),
            contents=MappingProxyType(dict(row.counts("contents"))),
            waters=row.figure("waters"),
            molar_mass_g_mol=Quantity(
                value=row.figure("molar_mass_g_mol"),
                unit="g/mol",
                source=row.text("molar_mass_source"),
                locator="",
                basis=basis_of(row, "molar_mass_basis"),
            ),
            cas=row.text("cas"),
            solubilities=tuple(solubilities.get(name, [])),
            modelled=row.values["modelled"] is not False,
            note=row.text("note"),
            overlay=row.overlay,
        )
    return MappingProxyType(found)


def _solubility(row: Row) -> Solubility:
    amount = row.number("g_per_100g_water")
    return Solubility(
        material=row.text("material"),
        g_per_100g_water=(
            None
            if amount is None
            else quantity(
                row,
                "g_per_100g_water",
                "g/100 g water",
                "uncertainty_g_per_100g_water",
            )
        ),
        temperature_c=row.number("temperature_c"),
        words=row.text("words"),
        note=row.text("note"),
        overlay=row.overlay,
    )


def build_systems(rows: Iterable[Row]) -> Mapping[str, System]:
    """Return the systems by id."""
    found = {
        row.text("id"): System(
            id=row.text("id"),
            name=row.text("name"),
            role=row.text("role"),
            species=row.ids("species"),
            acid_material=row.text("acid_material") or None,
            base_material=row.text("base_material") or None,
            acid_titrant=row.text("acid_titrant"),
            base_titrant=row.text("base_titrant"),
            note=row.text("note"),
            overlay=row.overlay,
        )
        for row in rows
    }
    return MappingProxyType(found)
