"""A user's own formula, judged as it is: never resized."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from formbuf.advice import precedent
from formbuf.advice.candidates import judge_at, judge_product, shares_at
from formbuf.advice.case import Case
from formbuf.advice.evaluate import evaluate
from formbuf.advice.results import Candidate, Screen
from formbuf.advice.sizing import Sizing, size
from formbuf.library.records import System
from formbuf.product.composition import mixture
from formbuf.product.product_parts import CandidateInfo


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
    """
    if own.system is not None and own.concentration_mmol_l is not None:
        system = case.library.systems[own.system]
        sizing = size(
            case.library,
            system,
            case.brief,
            case.loads,
            case.sizing_background,
            case.law,
            case.settings,
        )
        found = precedent.standings(
            case.library, case.brief, system, shares_at(case, system)
        )
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
    return _judge_materials(case, own)


def _judge_materials(case: Case, own: CandidateInfo) -> Candidate:
    """Judge a list of materials: its pH is what it is."""
    library, brief = case.library, case.brief
    content: dict[str, float] = {}
    for key, mmol_l in own.materials.items():
        for component, count in library.find_material(key).contents.items():
            if component in library.species:
                content[component] = content.get(component, 0.0) + count * mmol_l
    species = tuple(sorted(content, key=lambda s: -content[s]))
    system = System(
        id=f"own:{own.name}",
        name=own.name,
        role="own formula",
        species=species[:2],
        acid_material=None,
        base_material=None,
        acid_titrant="hydrochloric_acid",
        base_titrant="sodium_hydroxide",
        note="materials given in the brief",
    )
    whole = mixture(
        library,
        {**case.background.materials_mmol_l, **_added(case, own)},
        extras=case.background.extras,
        volume_temperature_c=case.background.volume_temperature_c,
    )
    product = evaluate(
        library, brief, dict(own.materials), 0.0, whole, species, None, case.law
    )
    measured = next(s for s in product.states if "measure" in s.kinds)
    carried = min(
        (
            room / load
            for room, load in (
                (measured.acid_to_low_mmol_l, case.loads.acid_mmol_l),
                (measured.base_to_high_mmol_l, case.loads.base_mmol_l),
            )
            if load > 0.0
        ),
        default=float("inf"),
    )
    total = max(sum(content.values()), 1e-9)
    required = None if carried <= 0.0 else total / carried
    sizing = Sizing(
        required,
        "acid and base",
        brief.ph.measure_temperature_c,
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
    if brief.ph.low <= measured.ph <= brief.ph.high:
        return replace(judged, tonicity_fill=None)
    text = (
        f"as given it reads pH {measured.ph:.2f} at {measured.temperature_c:g} C, "
        f"allowed {brief.ph.low:g} to {brief.ph.high:g}"
    )
    return replace(
        judged, screens=(*judged.screens, Screen("ph_window", text, "derived"))
    )


def _added(case: Case, own: CandidateInfo) -> dict[str, float]:
    """Materials of the formula on top of those the brief already lists."""
    return {
        key: mmol_l + case.background.materials_mmol_l.get(key, 0.0)
        for key, mmol_l in own.materials.items()
    }
