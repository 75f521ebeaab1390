"""One pure function per criterion: a quantity in, a `CriterionResult` out."""

from __future__ import annotations

import math

import numpy as np

from formbuf.advice.criteria_table import Settings
from formbuf.advice.desirability import deviation_ln, scaled
from formbuf.advice.precedent import PrecedentScore
from formbuf.advice.results import CriterionResult, Exposure, LiquidState
from formbuf.advice.wording import percent, plain
from formbuf.chemistry.ionization import Ladder, pk_shift, state_fractions
from formbuf.constants import LN10

#: Among the substances of the dose burden, the one that is no material.
ACIDITY = "titratable_acidity"


def capacity(
    required_mmol_l: float | None,
    largest_mmol_l: float,
    ceiling_mmol_l: float,
    relative_deviation: float,
    settings: Settings,
    sources: tuple[str, ...] = (),
) -> CriterionResult:
    """Judge the required concentration, on a log scale up to the ceiling.

    ``sources`` name where the ceiling comes from, if it is a file of the user.
    """
    anchors = settings.anchors["capacity"]
    floor = anchors.floor if anchors.floor is not None else ceiling_mmol_l
    floor = max(floor, anchors.full * 1.0001)
    value = largest_mmol_l if required_mmol_l is None else required_mmol_l
    d = scaled(value, anchors, floor, settings.floor_value)
    shown = (
        f"more than {largest_mmol_l:g}"
        if required_mmol_l is None
        else plain(required_mmol_l)
    )
    listed = ", as the file of the user lists it" if sources else ""
    return CriterionResult(
        value,
        anchors.unit,
        d,
        f"carrying the loads takes {shown} mmol/L; the ceiling is {plain(floor)} mmol/L"
        f"{listed}",
        sources=sources,
        deviation_ln=deviation_ln(
            value, value * relative_deviation, anchors, floor, settings.floor_value
        ),
    )


def temperature_drift(
    drift_ph: float,
    at_c: float,
    deviation_ph: float,
    unknown: str,
    sources: tuple[str, ...],
    settings: Settings,
) -> CriterionResult:
    """Largest change of pH from measurement to a liquid storage temperature."""
    anchors = settings.anchors["temperature_drift"]
    floor = anchors.floor or 1.0
    value = abs(drift_ph)
    text = f"pH moves by {drift_ph:+.2f} at {at_c:g} C"
    if unknown:
        text += f"; {unknown}"
    return CriterionResult(
        value,
        anchors.unit,
        scaled(value, anchors, floor, settings.floor_value),
        text,
        sources=sources,
        deviation_ln=deviation_ln(
            value, deviation_ph, anchors, floor, settings.floor_value
        ),
    )


def tonicity_share(
    buffer_mosm_kg: float,
    target_mosm_kg: float,
    relative_deviation: float,
    settings: Settings,
) -> CriterionResult:
    """Osmolality of the buffer over the osmolality aimed at."""
    anchors = settings.anchors["tonicity_share"]
    floor = anchors.floor or 1.0
    value = buffer_mosm_kg / target_mosm_kg
    return CriterionResult(
        value,
        anchors.unit,
        scaled(value, anchors, floor, settings.floor_value),
        f"the buffer brings {buffer_mosm_kg:.0f} of {target_mosm_kg:.0f} mosmol/kg",
        deviation_ln=deviation_ln(
            value, value * relative_deviation, anchors, floor, settings.floor_value
        ),
    )


def precedent(found: PrecedentScore, settings: Settings) -> CriterionResult:
    """Route and kind precedent times closeness to usual concentrations."""
    step = settings.number("uncertainty", "precedent_step_ln")
    return CriterionResult(
        None,
        "",
        max(found.desirability, settings.floor_value),
        found.text,
        sources=found.sources,
        deviation_ln=step if found.rests_on_recall else 0.0,
    )


def dose_burden(
    rows: tuple[Exposure, ...], settings: Settings
) -> CriterionResult | None:
    """Largest share of a per-dose limit that the buffer takes; None without limits.

    ``rows`` are what the buffer itself brings (``burden.own_burden``).
    """
    limited = [row for row in rows if row.limit_share is not None]
    if not limited:
        return None
    worst = max(limited, key=lambda row: row.limit_share or 0.0)
    anchors = settings.anchors["dose_burden"]
    floor = anchors.floor or 1.0
    value = worst.limit_share or 0.0
    spread = settings.number("uncertainty", "dose_burden_relative")
    return CriterionResult(
        value,
        anchors.unit,
        scaled(value, anchors, floor, settings.floor_value),
        f"{_counted(worst.substance)}: {percent(value)} of the limit "
        f"{worst.limit:g} {worst.limit_unit}",
        sources=(worst.limit_source,) if worst.limit_source else (),
        deviation_ln=deviation_ln(
            value, value * spread, anchors, floor, settings.floor_value
        ),
    )


def _counted(substance: str) -> str:
    """Say what of a substance the dose burden counts."""
    name = substance.replace("_", " ")
    if substance == ACIDITY:
        return f"{name} of the buffer's own species to pH 7.4"
    return f"{name} of the buffer"


def storage_drift(
    states: tuple[LiquidState, ...],
    liquid_storage_c: tuple[float, ...],
    measure_c: float,
) -> tuple[float, float] | None:
    """Largest change of pH from measurement to a liquid storage temperature.

    Returns
    -------
    (drift, temperature_c) or None
        None where the product is not stored as a liquid.
    """
    reference = next((s.ph for s in states if s.temperature_c == measure_c), None)
    if reference is None or not liquid_storage_c:
        return None
    drifts = [
        (s.ph - reference, s.temperature_c)
        for s in states
        if s.temperature_c in liquid_storage_c
    ]
    return max(drifts, key=lambda pair: abs(pair[0])) if drifts else None


def unknown_drift_per_k(
    ladders: tuple[Ladder, ...],
    amounts: tuple[float, ...],
    families: tuple[str, ...],
    ph: float,
    settings: Settings,
) -> tuple[float, str]:
    """Worst slope of pH where an enthalpy that matters is unknown.

    Parameters
    ----------
    ladders : tuple of Ladder
        The buffer's own species.
    amounts : tuple of float
        Their amounts, any common unit.
    families : tuple of str
        ``amine or amino acid``, ``carboxylic acid`` and so on.
    ph : float
        pH of the product.
    settings : Settings

    Returns
    -------
    (slope_per_k, text)
        Slope zero and empty text where nothing that matters is unknown.
    """
    section = settings.table["drift_unknown"]
    total, pieces = 0.0, []
    for ladder, amount, family in zip(ladders, amounts, families, strict=True):
        for k, share in enumerate(step_capacity_shares(ladder, ph)):
            total += amount * share
            pieces.append((ladder, k, amount * share, family))
    for ladder, k, carried, family in pieces:
        if math.isnan(ladder.dh_kj_mol[k]) and carried > total * float(
            section["share_that_matters"]
        ):
            key = "amine_per_k" if "amin" in family else "carboxylate_per_k"
            slope = float(section[key])
            return slope, (
                f"enthalpy of step {k + 1} of {ladder.name} unknown: the steepest "
                f"slope of its family, {slope:+.3f} per K, is taken"
            )
    return 0.0, ""


def step_capacity_shares(ladder: Ladder, ph: float) -> list[float]:
    """Capacity that each step alone would carry per mole at a pH (25 C, I = 0)."""
    fractions = state_fractions(ladder, ph, 25.0, 0.0)
    return [
        float(LN10 * fractions[k] * fractions[k + 1])
        for k in range(fractions.shape[-1] - 1)
    ]


def drift_deviation_ph(
    ladders: tuple[Ladder, ...],
    amounts: tuple[float, ...],
    dh_deviation: tuple[tuple[float, ...], ...],
    ph: float,
    from_c: float,
    to_c: float,
) -> float:
    """First-order standard deviation of a drift from the enthalpies' uncertainties."""
    weights, spread = 0.0, 0.0
    unit = abs(float(pk_shift(1.0, 0.0, to_c) - pk_shift(1.0, 0.0, from_c)))
    for ladder, amount, deviations in zip(ladders, amounts, dh_deviation, strict=True):
        for k, share in enumerate(step_capacity_shares(ladder, ph)):
            carried = amount * share
            weights += carried
            spread += (carried * deviations[k] * unit) ** 2
    return float(np.sqrt(spread) / weights) if weights > 0.0 else 0.0
