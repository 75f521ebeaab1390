"""Compare the names in a brief with the library: species, systems, materials, ions.

Beyond names, this refuses what cannot be meant: a strong acid with its strong base
as a buffer, the calcium salt of edetate, an acid or a base as tonicity agent.
"""

from __future__ import annotations

import dataclasses
from collections.abc import Collection, Iterator, Mapping

from formbuf.errors import InputError, UnknownNameError
from formbuf.library import Library
from formbuf.library.records import Material
from formbuf.product.brief_messages import Fault, raise_faults, suggest
from formbuf.product.brief_model import Brief
from formbuf.product.brief_origin import Location
from formbuf.product.brief_overlay import lay_over
from formbuf.product.entry_checks import entry_faults
from formbuf.product.vocabulary import (
    ANCHORED_CRITERIA,
    CRITERIA,
    STRONG_ELECTROLYTES,
    STRONG_IS_NO_BUFFER,
)

_SHOWN_LIMIT = 12


def check_against_library(brief: Brief, library: Library) -> None:
    """Check every name of a brief against the library.

    Parameters
    ----------
    brief : Brief
    library : Library
        Without the brief's own rows; they are taken into account here.

    Raises
    ------
    InputError
        All names that are not known, each with the nearest that is, and all
        materials that cannot be used where they stand.
    """
    raise_faults(brief.origin, _own_row_faults(brief, library))
    wide = lay_over(brief, library, pka_uncertainty=0.05)
    faults = [
        *_list_faults(brief, wide),
        *_material_faults(brief, wide),
        *_candidate_faults(brief, wide),
        *_other_faults(brief, wide),
        *entry_faults(brief, wide),
    ]
    raise_faults(brief.origin, faults)


def is_strong_only(material: Material, library: Library) -> bool:
    """Whether a material brings no acid-base species, only strong ions."""
    contents = material.contents
    has_ion = any(name in library.ions for name in contents)
    return has_ion and not any(name in library.species for name in contents)


def net_strong_charge(material: Material, library: Library) -> float:
    """Return the charge of a material's strong ions, mol per mol."""
    return sum(
        count * library.ions[name].charge
        for name, count in material.contents.items()
        if name in library.ions
    )


def _unknown(location: Location, kind: str, name: str, known: Collection[str]) -> Fault:
    names = sorted(known)
    article = "an" if kind[0] in "aeiou" else "a"
    short = len(names) <= _SHOWN_LIMIT
    allowed = ", ".join(names) if short else f"{article} {kind}"
    hint = suggest(name, names)
    if not hint and not short:
        hint = f"See `formbuf knowledge show {_TABLES[kind]}`."
    return Fault(location, f"unknown {kind}", allowed, name, hint)


def _unknown_system(location: Location, name: str, library: Library) -> Fault:
    """Return the fault for a system; a species given instead gets its systems."""
    if "+" in name:
        return _no_pair(location, name, library)
    fault = _unknown(location, "system", name, library.systems)
    made_of = [row.id for row in library.systems.values() if name in row.species]
    if not made_of:
        return fault
    hint = f"{name!r} is a species; its systems are {', '.join(made_of)}."
    return dataclasses.replace(fault, hint=hint)


def _no_pair(location: Location, name: str, library: Library) -> Fault:
    """Return the fault for two names with a plus that make no system."""
    from formbuf.product.pairs import pair_system

    try:
        pair_system(library, name, where="")
    except InputError as error:
        what, _, allowed = error.message.removeprefix(": ").partition(", allowed ")
        return Fault(location, what, allowed or "two species", name, error.hint)
    return Fault(location, "makes no system", "two species", name)


_TABLES = {
    "species": "species",
    "system": "systems",
    "species or system": "systems",
    "species, system, ion or material": "systems",
    "ion or species": "species",
    "material": "materials",
    "component": "species",
}


def _own_row_faults(brief: Brief, library: Library) -> Iterator[Fault]:
    """Yield references of in-house rows that lead nowhere."""
    species = {*library.species, *(row.id for row in brief.species)}
    materials = {*library.materials, *(row.id for row in brief.material)}
    components = {*species, *library.ions, *library.neutrals}
    for index, row in enumerate(brief.material):
        for name in row.contents:
            if name not in components and name != row.id:
                at: Location = ("material", index, "contents", name)
                yield _unknown(at, "component", name, {*components, row.id})
    for index, system in enumerate(brief.system):
        for entry, name in enumerate(system.species):
            if name not in species:
                at = ("system", index, "species", entry)
                yield _unknown(at, "species", name, species)
        for key in ("acid_material", "base_material", "acid_titrant", "base_titrant"):
            name = getattr(system, key)
            if name is not None and name not in materials:
                yield _unknown(("system", index, key), "material", name, materials)


def _list_faults(brief: Brief, library: Library) -> Iterator[Fault]:
    """Yield unknown entries of ``exclude`` and ``require``."""
    required = {*library.species, *library.systems}
    excluded = {*required, *library.ions, *library.neutrals, *library.materials}
    for index, name in enumerate(brief.exclude):
        if name not in excluded:
            kind = "species, system, ion or material"
            yield _unknown(("exclude", index), kind, name, excluded)
    for index, name in enumerate(brief.require):
        if name in STRONG_ELECTROLYTES:
            what = STRONG_IS_NO_BUFFER
            yield Fault(("require", index), what, "a species or system", name)
        elif name not in required and "+" in name:
            yield _no_pair(("require", index), name, library)
        elif name not in required:
            yield _unknown(("require", index), "species or system", name, required)


def _material_faults(brief: Brief, library: Library) -> Iterator[Fault]:
    """Yield unknown or unusable excipients and tonicity agent."""
    for index, row in enumerate(brief.excipient):
        found = _find(row.material, ("excipient", index, "material"), library)
        if isinstance(found, Fault):
            yield found
    if brief.tonicity.agent is None:
        return
    at: Location = ("tonicity", "agent")
    agent = _find(brief.tonicity.agent, at, library)
    if isinstance(agent, Fault):
        yield agent
    elif is_strong_only(agent, library) and net_strong_charge(agent, library):
        what = "is an acid or a base: filling with it would move the pH"
        yield Fault(at, what, "a salt, sugar or polyol", brief.tonicity.agent)


def _find(text: str, location: Location, library: Library) -> Material | Fault:
    """Return the material meant, or what is wrong with the name or the material."""
    try:
        material = library.find_material(text)
    except UnknownNameError:
        hint = suggest(text, sorted(library.materials)) or (
            "See `formbuf knowledge show materials`, or describe it as [[material]]."
        )
        return Fault(location, "unknown material", "id, formula or name", text, hint)
    except InputError as error:
        _, _, allowed = error.message.partition(", allowed ")
        return Fault(location, "fits several materials", allowed, text, error.hint)
    if {"edta", "calcium"} <= set(material.contents) or not material.modelled:
        what = "is a metal complex, which is not modelled"
        hint = "Enter disodium_edetate_dihydrate if free edetate is meant."
        return Fault(location, what, "edetate without calcium", text, hint)
    return material


def _candidate_faults(brief: Brief, library: Library) -> Iterator[Fault]:
    """Yield own formulas that name something unknown or hold no pH."""
    for index, row in enumerate(brief.candidate):
        if row.system is not None and row.system not in library.systems:
            at: Location = ("candidate", index, "system")
            yield _unknown_system(at, row.system, library)
        found: list[Material] = []
        for name in row.materials:
            material = _find(name, ("candidate", index, "materials", name), library)
            if isinstance(material, Fault):
                yield material
            else:
                found.append(material)
        complete = found and len(found) == len(row.materials)
        if complete and all(is_strong_only(material, library) for material in found):
            names = " with ".join(material.id for material in found)
            yield Fault(
                ("candidate", index, "materials"),
                f"{names} {STRONG_IS_NO_BUFFER}",
                "at least one material that holds a proton",
            )


def _other_faults(brief: Brief, library: Library) -> Iterator[Fault]:
    """Yield unknown counter-ion, criteria and systems of overrides."""
    ion = brief.drug.counter_ion
    known = {*library.ions, *library.species}
    if ion is not None and ion not in known:
        yield _unknown(("drug", "counter_ion"), "ion or species", ion, known)
    for key, criteria in (("weights", CRITERIA), ("anchors", ANCHORED_CRITERIA)):
        table: Mapping[str, object] = getattr(brief.ranking, key)
        for name in table:
            if name in CRITERIA and name not in criteria:
                at: Location = ("ranking", key, name)
                yield Fault(at, "has no ends to move", ", ".join(criteria))
            elif name not in criteria:
                yield _unknown(("ranking", key, name), "criterion", name, criteria)
    yield from _anchor_faults(brief, library)
    weights = brief.ranking.weights
    if set(CRITERIA) <= set(weights) and not any(weights.values()):
        what = "are all zero"
        yield Fault(("ranking", "weights"), what, "at least one above zero")
    for index, row in enumerate(brief.override):
        if row.system is not None and row.system not in library.systems:
            at = ("override", index, "system")
            yield _unknown_system(at, row.system, library)


def _anchor_faults(brief: Brief, library: Library) -> Iterator[Fault]:
    """Yield ends at or below zero of criteria on a logarithmic scale."""
    ours = library.criteria["anchors"]
    for name, anchor in brief.ranking.anchors.items():
        if ours.get(name, {}).get("scale") != "log":
            continue
        for key in ("full", "floor"):
            end = getattr(anchor, key)
            if end is not None and end <= 0:
                at: Location = ("ranking", "anchors", name, key)
                yield Fault(at, "is on a logarithmic scale", "above 0", end)
