"""One state by nested root finding with scipy: slow, and nothing like our method.

Outer unknown: the root of the ionic strength; inner: pH; innermost, where a component
aggregates: its free monomer. Written from the equations, without our sums.
"""

from __future__ import annotations

from collections.abc import Sequence

import numpy as np
from numpy.typing import ArrayLike

from formbuf.chemistry.ionization import Ladder, log10_aggregate_constants, pk_at
from formbuf.chemistry.water import debye_huckel_slope, pkw


def solve(
    ladders: Sequence[Ladder],
    totals: ArrayLike,
    charge: float,
    charge2: float,
    temperature_c: float,
) -> tuple[float, float]:
    """PH and ionic strength [mol/kg] of one state."""
    from scipy.optimize import brentq

    a_slope = float(debye_huckel_slope(temperature_c))
    kw = 10.0 ** -float(pkw(temperature_c))
    data = [
        (ladder, pk_at(ladder, temperature_c), float(total))
        for ladder, total in zip(ladders, np.asarray(totals), strict=True)
    ]

    def sums(ph: float, ionic: float) -> tuple[float, float]:
        d = a_slope * np.sqrt(ionic) / (1.0 + 1.5 * np.sqrt(ionic))
        hydrogen = 10.0 ** (d - ph)
        hydroxide = kw * 10.0 ** (ph + d)
        z1, z2 = charge + hydrogen - hydroxide, charge2 + hydrogen + hydroxide
        for ladder, pks, total in data:
            for z, molality in _states(ladder, pks, total, ph, d, temperature_c):
                z1 += z * molality
                z2 += z * z * molality
        return float(z1), float(z2)

    def ph_at(ionic: float) -> float:
        return float(brentq(lambda ph: sums(ph, ionic)[0], -2.0, 16.0, xtol=1e-13))

    def gap(root: float) -> float:
        ionic = root * root
        return ionic - 0.5 * sums(ph_at(ionic), ionic)[1]

    high = 1.0
    while gap(high) < 0.0:
        high *= 2.0
    root = float(brentq(gap, 0.0, high, xtol=1e-14, rtol=1e-13))
    return ph_at(root * root), root * root


def _states(
    ladder: Ladder,
    pks: np.ndarray,
    total: float,
    ph: float,
    d: float,
    temperature_c: float,
) -> list[tuple[int, float]]:
    """Charge and molality of every state and aggregate of one component."""
    from scipy.optimize import brentq

    logs = np.concatenate([[0.0], np.cumsum(ph - pks)])
    first = ladder.charges[0]
    logs = logs + np.array([z * z - first * first for z in ladder.charges]) * d
    weights = 10.0**logs
    if not ladder.aggregates:
        parts = total * weights / weights.sum()
        return list(zip(ladder.charges, parts, strict=True))
    formed = log10_aggregate_constants(ladder, temperature_c)
    factors = [
        10.0 ** (log10_k - a.charge * ph + a.charge**2 * d)
        for a, log10_k in zip(ladder.aggregates, formed, strict=True)
    ]

    def excess(free: float) -> float:
        held = free * weights.sum()
        for a, f in zip(ladder.aggregates, factors, strict=True):
            held += a.units * f * free**a.units
        return float(held - total)

    free = 0.0
    if total > 0.0:
        free = float(brentq(excess, 0.0, total, xtol=1e-20, rtol=1e-14))
    found = list(zip(ladder.charges, free * weights, strict=True))
    found += [
        (a.charge, f * free**a.units)
        for a, f in zip(ladder.aggregates, factors, strict=True)
    ]
    return found
