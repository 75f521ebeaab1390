"""Measure a made candidate by every criterion that applies to its brief."""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from formbuf.advice import criteria, precedent
from formbuf.advice.burden import own_burden
from formbuf.advice.case import Case
from formbuf.advice.evaluate import Product, content_mmol_l
from formbuf.advice.precedent import SpeciesStanding
from formbuf.advice.results import CriterionResult
from formbuf.advice.sizing import Sizing
from formbuf.library.records import System
from formbuf.product.composition import ladder_of


def judge_criteria(
    case: Case,
    system: System,
    product: Product,
    sizing: Sizing,
    found: tuple[SpeciesStanding, ...],
    ceiling_mmol_l: float,
    concentration_mmol_l: float,
) -> Mapping[str, CriterionResult]:
    """Every criterion that applies to the brief, from the made product.

    Without any load every buffer carries it, so that capacity would only raise all
    alike; it is left out, and a warning says so (``verdict``).
    """
    settings, brief = case.settings, case.brief
    amounts = _species_amounts(case, system, product)
    results: dict[str, CriterionResult] = {}
    if case.loads.has_load:
        results["capacity"] = criteria.capacity(
            sizing.required_mmol_l,
            settings.number("sizing", "largest_considered_mmol_l"),
            ceiling_mmol_l,
            settings.number("uncertainty", "load_relative"),
            settings,
            precedent.listed_sources(found),
        )
    drift = _drift(case, system, product, amounts)
    if drift is not None:
        results["temperature_drift"] = drift
    if brief.tonicity.target_mosm_kg is not None:
        key = "unfitted" if product.unfitted_pairs else "fitted"
        results["tonicity_share"] = criteria.tonicity_share(
            product.buffer_osmolality_mosm_kg,
            brief.tonicity.target_mosm_kg,
            settings.number("uncertainty", f"osmolality_{key}_relative"),
            settings,
        )
    results["precedent"] = criteria.precedent(
        precedent.score(
            case.library, brief, system, found, concentration_mmol_l, settings
        ),
        settings,
    )
    burden = criteria.dose_burden(own_burden(case, product), settings)
    if burden is not None:
        results["dose_burden"] = burden
    return results


def _species_amounts(case: Case, system: System, product: Product) -> tuple[float, ...]:
    content = content_mmol_l(case.library, product.buffer_mmol_l, system.species)
    return tuple(content[s] for s in system.species)


def taken_drift(
    case: Case, system: System, product: Product
) -> tuple[float, float, str] | None:
    """Largest change of pH at a liquid storage temperature, and at which.

    Where an enthalpy that matters is unknown, the worst of its family is taken, since
    a pK left as at 25 C would show no drift at all.

    Returns
    -------
    (drift_ph, temperature_c, unknown) or None
        The last says what is unknown and taken; empty where all is known. None where
        the product is not stored as a liquid.
    """
    brief = case.brief
    measure = brief.ph.measure_temperature_c
    found = criteria.storage_drift(
        product.states, brief.liquid_storage_temperatures_c, measure
    )
    if found is None:
        return None
    drift, at_c = found
    species = tuple(case.library.species[s] for s in system.species)
    slope, unknown = criteria.unknown_drift_per_k(
        tuple(ladder_of(s) for s in species),
        _species_amounts(case, system, product),
        tuple(s.family for s in species),
        brief.ph.target,
        case.settings,
    )
    if not unknown:
        return drift, at_c, ""
    coldest = max(brief.liquid_storage_temperatures_c, key=lambda t: abs(t - measure))
    if abs(slope * (coldest - measure)) > abs(drift):
        drift, at_c = slope * (coldest - measure), coldest
    return drift, at_c, unknown


def _drift(
    case: Case, system: System, product: Product, amounts: tuple[float, ...]
) -> CriterionResult | None:
    brief, settings, library = case.brief, case.settings, case.library
    measure = brief.ph.measure_temperature_c
    found = taken_drift(case, system, product)
    if found is None:
        return None
    drift, at_c, unknown = found
    species = tuple(library.species[s] for s in system.species)
    ladders = tuple(ladder_of(s) for s in species)
    deviations = tuple(
        tuple(
            (step.dh_kj_mol.uncertainty or 1.0) if step.dh_kj_mol else 10.0
            for step in s.steps
        )
        for s in species
    )
    spread = criteria.drift_deviation_ph(
        ladders, amounts, deviations, brief.ph.target, measure, at_c
    )
    model = settings.number("uncertainty", "ph_model")
    sources = tuple(
        dict.fromkeys(
            step.dh_kj_mol.source
            for s in species
            for step in s.steps
            if step.dh_kj_mol and step.dh_kj_mol.source
        )
    )
    return criteria.temperature_drift(
        drift, at_c, float(np.hypot(spread, model)), unknown, sources, settings
    )
