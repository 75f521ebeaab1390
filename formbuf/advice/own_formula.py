"""A user's own formula, judged as it is: never resized."""

from __future__ import annotations

from collections.abc import Mapping
from dataclasses import replace

import numpy as np

from formbuf.advice import precedent
from formbuf.advice.candidates import (
    judge_at,
    judge_product,
    set_aside,
    shares_at,
    unreachable,
)
from formbuf.advice.case import Case
from formbuf.advice.evaluate import Product, evaluate
from formbuf.advice.results import Candidate, Screen, Weighed
from formbuf.advice.screens import precedent_screens
from formbuf.advice.sizing import Sizing, carried_by, size, windows_of
from formbuf.chemistry.capacity import component_capacity_mol_kg_ph
from formbuf.errors import InputError
from formbuf.library import Library
from formbuf.library.records import System
from formbuf.product.composition import Mixture, mixture
from formbuf.product.product_parts import CandidateInfo
from formbuf.product.recipe import weighed

#: Screens that concern whatever a formula holds, not only what buffers.
AVOIDED = ("precedent_avoid",)
#: Strong acid and base belong to a buffer whose pH they set; other salts do not.
TITRANTS = ("hydrochloric_acid", "sodium_hydroxide", "potassium_hydroxide")


def judge_own(case: Case, own: CandidateInfo) -> Candidate:
    """Judge one formula of the brief.

    Parameters
    ----------
    case : Case
    own : CandidateInfo
        A system at a concentration, or materials.

    Returns
    -------
    Candidate
        Screened out where the system cannot be brought to the target pH.

    Raises
    ------
    InputError
        When none of the materials holds a proton.
    """
    if own.system is None or own.concentration_mmol_l is None:
        return _judge_materials(case, own)
    system = case.library.systems[own.system]
    try:
        sizing = size(
            case.library,
            system,
            case.brief,
            case.loads,
            case.surroundings,
            case.law,
            case.settings,
        )
        shares = shares_at(case, system)
    except InputError as error:
        return replace(
            unreachable(system, str(error)),
            key=f"own:{own.name}",
            name=own.name,
            is_own_formula=True,
            concentration_mmol_l=own.concentration_mmol_l,
        )
    found = precedent.standings(case.library, case.brief, system, shares)
    ceiling = precedent.ceiling_mmol_l(found, case.brief, case.settings)
    return judge_at(
        case,
        system,
        own.concentration_mmol_l,
        sizing,
        found,
        ceiling,
        own_name=own.name,
    )


def _judge_materials(case: Case, own: CandidateInfo) -> Candidate:
    """Judge a list of materials: its pH is what it is."""
    library, brief = case.library, case.brief
    content, whole, species = _made(case, own)
    system = _system_of(case, own, species[:2])
    product = _evaluated(case, own, whole, species)
    measured = next(s for s in product.states if "measure" in s.kinds)
    windows = windows_of(brief, measured.ph)
    carried, load, tightest_c = carried_by(whole, species, windows, case.loads)
    total = sum(content[s] for s in species)
    sizing = Sizing(
        None if carried <= 0.0 else total / carried,
        load,
        tightest_c,
        np.array([carried]),
        np.array([total]),
    )
    found = precedent.standings(
        library, brief, system, {s: content[s] / total for s in species}
    )
    ceiling = precedent.ceiling_mmol_l(found, brief, case.settings)
    judged = judge_product(
        case, system, product, sizing, found, ceiling, total, own_name=own.name
    )
    fired = [*judged.screens, *_avoided(case, system, content)]
    if not brief.ph.low <= measured.ph <= brief.ph.high:
        text = (
            f"as given it reads pH {measured.ph:.2f} at {measured.temperature_c:g} C, "
            f"allowed {brief.ph.low:g} to {brief.ph.high:g}"
        )
        fired.append(set_aside(case, system, Screen("ph_window", text, "derived")))
    return replace(judged, screens=tuple(fired))


def system_of_materials(case: Case, own: CandidateInfo) -> tuple[System, float]:
    """Return what buffers in a formula of materials, and its total [mmol/L].

    Raises
    ------
    InputError
        When none of the materials holds a proton.
    """
    content, _, species = _made(case, own)
    system = _system_of(case, own, species[:2])
    return system, sum(content[name] for name in species)


def _made(
    case: Case, own: CandidateInfo
) -> tuple[dict[str, float], Mixture, tuple[str, ...]]:
    """Species of a formula with amounts [mmol/L], the product, and what buffers in it."""
    library = case.library
    content = _species_content(library, own.materials)
    if not content:
        names = ", ".join(library.find_material(key).name for key in own.materials)
        msg = f"own formula {own.name!r}: {names}: none of them holds a proton"
        hint = "Name a buffer; the product without one is judged in any case."
        raise InputError(msg, hint=hint)
    whole = mixture(
        library,
        {**case.background.materials_mmol_l, **_added(case, own)},
        extras=case.background.extras,
        volume_temperature_c=case.background.volume_temperature_c,
    )
    return content, whole, _buffering(case, whole, content)


def _system_of(case: Case, own: CandidateInfo, species: tuple[str, ...]) -> System:
    """System of the tables that the formula is, under its own name, or a new one.

    What is known of a system, its freezing for one, is known of the formula too.
    """
    library = case.library
    held = {c for key in own.materials for c in library.find_material(key).contents}
    for system in library.systems.values():
        materials = [m for m in (system.acid_material, system.base_material) if m]
        brought = {c for m in materials for c in library.find_material(m).contents}
        if set(system.species) == set(species) and brought <= held:
            return replace(system, name=own.name, species=species)
    return System(
        id=f"own:{own.name}",
        name=own.name,
        role="own formula",
        species=species,
        acid_material=None,
        base_material=None,
        acid_titrant="hydrochloric_acid",
        base_titrant="sodium_hydroxide",
        note="materials given in the brief",
    )


def _buffering(
    case: Case, whole: Mixture, content: Mapping[str, float]
) -> tuple[str, ...]:
    """Species that carry capacity at the product's pH, the one that carries most first.

    A formula names stabilisers too, and methionine at pH 6 is no buffer.
    """
    t = case.brief.ph.measure_temperature_c
    parts = component_capacity_mol_kg_ph(whole.solve(t))
    carried = {name: float(parts[..., whole.index(name)]) for name in content}
    total = max(sum(carried.values()), 1e-12)
    least = case.settings.number("drift_unknown", "share_that_matters")
    ranked = sorted(carried, key=lambda name: -carried[name])
    kept = [name for name in ranked if carried[name] >= least * total]
    return tuple(kept or ranked[:1])


def _avoided(case: Case, system: System, content: Mapping[str, float]) -> list[Screen]:
    """Screens on species of the formula that buffer nothing but are avoided there."""
    rest = tuple(name for name in content if name not in system.species)
    found = precedent.standings(
        case.library, case.brief, replace(system, species=rest), {}
    )
    fired = [s for s in precedent_screens(found, case.brief) if s.id in AVOIDED]
    return [set_aside(case, system, one) for one in fired]


def _species_content(
    library: Library, materials: Mapping[str, float]
) -> dict[str, float]:
    """Amount of each species that buffers [mmol/L]."""
    content: dict[str, float] = {}
    for key, mmol_l in materials.items():
        for component, count in library.find_material(key).contents.items():
            if component in library.species and mmol_l > 0.0:
                content[component] = content.get(component, 0.0) + count * mmol_l
    return content


def _evaluated(
    case: Case, own: CandidateInfo, whole: Mixture, species: tuple[str, ...]
) -> Product:
    """Describe the product; what does not buffer is not the buffer's burden.

    A proposal's share of the osmolality and of the sodium leaves out the excipients
    and the agent that fills it up, so those in a list of materials are left out too.
    """
    library = case.library
    buffer = {
        key: mmol_l
        for key, mmol_l in own.materials.items()
        if key in TITRANTS or set(library.find_material(key).contents) & set(species)
    }
    product = evaluate(
        library,
        case.brief,
        buffer,
        0.0,
        whole,
        species,
        None,
        case.law,
        bare_titrant_mmol_l=case.bare_titrant_mmol_l,
    )
    rows = weighed(library, own.materials)
    return replace(product, composition=tuple(Weighed(*row) for row in rows))


def _added(case: Case, own: CandidateInfo) -> dict[str, float]:
    """Materials of the formula on top of those the brief already lists."""
    return {
        key: mmol_l + case.background.materials_mmol_l.get(key, 0.0)
        for key, mmol_l in own.materials.items()
    }
