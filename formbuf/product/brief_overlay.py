"""Lay the in-house species, materials and systems of a brief over the library."""

from __future__ import annotations

import contextlib
import dataclasses
from collections.abc import Collection, Mapping
from types import MappingProxyType
from typing import TypeVar

from formbuf.errors import InputError
from formbuf.library import Library
from formbuf.library.records import (
    IonizationStep,
    Material,
    Neutral,
    Quantity,
    Solubility,
    Source,
    Species,
    System,
)
from formbuf.product.brief_model import Brief, OwnMaterial, OwnSpecies, OwnSystem

Row = TypeVar("Row")


def lay_over(brief: Brief, library: Library, pka_uncertainty: float) -> Library:
    """Return the library with the brief's own rows on top, marked as overlay.

    Parameters
    ----------
    brief : Brief
        Its references must have been checked (`check_against_library`).
    library : Library
    pka_uncertainty : float
        Standard uncertainty of an in-house pK where the brief states none.
    """
    named = [row.system for row in brief.candidate if row.system is not None]
    pairs = [name for name in (*named, *brief.require) if "+" in name]
    if not (brief.species or brief.material or brief.system or pairs):
        return library
    sources: dict[str, Source] = {}
    species = {
        row.id: _species(row, library.species.get(row.id), sources, pka_uncertainty)
        for row in brief.species
    }
    materials = {row.id: _material(row, sources) for row in brief.material}
    neutrals = {
        row.id: Neutral(
            row.id, row.name or row.id, "in_house", row.molar_mass_g_mol, overlay=True
        )
        for row in brief.material
        if row.id in row.contents
    }
    systems = {row.id: _system(row) for row in brief.system}
    wide = dataclasses.replace(
        library,
        species=_merged(library.species, species),
        materials=_merged(library.materials, materials),
        neutrals=_merged(library.neutrals, neutrals),
        systems=_merged(library.systems, systems),
        sources=_merged(library.sources, sources),
    )
    return with_pairs(wide, pairs)


def with_pairs(library: Library, names: Collection[str]) -> Library:
    """Return the library with the systems of pairs; one that is none is left out."""
    if not names:
        return library
    # read only where needed: a brief without pairs does without the chemistry
    from formbuf.product.pairs import pair_system

    found: dict[str, System] = {}
    for name in names:
        with contextlib.suppress(InputError):
            found[name] = dataclasses.replace(pair_system(library, name), id=name)
    return dataclasses.replace(library, systems=_merged(library.systems, found))


def _merged(below: Mapping[str, Row], above: Mapping[str, Row]) -> Mapping[str, Row]:
    return MappingProxyType({**below, **above})


def _own_source(text: str, sources: dict[str, Source]) -> str:
    """Return the id of a source of the brief, adding it where it is new."""
    for name, source in sources.items():
        if source.title == text:
            return name
    name = f"brief_{len(sources) + 1}"
    sources[name] = Source(name, "", "", text, "", overlay=True)
    return name


def _species(
    row: OwnSpecies,
    ours: Species | None,
    sources: dict[str, Source],
    pka_uncertainty: float,
) -> Species:
    source = _own_source(row.source, sources)

    def figure(
        value: float | None, unit: str, uncertainty: float | None = None
    ) -> Quantity | None:
        if value is None:
            return None
        return Quantity(value, unit, source, "", row.basis, uncertainty)

    steps = []
    ordered = sorted(row.step, key=lambda step: step.pka)
    for number, step in enumerate(ordered, start=1):
        spread = row.pka_uncertainty or pka_uncertainty
        pka = Quantity(step.pka, "1", source, "", row.basis, spread)
        steps.append(
            IonizationStep(
                species=row.id,
                step=number,
                acid_charge=step.acid_charge,
                pka=pka,
                dh_kj_mol=figure(step.dh_kj_mol, "kJ/mol"),
                dcp_j_mol_k=figure(step.dcp_j_mol_k, "J/(mol K)"),
                overlay=True,
            )
        )
    return Species(
        id=row.id,
        name=row.name or (ours.name if ours else row.id),
        cas=row.cas or (ours.cas if ours else ""),
        family=row.family or (ours.family if ours else ""),
        is_candidate=True,
        steps=tuple(steps),
        associations=ours.associations if ours else (),
        overlay=True,
    )


def _material(row: OwnMaterial, sources: dict[str, Source]) -> Material:
    source = _own_source(row.source, sources)
    solubilities: tuple[Solubility, ...] = ()
    if row.solubility_g_per_100g_water is not None:
        amount = Quantity(
            row.solubility_g_per_100g_water, "g/100 g", source, "", row.basis
        )
        solubilities = (
            Solubility(row.id, amount, row.solubility_temperature_c, overlay=True),
        )
    return Material(
        id=row.id,
        name=row.name or row.id,
        formula=row.formula or "",
        contents=MappingProxyType(dict(row.contents)),
        waters=row.waters,
        molar_mass_g_mol=Quantity(row.molar_mass_g_mol, "g/mol", source, "", row.basis),
        cas=row.cas or "",
        solubilities=solubilities,
        overlay=True,
    )


def _system(row: OwnSystem) -> System:
    return System(
        id=row.id,
        name=row.name or row.id,
        role="buffer",
        species=row.species,
        acid_material=row.acid_material,
        base_material=row.base_material,
        acid_titrant=row.acid_titrant,
        base_titrant=row.base_titrant,
        overlay=True,
    )
