"""Add in-house species and materials, given as plain mappings, to a library."""

from __future__ import annotations

import dataclasses
from collections.abc import Iterable, Mapping
from itertools import pairwise
from types import MappingProxyType
from typing import Any

from formbuf.errors import InputError, UnknownNameError
from formbuf.library.formulas import count_atoms, molar_mass_g_mol
from formbuf.library.library import Library
from formbuf.library.records import (
    Basis,
    IonizationStep,
    Material,
    Quantity,
    Source,
    Species,
)

_SPECIES_KEYS = {"id", "name", "pka", "source", "cas", "family"}
_STEP_KEYS = {"pka", "acid_charge", "dh_kj_mol", "dcp_j_mol_k", "uncertainty"}
_MATERIAL_KEYS = {
    "id",
    "name",
    "contents",
    "molar_mass_g_mol",
    "formula",
    "waters",
    "source",
    "cas",
}
_MASS_TOLERANCE_G_MOL = 0.01


def with_rows(
    library: Library,
    species: Iterable[Mapping[str, Any]] = (),
    materials: Iterable[Mapping[str, Any]] = (),
) -> Library:
    """Return the library with in-house rows on top, marked as overlay.

    Parameters
    ----------
    library : Library
        Left as it is.
    species : iterable of mapping
        Keys ``id``, ``name``, ``source`` (a reference in words), and ``pka``: a list
        of ``{pka, acid_charge, dh_kj_mol, dcp_j_mol_k, uncertainty}`` of which the
        last three may be left out. Values at 25 C and zero ionic strength.
    materials : iterable of mapping
        Keys ``id``, ``name``, ``contents`` (component to moles per mole),
        ``molar_mass_g_mol``; if wanted ``formula``, ``waters`` and ``source``.

    Returns
    -------
    Library
        A row replaces the row of ours with the same id.

    Raises
    ------
    InputError
        If a key is missing, unknown or not a number, if charges do not descend by
        one or pKa do not rise, or if a molar mass is not that of its formula.
    UnknownNameError
        If a material names an unknown component.
    """
    sources: dict[str, Source] = dict(library.sources)
    own_species = dict(library.species)
    for number, row in enumerate(species, start=1):
        entry = _species(row, f"species[{number}]", sources)
        own_species[entry.id] = entry
    components = {*own_species, *library.ions, *library.neutrals}
    own_materials = dict(library.materials)
    for number, row in enumerate(materials, start=1):
        material = _material(row, f"material[{number}]", components, sources)
        own_materials[material.id] = material
    return dataclasses.replace(
        library,
        species=MappingProxyType(own_species),
        materials=MappingProxyType(own_materials),
        sources=MappingProxyType(sources),
    )


def _species(row: Mapping[str, Any], where: str, sources: dict[str, Source]) -> Species:
    _check_keys(row, where, _SPECIES_KEYS, ("id", "pka"))
    name = str(row["id"])
    source = _own_source(name, row, sources)
    steps = []
    for number, step in enumerate(row["pka"], start=1):
        place = f"{where}.pka[{number}]"
        _check_keys(step, place, _STEP_KEYS, ("pka", "acid_charge"))
        charge = _number(step, "acid_charge", place)
        if charge != int(charge):
            message = (
                f"{place}.acid_charge: {charge} is not whole, allowed a whole number"
            )
            raise InputError(message)
        steps.append(
            IonizationStep(
                species=name,
                step=number,
                acid_charge=int(charge),
                pka=_quantity(step, "pka", "1", source, place, "uncertainty"),
                dh_kj_mol=_optional(step, "dh_kj_mol", "kJ/mol", source, place),
                dcp_j_mol_k=_optional(step, "dcp_j_mol_k", "J/(mol K)", source, place),
                overlay=True,
            )
        )
    if not steps:
        message = f"{where}.pka: empty, allowed at least one step"
        raise InputError(message)
    for above, below in pairwise(steps):
        if below.acid_charge != above.acid_charge - 1:
            message = (
                f"{where}.pka[{below.step}].acid_charge: {below.acid_charge} after "
                f"{above.acid_charge}, allowed {above.acid_charge - 1}"
            )
            raise InputError(message)
        if below.pka.value <= above.pka.value:
            message = (
                f"{where}.pka[{below.step}].pka: {below.pka.value:g} after "
                f"{above.pka.value:g}, allowed larger values at later steps"
            )
            raise InputError(message)
    return Species(
        id=name,
        name=str(row.get("name", name)),
        cas=str(row.get("cas", "")),
        family=str(row.get("family", "in-house")),
        is_candidate=True,
        steps=tuple(steps),
        overlay=True,
    )


def _material(
    row: Mapping[str, Any],
    where: str,
    components: set[str],
    sources: dict[str, Source],
) -> Material:
    _check_keys(row, where, _MATERIAL_KEYS, ("id", "contents", "molar_mass_g_mol"))
    name = str(row["id"])
    source = _own_source(name, row, sources)
    contents = {}
    for component in row["contents"]:
        place = f"{where}.contents"
        if component not in components:
            raise UnknownNameError("component", str(component), components, where=place)
        contents[str(component)] = _positive(row["contents"], component, place)
    if not contents:
        message = f"{where}.contents: empty, allowed at least one component"
        raise InputError(message)
    mass = _positive(row, "molar_mass_g_mol", where)
    formula = str(row.get("formula", ""))
    if formula:
        _check_formula(formula, mass, where)
    return Material(
        id=name,
        name=str(row.get("name", name)),
        formula=formula,
        contents=MappingProxyType(contents),
        waters=_number(row, "waters", where) if "waters" in row else 0.0,
        molar_mass_g_mol=Quantity(mass, "g/mol", source, "", _basis(source)),
        cas=str(row.get("cas", "")),
        overlay=True,
    )


def _check_formula(formula: str, mass: float, where: str) -> None:
    try:
        count_atoms(formula)
    except ValueError as error:
        message = f"{where}.formula: {error}, allowed a chemical formula"
        raise InputError(message) from error
    expected = molar_mass_g_mol(formula)
    if abs(mass - expected) > _MASS_TOLERANCE_G_MOL:
        message = (
            f"{where}.molar_mass_g_mol: {mass:g} is not the mass of {formula}, "
            f"allowed {expected:.3f}"
        )
        raise InputError(message)


def _own_source(name: str, row: Mapping[str, Any], sources: dict[str, Source]) -> str:
    text = str(row.get("source", ""))
    if not text:
        return ""
    key = f"brief_{name}"
    sources[key] = Source(key, "", "", text, "", overlay=True)
    return key


def _check_keys(
    row: Mapping[str, Any], where: str, known: set[str], required: tuple[str, ...]
) -> None:
    for key in row:
        if key not in known:
            raise UnknownNameError("key", str(key), known, where=where)
    for key in required:
        if key not in row:
            message = f"{where}.{key}: missing, allowed a value"
            raise InputError(message)


def _number(row: Mapping[str, Any], key: str, where: str) -> float:
    value = row[key]
    number = isinstance(value, int | float) and not isinstance(value, bool)
    if not number or not abs(value) < float("inf"):
        message = f"{where}.{key}: {value!r} is not a number, allowed a finite number"
        raise InputError(message)
    return float(value)


def _positive(row: Mapping[str, Any], key: str, where: str) -> float:
    value = _number(row, key, where)
    if value <= 0.0:
        message = f"{where}.{key}: {value:g} is not positive, allowed above 0"
        raise InputError(message)
    return value


def _quantity(
    row: Mapping[str, Any],
    key: str,
    unit: str,
    source: str,
    where: str,
    uncertainty: str = "",
) -> Quantity:
    spread = None
    if uncertainty and uncertainty in row:
        spread = _positive(row, uncertainty, where)
    value = _number(row, key, where)
    return Quantity(value, unit, source, "", _basis(source), spread)


def _optional(
    row: Mapping[str, Any], key: str, unit: str, source: str, where: str
) -> Quantity | None:
    return _quantity(row, key, unit, source, where) if key in row else None


def _basis(source: str) -> Basis:
    return "published" if source else "judgement"
