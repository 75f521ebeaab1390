"""Judge one candidate: size it, make it, screen it, and measure it by each criterion."""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from formbuf.advice import frozen, precedent, screens
from formbuf.advice.case import Case, is_mixture
from formbuf.advice.compatibility import (
    exposures_of,
    findings_of,
    quantities_of,
    rule_screens,
)
from formbuf.advice.evaluate import Product, evaluate, single
from formbuf.advice.gas_uptake import uptake_notes
from formbuf.advice.measure import judge_criteria, taken_drift
from formbuf.advice.precedent import SpeciesStanding
from formbuf.advice.results import Candidate, CriterionResult, Screen
from formbuf.advice.sizing import Sizing, proposed_mmol_l, size
from formbuf.advice.surroundings import made_in
from formbuf.errors import InputError
from formbuf.library.records import System
from formbuf.product.product_brief import ProductBrief
from formbuf.product.recipe import make


def judge_system(case: Case, system: System) -> Candidate:
    """Judge a system of the tables at the concentration the loads ask for.

    Parameters
    ----------
    case : Case
    system : System

    Returns
    -------
    Candidate
        Without rank; screened where a screen fired.
    """
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
        return unreachable(system, str(error))
    found = precedent.standings(case.library, case.brief, system, shares)
    ceiling = precedent.ceiling_mmol_l(found, case.brief, case.settings)
    required = sizing.required_mmol_l
    concentration = proposed_mmol_l(
        ceiling if required is None else required,
        ceiling,
        case.settings,
        large_volume=case.brief.is_large_volume_intravenous,
    )
    return judge_at(case, system, concentration, sizing, found, ceiling)


def judge_at(
    case: Case,
    system: System,
    concentration_mmol_l: float,
    sizing: Sizing,
    found: tuple[SpeciesStanding, ...],
    ceiling_mmol_l: float,
    *,
    own_name: str = "",
) -> Candidate:
    """Judge a system at a given concentration (a proposal, or a user's formula)."""
    library, brief = case.library, case.brief
    recipe = make(
        library,
        system,
        concentration_mmol_l,
        brief.ph.target,
        brief.ph.measure_temperature_c,
        case.background,
        case.law,
    )
    buffer, fill = single(recipe)
    product = evaluate(
        library,
        brief,
        buffer,
        fill,
        recipe.mixture,
        system.species,
        case.background.agent,
        case.law,
        bare_titrant_mmol_l=case.bare_titrant_mmol_l,
    )
    return judge_product(
        case,
        system,
        product,
        sizing,
        found,
        ceiling_mmol_l,
        concentration_mmol_l,
        own_name=own_name,
    )


def judge_product(
    case: Case,
    system: System,
    product: Product,
    sizing: Sizing,
    found: tuple[SpeciesStanding, ...],
    ceiling_mmol_l: float,
    concentration_mmol_l: float,
    *,
    own_name: str = "",
) -> Candidate:
    """Screen a made product and measure it by every criterion."""
    brief = case.brief
    fired, notes = _screens(
        case, system, product, sizing, found, ceiling_mmol_l, own_name
    )
    judged = judge_criteria(
        case, system, product, sizing, found, ceiling_mmol_l, concentration_mmol_l
    )
    carried = sizing.carried_at(concentration_mmol_l)
    if own_name and carried < 1.0:
        notes.append(
            f"at {concentration_mmol_l:g} mmol/L it carries {100.0 * carried:.0f} % of "
            "the loads"
        )
        judged = {**judged, "capacity": _at_floor(judged["capacity"], case)}
    ph_by_c = {s.temperature_c: s.ph for s in product.states}
    notes += uptake_notes(case.loads.gas, brief, case.loads.acid_mmol_l, ph_by_c)
    drift = taken_drift(case, system, product)
    if drift is not None and drift[2] and drift[1] != brief.ph.measure_temperature_c:
        notes.append(_unknown_drift(brief, drift))
    kept = case.thorough or all(one.overridden_by for one in fired)
    frost = frozen.freeze(case, system, product, concentration_mmol_l) if kept else None
    if frost is not None:
        judged = {**judged, "frozen_drift": frozen.criterion(case, frost)}
    elif said := frozen.warm_note(case, system):
        notes.append(said)
    notes += frozen.drying_notes(case, product)
    numbers = quantities_of(
        case, system, product, frost.counted_class if frost else None
    )
    findings = findings_of(case, numbers)
    fired += rule_screens(findings)
    return Candidate(
        key=f"own:{own_name}" if own_name else system.id,
        system=system,
        name=own_name or system.name,
        is_own_formula=bool(own_name),
        is_mixture=is_mixture(case.library, system),
        variant_of=None,
        required_mmol_l=sizing.required_mmol_l,
        limiting_load=sizing.limiting_load,
        carried_share=carried if np.isfinite(carried) else None,
        concentration_mmol_l=concentration_mmol_l,
        ceiling_mmol_l=ceiling_mmol_l,
        composition=product.composition,
        tonicity_fill=product.tonicity_fill,
        states=product.states,
        species_states=product.species_states,
        ph_drift=drift[0] if drift else None,
        osmolality_mosm_kg=product.osmolality_mosm_kg,
        buffer_osmolality_mosm_kg=product.buffer_osmolality_mosm_kg,
        titratable_acidity_mmol_l=product.titratable_acidity_mmol_l,
        exposures=exposures_of(case, numbers),
        criteria=judged,
        screens=tuple(fired),
        findings=findings,
        frozen=frost,
        notes=(*product.mixture.notes, *notes),
        mixture=product.mixture,
    )


def unreachable(system: System, reason: str) -> Candidate:
    """Return a candidate that cannot be made to the target pH."""
    return Candidate(
        key=system.id,
        system=system,
        name=system.name,
        is_own_formula=False,
        is_mixture=False,
        variant_of=None,
        required_mmol_l=None,
        limiting_load="none",
        carried_share=None,
        concentration_mmol_l=0.0,
        ceiling_mmol_l=None,
        composition=(),
        tonicity_fill=None,
        states=(),
        species_states=(),
        ph_drift=None,
        osmolality_mosm_kg=None,
        buffer_osmolality_mosm_kg=None,
        titratable_acidity_mmol_l=None,
        exposures=(),
        criteria={},
        screens=(Screen("cannot_reach_ph", reason, "derived"),),
        standing="screened out",
    )


def shares_at(case: Case, system: System) -> dict[str, float]:
    """Amount of each species over the nominal concentration, at 10 mmol/L."""
    if len(system.species) == 1:
        return {system.species[0]: 1.0}
    recipe, _ = made_in(
        case.library,
        system,
        np.array(10.0),
        np.array(case.brief.ph.target),
        case.brief.ph.measure_temperature_c,
        case.surroundings,
        case.law,
    )
    shares = {}
    for species in system.species:
        amount = 0.0
        for key, mmol_l in recipe.buffer_mmol_l.items():
            contents = case.library.find_material(key).contents
            amount += contents.get(species, 0.0) * float(mmol_l)
        shares[species] = amount / 10.0
    return shares


def _screens(
    case: Case,
    system: System,
    product: Product,
    sizing: Sizing,
    found: tuple[SpeciesStanding, ...],
    ceiling_mmol_l: float,
    own_name: str,
) -> tuple[list[Screen], list[str]]:
    """Apply the computed screens; what they could not judge becomes a note."""
    library, brief, settings = case.library, case.brief, case.settings
    fired = screens.precedent_screens(found, brief)
    notes = [*screens.novelty_notes(found), *precedent.listed_notes(found)]
    made_of = [w.material for w in product.composition]
    fired += screens.exclusion_screens(library, system, brief.exclude, made_of)
    if not own_name:
        ceiling, said = screens.ceiling_screen(
            sizing,
            ceiling_mmol_l,
            settings.number("sizing", "largest_considered_mmol_l"),
            settings.number("sizing", "default_load_share"),
            loads_are_default=case.loads.all_default,
        )
        fired += [ceiling] if ceiling else []
        notes += [said] if said else []
    soluble, said_too = screens.solubility_screens(
        library,
        brief,
        system,
        product.buffer_mmol_l,
        float(product.mixture.water_kg_l),
    )
    fired += soluble
    notes += said_too
    for one in (
        screens.osmolality_screen(
            product.buffer_osmolality_mosm_kg, brief.tonicity.high_mosm_kg
        ),
        screens.carbon_dioxide_screen(brief, product, system, _headspace_pa(case)),
        screens.storage_window_screen(brief, product.states),
        _two_species_screen(case, system, product),
    ):
        if one is not None:
            fired.append(one)
    return [set_aside(case, system, one) for one in fired], notes


def _headspace_pa(case: Case) -> float:
    """Return the carbon dioxide a headspace may hold: as stated, or a default."""
    if "carbon_dioxide.pressure_pa" in case.situation.assumed:
        return case.settings.number("carbon_dioxide", "headspace_pa")
    return case.brief.carbon_dioxide.pressure_pa


def _two_species_screen(case: Case, system: System, product: Product) -> Screen | None:
    """Screen a system whose counter-ion does the buffering: it doubles another."""
    if len(system.species) != 2 or is_mixture(case.library, system):
        return None
    least = case.settings.number("sizing", "two_species_least_share")
    share = product.own_capacity_share
    if share >= least:
        return None
    return Screen(
        "buffers_through_counter_ion",
        f"{system.species[0]} carries {100.0 * share:.0f} % of the buffer's capacity at "
        f"this pH, at least {100.0 * least:.0f} % wanted: it buffers through "
        f"{system.species[1]}",
        "judgement",
    )


def set_aside(case: Case, system: System, screen: Screen) -> Screen:
    """Mark a screen that a scientist has set aside."""
    for o in case.brief.override:
        if o.rule == screen.id and o.system in (None, system.id):
            who = f"{o.name}, {o.date.isoformat()}: {o.reason}"
            return replace(screen, overridden_by=who)
    return screen


def _unknown_drift(brief: ProductBrief, drift: tuple[float, float, str]) -> str:
    """Say that a pH at another temperature is not known."""
    text = (
        f"its pH at {drift[1]:g} C is not known, a drift of {drift[0]:+.2f} is taken: "
        f"{drift[2]}"
    )
    if brief.ph.storage_low is not None:
        text += "; whether it keeps the storage window is open"
    return text


def _at_floor(result: CriterionResult, case: Case) -> CriterionResult:
    return replace(result, desirability=case.settings.floor_value, deviation_ln=0.0)
