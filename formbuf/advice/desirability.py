"""From a quantity to a desirability between the floor and one.

Harrington 1965, Ind. Qual. Control 21, 494; Derringer & Suich 1980, J. Qual.
Technol. 12, 214. Less of every quantity is better here.
"""

from __future__ import annotations

import math
from collections.abc import Mapping

from formbuf.advice.criteria_table import Anchors


def scaled(value: float, anchors: Anchors, floor: float, floor_value: float) -> float:
    """Desirability of a quantity, linear or logarithmic between two anchors.

    Parameters
    ----------
    value : float
        The quantity, in the unit of the anchors; not negative.
    anchors : Anchors
    floor : float
        Quantity at which the floor is reached, above ``anchors.full``.
    floor_value : float
        Desirability at and beyond the floor.

    Returns
    -------
    float
        Between ``floor_value`` and 1.
    """
    if value <= anchors.full:
        return 1.0
    if value >= floor:
        return floor_value
    if anchors.scale == "log":
        share = math.log(value / anchors.full) / math.log(floor / anchors.full)
    else:
        share = (value - anchors.full) / (floor - anchors.full)
    return 1.0 - share * (1.0 - floor_value)


def deviation_ln(
    value: float,
    deviation: float,
    anchors: Anchors,
    floor: float,
    floor_value: float,
) -> float:
    """First-order standard deviation of ln desirability.

    Taken as half the difference over one standard deviation to either side, so that
    a value near an anchor counts the bend.
    """
    if not math.isfinite(deviation):
        return 0.0
    high = scaled(max(value - deviation, 0.0), anchors, floor, floor_value)
    low = scaled(value + deviation, anchors, floor, floor_value)
    return 0.5 * (math.log(high) - math.log(low))


def geometric_mean(values: Mapping[str, float], weights: Mapping[str, float]) -> float:
    """Weighted geometric mean; criteria that do not apply are simply absent.

    Parameters
    ----------
    values : mapping of criterion to float
        Desirabilities, above zero.
    weights : mapping of criterion to float
        Renormalised over the criteria present.

    Returns
    -------
    float
        0 when every weight of the criteria present is zero.
    """
    total = sum(weights[name] for name in values)
    if total <= 0.0:
        return 0.0
    mean = sum(weights[name] * math.log(values[name]) for name in values) / total
    return math.exp(mean)
