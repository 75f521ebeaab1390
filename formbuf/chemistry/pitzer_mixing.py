"""Electrostatic mixing of like-signed ions of unequal charge.

The higher-order limiting law of Pitzer 1975 that the ion-interaction equations add
to theta whenever, for example, singly and doubly charged anions share a brine.
"""

from __future__ import annotations

from functools import cache

import numpy as np
from numpy.typing import ArrayLike, NDArray

Array = NDArray[np.float64]


# Chebyshev coefficients of J(x) for x below and above 1 (first one halved in use).
# Harvie 1981, thesis, as printed in Pitzer 1991, Activity Coefficients in
# Electrolyte Solutions, 2nd ed., ch. 3, appendix B; recalled, and checked against
# the integral itself in the tests (within 1e-7 between 0.1 and 300).
_BELOW_ONE = (
    1.925154014814667,
    -0.060076477753119,
    -0.029779077456514,
    -0.007299499690937,
    0.000388260636404,
    0.000636874599598,
    0.000036583601823,
    -0.000045036975204,
    -0.000004537895710,
    0.000002937706971,
    0.000000396566462,
    -0.000000202099617,
    -0.000000025267769,
    0.000000013522610,
    0.000000001229405,
    -0.000000000821969,
    -0.000000000050847,
    0.000000000046333,
    0.000000000001943,
    -0.000000000002563,
    -0.000000000010991,
)
_ABOVE_ONE = (
    0.628023320520852,
    0.462762985338493,
    0.150044637187895,
    -0.028796057604906,
    -0.036552745910311,
    -0.001668087945272,
    0.006519840398744,
    0.001130378079086,
    -0.000887171310131,
    -0.000242107641309,
    0.000087294451594,
    0.000034682122751,
    -0.000004583768938,
    -0.000003548684306,
    -0.000000250453880,
    0.000000216991779,
    0.000000080779570,
    0.000000004558555,
    -0.000000006944757,
    -0.000000002849257,
    0.000000000237816,
)
#: The table of J runs over this range of ln x with this many points.
_LN_LOW, _LN_HIGH, _POINTS = -14.0, 9.0, 2301


@cache
def _table() -> tuple[Array, Array]:
    """Return J and x dJ/dx on an even grid of ln x."""
    x = np.exp(np.linspace(_LN_LOW, _LN_HIGH, _POINTS))
    low = np.minimum(x, 1.0)
    high = np.maximum(x, 1.0)
    parts = []
    for coefficients, z, dz in (
        (_BELOW_ONE, 2.0 * low**0.2 - 1.0, 0.4 * low**0.2),
        (_ABOVE_ONE, (20.0 * high**-0.1 - 11.0) / 9.0, -2.0 / 9.0 * high**-0.1),
    ):
        series = np.polynomial.Chebyshev((0.5 * coefficients[0], *coefficients[1:]))
        parts.append((series(z), series.deriv()(z) * dz))
    below = x <= 1.0
    j = 0.25 * x - 1.0 + np.where(below, parts[0][0], parts[1][0])
    slope = 0.25 * x + np.where(below, parts[0][1], parts[1][1])
    return j, slope


def electrostatic_integral(x: ArrayLike) -> tuple[Array, Array]:
    """Pitzer's J(x), the integral of the electrostatic mixing term, and its slope.

    Parameters
    ----------
    x : array_like
        6 z_i z_j A_phi sqrt(I) [-], positive, up to 8000; below 1e-6 counts as 1e-6.

    Returns
    -------
    j, dj_dlnx : ndarray
        J and x dJ/dx, from a table with cubic interpolation (within 1e-7).

    References
    ----------
    Pitzer 1975, J. Solution Chem. 4, 249, eqs. 14 and 16; series of Harvie 1981.
    """
    values, slopes = _table()
    step = (_LN_HIGH - _LN_LOW) / (_POINTS - 1)
    place = (np.log(np.maximum(x, 1e-6)) - _LN_LOW) / step
    i = np.minimum(place.astype(np.intp), _POINTS - 2)
    t = place - i
    y0, y1 = values[i], values[i + 1]
    d0, d1 = step * slopes[i], step * slopes[i + 1]
    rise = y1 - y0
    c2 = 3.0 * rise - 2.0 * d0 - d1
    c3 = d0 + d1 - 2.0 * rise
    j: Array = y0 + t * (d0 + t * (c2 + t * c3))
    slope: Array = (d0 + t * (2.0 * c2 + 3.0 * t * c3)) / step
    return j, slope


class MixingCharges:
    """Electrostatic mixing between like-signed ions of unequal charge."""

    def __init__(self, charges: Array) -> None:
        self._kinds: list[tuple[float, float, Array, Array]] = []
        for sign in (1.0, -1.0):
            sizes = sorted({z * sign for z in charges if z * sign > 0})
            for a, low in enumerate(sizes):
                for high in sizes[a + 1 :]:
                    self._kinds.append(
                        (low, high, charges == sign * low, charges == sign * high)
                    )
        products = {x for low, high, _, _ in self._kinds for x in _products(low, high)}
        self._products = np.array(sorted(products))
        self._place = {float(x): i for i, x in enumerate(self._products)}

    def at(
        self, a_phi: float, root: Array, m: Array
    ) -> tuple[Array | None, Array | None]:
        """Return sum_j E-theta_ij m_j per species and the pair sum of its slope."""
        if not self._kinds:
            return None, None
        ionic = root * root
        x = 6.0 * a_phi * root[..., np.newaxis] * self._products
        j, xdj = electrostatic_integral(x)
        electro = np.zeros_like(m)
        slope_sum = np.zeros_like(root)
        for low, high, is_low, is_high in self._kinds:
            mixed, one, other = (self._place[v] for v in _products(low, high))
            scale = 0.25 * low * high / ionic
            value = scale * (j[..., mixed] - 0.5 * (j[..., one] + j[..., other]))
            change = (
                0.5
                * scale
                * (xdj[..., mixed] - 0.5 * (xdj[..., one] + xdj[..., other]))
            )
            slope = (change - value) / ionic
            total_low = m[..., is_low].sum(axis=-1)
            total_high = m[..., is_high].sum(axis=-1)
            electro[..., is_low] += (value * total_high)[..., np.newaxis]
            electro[..., is_high] += (value * total_low)[..., np.newaxis]
            slope_sum += slope * total_low * total_high
        return electro, slope_sum


def _products(low: float, high: float) -> tuple[float, float, float]:
    return low * high, low * low, high * high
