"""Desirabilities of a candidate in every draw.

Capacity, drift and the share of tonicity follow from the drawn product. What rests on
a class or a level (precedent, compatibility, freezing) and the dose burden keep their
value; their logarithm gets the deviation of their own result, once for all systems of
a buffering species. Screens are not drawn again.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np
from numpy.typing import NDArray

from formbuf.advice.criteria_table import Anchors, Settings
from formbuf.advice.draw_candidate import CandidateDraws, Draws
from formbuf.advice.draw_inputs import Input
from formbuf.advice.ranking import group_of
from formbuf.advice.results import Candidate
from formbuf.advice.wording import criterion_name

Array = NDArray[np.float64]

JUDGED_ADVICE = {
    "precedent": "look the precedent up in the product information",
    "compatibility": "answer the open facts of the brief",
    "frozen_drift": "measure the pH while it freezes",
    "dose_burden": "agree on the limit per dose",
}


def scaled_log(
    values: Array, anchors: Anchors, floor: float, floor_value: float
) -> Array:
    """Logarithm of the desirability of quantities; see ``desirability.scaled``.

    Parameters
    ----------
    values : ndarray
        In the unit of the anchors; infinite counts as beyond the floor.
    anchors : Anchors
    floor : float
        Quantity at which the floor is reached.
    floor_value : float

    Returns
    -------
    ndarray
        Between ln(floor_value) and 0.
    """
    inside = np.clip(values, anchors.full, floor)
    if anchors.scale == "log":
        share = np.log(inside / anchors.full) / np.log(floor / anchors.full)
    else:
        share = (inside - anchors.full) / (floor - anchors.full)
    logs: Array = np.log(1.0 - share * (1.0 - floor_value))
    return logs


def log_desirabilities(
    draws: Draws, settings: Settings, candidate: Candidate, made: CandidateDraws | None
) -> tuple[dict[str, Array], dict[str, Input]]:
    """Return ln desirability by criterion, shape (draws,), and what was drawn for it.

    Parameters
    ----------
    draws : Draws
    settings : Settings
    candidate : Candidate
        With its criteria.
    made : CandidateDraws or None
        None keeps every quantity at its nominal value.
    """
    found: dict[str, Array] = {}
    inputs: dict[str, Input] = {}
    for name, result in candidate.criteria.items():
        nominal = np.full(draws.sampler.count, np.log(result.desirability))
        if made is not None and name == "capacity":
            found[name] = _capacity(settings, candidate, made)
        elif made is not None and name == "temperature_drift":
            found[name] = _drift(draws, settings, made, nominal)
        elif made is not None and name == "tonicity_share" and result.value is not None:
            anchors = settings.anchors[name]
            found[name] = scaled_log(
                result.value * (1.0 + made.buffer_share),
                anchors,
                anchors.floor or 1.0,
                settings.floor_value,
            )
        elif name in JUDGED_ADVICE and result.deviation_ln > 0.0:
            stream = f"judged:{name}:{group_of(candidate)}"
            label = f"{criterion_name(name)} of {candidate.name}"
            advice = JUDGED_ADVICE[name]
            inputs[stream] = Input(stream, label, advice, result.deviation_ln, "1")
            error = result.deviation_ln * draws.sampler.normal(stream)
            least = np.log(settings.floor_value)
            found[name] = np.clip(nominal + error, least, 0.0)
        else:
            found[name] = nominal
    return found, inputs


def _capacity(settings: Settings, candidate: Candidate, made: CandidateDraws) -> Array:
    anchors = settings.anchors["capacity"]
    floor = anchors.floor
    if floor is None:
        fallback = float(settings.table["anchors"]["capacity"]["fallback_ceiling"])
        floor = candidate.ceiling_mmol_l or fallback
    floor = max(floor, anchors.full * 1.0001)
    required = made.required_mmol_l
    logs = scaled_log(required, anchors, floor, settings.floor_value)
    if candidate.is_own_formula:
        short = required > candidate.concentration_mmol_l * (1.0 + 1e-9)
        logs = np.where(short, np.log(settings.floor_value), logs)
    return logs


def _drift(
    draws: Draws, settings: Settings, made: CandidateDraws, nominal: Array
) -> Array:
    at = draws.brief.ph.measure_temperature_c
    stored = [t for t in draws.brief.liquid_storage_temperatures_c if t in made.ph]
    if not stored:
        return nominal
    anchors = settings.anchors["temperature_drift"]
    largest = np.zeros_like(nominal)
    for t in stored:
        largest = np.maximum(largest, np.abs(made.ph[t] - made.ph[at]))
    return scaled_log(largest, anchors, anchors.floor or 1.0, settings.floor_value)


def overall(
    logs: Mapping[str, Array], weights: Mapping[str, float | Array], count: int
) -> Array:
    """Logarithm of the weighted geometric mean, shape (draws,).

    Parameters
    ----------
    logs : mapping of criterion to ndarray
        ln desirability.
    weights : mapping of criterion to float or ndarray
        Renormalised over the criteria present.
    count : int
        Draws.
    """
    total: Array = np.zeros(count)
    weight: Array = np.zeros(count)
    for name, values in logs.items():
        total = total + weights[name] * values
        weight = weight + weights[name]
    result: Array = np.divide(total, weight, out=np.zeros(count), where=weight > 0.0)
    return result
