"""Curves of the finalists: capacity against pH, and pH against temperature.

Everything that buffers in the whole product counts. The capacity curve keeps the
product as made and moves its pH with strong acid or base, so that the ionic strength
moves along.
"""

from __future__ import annotations

from typing import Any

import numpy as np
from numpy.typing import NDArray

from formbuf.advice.results import Candidate, Shortlist
from formbuf.chemistry.titration import STRONG_ACID, STRONG_BASE
from formbuf.product.composition import Mixture

Array = NDArray[np.float64]

#: pH on either side of the target, and points.
HALF_WIDTH_PH, POINTS = 2.0, 81
LOWEST_PH, HIGHEST_PH = 2.0, 12.0
#: Temperatures shown, C; wider where the brief asks for more.
COLDEST_C, WARMEST_C, STEP_C = 0.0, 40.0, 1.0
#: Warmest temperature shown in the curve, C; a steriliser is left to the table.
WARMEST_SHOWN_C = 60.0


def curves(result: Shortlist, shown: list[Candidate]) -> dict[str, Any]:
    """Return the curves of some candidates as plain data.

    Parameters
    ----------
    result : Shortlist
    shown : list of Candidate
        Those without a mixture are left out.
    """
    ph = capacity_grid(result)
    at = temperature_grid(result)
    measure_c = result.brief.ph.measure_temperature_c
    capacity, temperature = [], []
    for c in shown:
        if c.mixture is None:
            continue
        capacity.append(
            {
                "system": c.key,
                "capacity_mmol_l_ph": capacity_curve(c.mixture, ph, measure_c).tolist(),
            }
        )
        if c.states:
            solved = c.mixture.solve(at)
            temperature.append({"system": c.key, "ph": solved.ph.tolist()})
    return {
        "capacity": {
            "temperature_c": measure_c,
            "ph": ph.tolist(),
            "series": capacity,
        },
        "temperature": {"temperature_c": at.tolist(), "series": temperature},
    }


def capacity_grid(result: Shortlist) -> Array:
    """Return the pH values of the capacity curve."""
    ph = result.brief.ph
    low = max(min(ph.target - HALF_WIDTH_PH, ph.low - 0.5), LOWEST_PH)
    high = min(max(ph.target + HALF_WIDTH_PH, ph.high + 0.5), HIGHEST_PH)
    return np.linspace(low, high, POINTS)


def temperature_grid(result: Shortlist) -> Array:
    """Return the temperatures of the pH curve [C]."""
    wanted = [
        s.temperature_c
        for c in result.candidates
        for s in c.states
        if COLDEST_C <= s.temperature_c <= WARMEST_SHOWN_C
    ]
    warmest = max([WARMEST_C, *wanted])
    count = int(np.ceil((warmest - COLDEST_C) / STEP_C))
    return np.asarray(COLDEST_C + STEP_C * np.arange(count + 1), dtype=np.float64)


def capacity_curve(mixture: Mixture, ph: Array, temperature_c: float) -> Array:
    """Return the capacity of a product moved along pH [mmol/L per pH].

    Parameters
    ----------
    mixture : Mixture
        A single state.
    ph : ndarray, shape (n,)
    temperature_c : float

    Returns
    -------
    ndarray, shape (n,)
    """
    start = float(mixture.solve(temperature_c).ph)
    down, up = np.minimum(ph, start), np.maximum(ph, start)
    acid = mixture.titrate(temperature_c, down, STRONG_ACID).amount_mol_kg
    base = mixture.titrate(temperature_c, up, STRONG_BASE).amount_mol_kg
    moved = mixture.with_ion("chloride", -1, acid).with_ion("sodium", 1, base)
    solved = moved.solve(np.full(ph.shape, temperature_c))
    beta: Array = moved.capacity_mmol_l_ph(solved)
    return beta
