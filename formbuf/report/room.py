"""What is left to the limits of tonicity, and the acidity of one dose."""

from __future__ import annotations

from dataclasses import replace

from formbuf.advice.results import Candidate, Shortlist
from formbuf.product.osmotics import osmotic_law


def room(result: Shortlist, candidate: Candidate) -> dict[str, float | None]:
    """Return the osmotic budget and the acidity per dose of one candidate.

    Returns
    -------
    dict
        ``without_agent_mosm_kg``: everything but the agent that fills up;
        ``to_target_mosm_kg``: what the agent has to bring; ``to_limit_mosm_kg``: what
        is left from the finished product to the upper limit;
        ``alkalinity_mmol_l``: strong acid to pH 7.4 where the product is basic;
        ``acidity_mmol_dose``: strong acid or base to pH 7.4 per dose. None where
        unknown.
    """
    acidity = candidate.titratable_acidity_mmol_l
    litres = result.brief.dose.volume_ml / 1000.0
    tonicity = result.brief.tonicity
    total = candidate.osmolality_mosm_kg
    without = total
    if candidate.tonicity_fill is not None and candidate.mixture is not None:
        without = _without_agent(result, candidate)
    target, high = tonicity.target_mosm_kg, tonicity.high_mosm_kg
    return {
        "without_agent_mosm_kg": without,
        "to_target_mosm_kg": None
        if target is None or without is None
        else target - without,
        "to_limit_mosm_kg": None if high is None or total is None else high - total,
        "alkalinity_mmol_l": None if acidity is None else max(-acidity, 0.0),
        "acidity_mmol_dose": None if acidity is None else abs(acidity) * litres,
    }


def _without_agent(result: Shortlist, candidate: Candidate) -> float | None:
    mixed, fill = candidate.mixture, candidate.tonicity_fill
    if mixed is None or fill is None:
        return candidate.osmolality_mosm_kg
    per_litre = fill.mmol_l / 1000.0 / float(mixed.water_kg_l)
    ions, neutrals = dict(mixed.ions_mol_kg), dict(mixed.neutrals_mol_kg)
    totals = mixed.totals_mol_kg.copy()
    for name, count in result.library.find_material(fill.material).contents.items():
        if name in neutrals:
            neutrals[name] = neutrals[name] - count * per_litre
        elif name in ions:
            ions[name] = ions[name] - count * per_litre
        elif mixed.index(name) >= 0:
            totals[..., mixed.index(name)] -= count * per_litre
    bare = replace(
        mixed, totals_mol_kg=totals, ions_mol_kg=ions, neutrals_mol_kg=neutrals
    )
    at = result.brief.ph.measure_temperature_c
    law = osmotic_law(result.library)
    found = bare.osmolality(at, bare.solve(at), law)
    return float(found.osmolality_mosm_kg)
