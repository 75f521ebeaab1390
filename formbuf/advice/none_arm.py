"""The product without an added buffer: always judged, rarely by itself enough.

Only what is known of the drug decides: a measured titration, or its pK values and
concentration. A protein without either cannot be judged.
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np

from formbuf.advice import precedent
from formbuf.advice.case import Case
from formbuf.advice.compatibility import exposures_of, findings_of, quantities_of
from formbuf.advice.evaluate import evaluate
from formbuf.advice.gas_uptake import uptake_notes
from formbuf.advice.loads import LEAST_LOAD_MMOL_L
from formbuf.advice.measure import judge_criteria
from formbuf.advice.results import Candidate, CriterionResult, Standing
from formbuf.advice.sizing import Sizing, windows_of
from formbuf.advice.wording import plain
from formbuf.chemistry.titration import STRONG_ACID, STRONG_BASE
from formbuf.errors import InputError
from formbuf.library.records import System
from formbuf.product.composition import Mixture
from formbuf.product.recipe import make
from formbuf.product.vocabulary import PROTEIN_KINDS

#: A strong acid or base alone makes the product; as a system without species.
SYSTEM_ID = "none"
#: Share of the loads from which it is said how many times they are carried.
MOST_IN_PERCENT = 10.0


def judge_none(case: Case) -> Candidate:
    """Judge the product without buffer, set to its pH with strong acid or base."""
    system = case.library.systems[SYSTEM_ID]
    carried, how = _carried(case)
    standing, note = _standing(case, carried, how)
    candidate = _made(case, system, carried)
    ph_by_c = {s.temperature_c: s.ph for s in candidate.states}
    uptake = uptake_notes(case.loads.gas, case.brief, case.loads.acid_mmol_l, ph_by_c)
    return replace(
        candidate,
        standing=standing,
        carried_share=carried if carried is not None and np.isfinite(carried) else None,
        notes=(note, *uptake, *candidate.notes),
    )


def _carried(case: Case) -> tuple[float | None, str]:
    """Share of the loads that the product carries by itself, and how that is known."""
    loads, windows = case.loads, windows_of(case.brief)
    low, high = case.brief.ph.low, case.brief.ph.high
    readings = case.brief.drug.titration
    if readings:
        ph = [r.ph for r in readings]
        base = [r.base_mmol_l for r in readings]
        if not ph[0] <= low or not ph[-1] >= high:
            return None, "titration does not span the window"
        at = np.interp([low, windows.start_low, windows.start_high, high], ph, base)
        acid, alkali = float(at[1] - at[0]), float(at[3] - at[2])
        return _least(acid, alkali, case), "titration"
    drug = case.brief.drug
    known_from = drug.charge_known_from
    per_gram = [r.ph for r in drug.titration_mmol_g]
    if known_from == "titration" and not (per_gram[0] <= low <= high <= per_gram[-1]):
        return None, "titration does not span the window"
    if known_from is not None:
        return _drug_share(case), known_from
    if not loads.has_load:
        return float("inf"), "no load"
    least = _drug_share(case)
    if least >= 1.0:
        return least, "rest"
    if drug.kind in PROTEIN_KINDS:
        return None, "protein"
    return None, "biologic" if drug.is_biologic else "unknown"


def _least(
    acid_mmol_l: float, base_mmol_l: float, case: Case, more_acid_mmol_l: float = 0.0
) -> float:
    loads = case.loads
    shares = [
        carried / load
        for carried, load in (
            (acid_mmol_l, loads.acid_mmol_l + more_acid_mmol_l),
            (base_mmol_l, loads.base_mmol_l),
        )
        if load >= LEAST_LOAD_MMOL_L
    ]
    return min(shares, default=float("inf"))


def _drug_share(case: Case) -> float:
    """Share of the loads that drug, excipients and water carry, at the worst temperature.

    Of a drug of which nothing is known, the rest is the least that the product takes.
    The limits move with the pH of the product, as for a buffer.
    """
    windows = windows_of(case.brief)
    acid_side = _bare_mixture(case, windows.start_low)
    base_side = _bare_mixture(case, windows.start_high)
    least = float("inf")
    for t in (windows.measure_c, *windows.others_c):
        low, high = case.brief.ph.low, case.brief.ph.high
        if t != windows.measure_c:
            low = float(acid_side.solve(t).ph) - windows.room_low
            high = float(base_side.solve(t).ph) + windows.room_high
        acid = acid_side.titrate(t, low, STRONG_ACID).amount_mol_kg
        base = base_side.titrate(t, high, STRONG_BASE).amount_mol_kg
        share = _least(
            1000.0 * float(acid) * float(acid_side.water_kg_l),
            1000.0 * float(base) * float(base_side.water_kg_l),
            case,
            float(case.loads.more_acid_mmol_l(low, t)),
        )
        least = min(least, share)
    return least


def _bare_mixture(case: Case, ph: float) -> Mixture:
    system = case.library.systems[SYSTEM_ID]
    return make(
        case.library,
        system,
        1.0,
        ph,
        case.brief.ph.measure_temperature_c,
        case.background,
        case.law,
    ).mixture


def _standing(case: Case, carried: float | None, how: str) -> tuple[Standing, str]:
    if how == "protein":
        return "not evaluable", (
            "what the protein itself buffers is unknown: a measured titration of the "
            "product without buffer would decide, its sequence or charge would help"
        )
    if how == "biologic":
        return "not evaluable", (
            "what the drug itself buffers is unknown: a measured titration of the "
            "product without buffer would decide"
        )
    if carried is None:
        if how == "titration does not span the window":
            return "not evaluable", "the measured titration does not span the window"
        return "viable", (
            "the drug's pK values or a titration are not given: whether the product "
            "holds its pH without a buffer is open"
        )
    if how == "no load":
        return "back-up", "no load is expected, so there is none to carry"
    basis = {
        "titration": "by its measured titration",
        "pka": "calculated from the drug's pK values",
        "residues": "estimated from its ionisable groups",
        "net_charge": "estimated from its isoelectric point and net charge",
        "rest": "by water and excipients alone, whatever the drug adds",
    }[how]
    note = f"the product by itself carries {_share(carried)}, {basis}"
    if carried < 1.0:
        return "viable", note
    return ("lead" if how == "titration" else "back-up"), note


def _share(carried: float | None) -> str:
    """Return the share of the loads carried, of the loads."""
    if carried is None or not np.isfinite(carried):
        return "all of the loads"
    if carried >= MOST_IN_PERCENT:
        return f"{plain(carried)} times the loads"
    if 0.995 <= carried < 1.0:
        return "just under 100 % of the loads"
    return f"{100.0 * carried:.0f} % of the loads"


def _made(case: Case, system: System, carried: float | None) -> Candidate:
    library, brief = case.library, case.brief
    empty = Candidate(
        key=SYSTEM_ID,
        system=system,
        name=system.name,
        is_own_formula=False,
        is_mixture=False,
        variant_of=None,
        required_mmol_l=0.0,
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
        buffer_osmolality_mosm_kg=0.0,
        titratable_acidity_mmol_l=None,
        exposures=(),
        criteria={},
        screens=(),
    )
    try:
        recipe = make(
            library,
            system,
            1.0,
            brief.ph.target,
            brief.ph.measure_temperature_c,
            case.background,
            case.law,
        )
    except InputError:
        return empty
    buffer = {k: float(v) for k, v in recipe.buffer_mmol_l.items() if float(v) > 0.0}
    product = evaluate(
        library,
        brief,
        buffer,
        float(recipe.fill_mmol_l),
        recipe.mixture,
        (),
        case.background.agent,
        case.law,
        bare_titrant_mmol_l=buffer,
    )
    known = carried is not None
    judged: dict[str, CriterionResult] = {}
    if known:
        found = precedent.standings(
            library, brief, replace(system, species=("none",)), {"none": 1.0}
        )
        sizing = Sizing(
            0.0 if carried is not None and carried >= 1.0 else None,
            "none",
            brief.ph.measure_temperature_c,
            np.array([carried or 0.0]),
            np.array([1.0]),
        )
        ceiling = 50.0
        judged = dict(
            judge_criteria(case, system, product, sizing, found, ceiling, 0.0)
        )
        if "capacity" in judged:
            text = f"without a buffer the product carries {_share(carried)}"
            judged["capacity"] = replace(judged["capacity"], text=text)
    storage = [s for s in product.states if "storage" in s.kinds]
    reference = next(s.ph for s in product.states if "measure" in s.kinds)
    drift = max((s.ph - reference for s in storage), key=abs, default=None)
    numbers = quantities_of(case, system, product, None)
    has_drug = bool(recipe.mixture.ladders)
    return replace(
        empty,
        composition=product.composition,
        tonicity_fill=product.tonicity_fill,
        states=product.states if has_drug else (),
        species_states=product.species_states,
        ph_drift=drift if has_drug else None,
        osmolality_mosm_kg=product.osmolality_mosm_kg,
        titratable_acidity_mmol_l=product.titratable_acidity_mmol_l if known else None,
        exposures=exposures_of(case, numbers),
        findings=findings_of(case, numbers),
        criteria=judged,
        mixture=product.mixture,
    )
