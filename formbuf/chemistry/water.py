"""Properties of liquid water and ice that the solution models need.

Published formulations, one function each. Temperatures are in degrees Celsius
and may be scalars or arrays of any shape; results have the shape of the input.
The numbers typed here are those of the table ``knowledge/water_properties.csv``;
the knowledge check compares the two.
"""

from __future__ import annotations

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.constants import LN10, ZERO_CELSIUS_K

Array = NDArray[np.float64]

# Chebyshev coefficients of the osmotic Debye-Hueckel slope, 234 to 373 K, 1 atm;
# the first is already halved. Clegg, Rard & Pitzer 1994, J. Chem. Soc. Faraday
# Trans. 90, 1875, Appendix II, which reproduces Archer & Wang 1990.
OSMOTIC_SLOPE_CHEBYSHEV = (
    0.39862804062,
    0.0573389669896,
    0.000977632177788,
    0.00489973732417,
    -0.00313151784342,
    0.00179145971002,
    -0.000920584241844,
    0.000443862726879,
    -0.000203661129991,
    9.00924147948e-05,
    -3.88189392385e-05,
    1.64245088592e-05,
    -6.86031972567e-06,
    2.83455806377e-06,
    -1.15641433004e-06,
    4.61489672579e-07,
    -1.77069754948e-07,
    6.12464488231e-08,
    -1.75689013085e-08,
)

# Ionization of water: IAPWS R11-07 (Bandura & Lvov 2006, J. Phys. Chem. Ref.
# Data 35, 15), density in g/cm3, temperature in K.
PKW_N = 6
PKW_ALPHA = (-0.864671, 8659.19, -22786.2)
PKW_BETA = (0.642044, -56.8534, -0.375754)
PKW_GAMMA = (0.61415, 48251.33, -67707.93, 10102100.0)
PKW_MOLAR_MASS_G_MOL = 18.015268


def osmotic_slope(temperature_c: ArrayLike) -> Array:
    """Debye-Hueckel slope for the osmotic coefficient, A_phi.

    Parameters
    ----------
    temperature_c : array_like
        Temperature [C], valid -39 to 100.

    Returns
    -------
    ndarray
        A_phi [kg^0.5 mol^-0.5], natural-logarithm form (0.3915 at 25 C).

    References
    ----------
    Clegg, Rard & Pitzer 1994, J. Chem. Soc. Faraday Trans. 90, 1875, App. II.
    """
    kelvin = np.asarray(temperature_c, dtype=float) + ZERO_CELSIUS_K
    scaled = (2.0 * kelvin - 607.3) / 139.0
    slope = np.polynomial.chebyshev.chebval(scaled, OSMOTIC_SLOPE_CHEBYSHEV)
    return np.asarray(slope, dtype=float)


def debye_huckel_slope(temperature_c: ArrayLike) -> Array:
    """Debye-Hueckel slope of log10 of the activity coefficient, A = 3 A_phi / ln 10.

    Parameters
    ----------
    temperature_c : array_like
        Temperature [C], valid -39 to 100.

    Returns
    -------
    ndarray
        A [kg^0.5 mol^-0.5], molal scale, 1 atm (0.5100 at 25 C).

    References
    ----------
    Archer & Wang 1990, J. Phys. Chem. Ref. Data 19, 371, through the fit of
    Clegg, Rard & Pitzer 1994.
    """
    return 3.0 * osmotic_slope(temperature_c) / LN10


def water_density_kg_l(temperature_c: ArrayLike) -> Array:
    """Density of air-free liquid water at 1 atm.

    Parameters
    ----------
    temperature_c : array_like
        Temperature [C], valid 0 to 150; below 0 an extrapolation to -20.

    Returns
    -------
    ndarray
        Density [kg/L] (0.99705 at 25 C).

    References
    ----------
    Kell 1975, J. Chem. Eng. Data 20, 97, eq. 16 (coefficients recalled).
    """
    t = np.asarray(temperature_c, dtype=float)
    numerator = 999.83952 + t * (
        16.945176
        + t
        * (-7.9870401e-3 + t * (-46.170461e-6 + t * (105.56302e-9 - 280.54253e-12 * t)))
    )
    density: Array = numerator / (1.0 + 16.879850e-3 * t) / 1000.0
    return density


def pkw(temperature_c: ArrayLike) -> Array:
    """Negative log10 of the ionization product of water, molal scale.

    Parameters
    ----------
    temperature_c : array_like
        Temperature [C], valid 0 to 150 at ordinary pressure; below 0 an
        extrapolation.

    Returns
    -------
    ndarray
        pKw [-] (13.9945 at 25 C).

    References
    ----------
    IAPWS R11-07; Bandura & Lvov 2006, J. Phys. Chem. Ref. Data 35, 15.
    """
    t = np.asarray(temperature_c, dtype=float)
    kelvin = t + ZERO_CELSIUS_K
    density = water_density_kg_l(t)
    a0, a1, a2 = PKW_ALPHA
    b0, b1, b2 = PKW_BETA
    g0, g1, g2, g3 = PKW_GAMMA
    q = density * np.exp(a0 + a1 / kelvin + a2 / kelvin**2 * density ** (2.0 / 3.0))
    gas = g0 + g1 / kelvin + g2 / kelvin**2 + g3 / kelvin**3
    fraction = q / (q + 1.0) * density * (b0 + b1 / kelvin + b2 * density)
    value: Array = (
        -2.0 * PKW_N * (np.log10(1.0 + q) - fraction)
        + gas
        + 2.0 * np.log10(PKW_MOLAR_MASS_G_MOL / 1000.0)
    )
    return value


def ln_ice_activity(temperature_c: ArrayLike) -> Array:
    """Natural log of the water activity of a solution in equilibrium with ice.

    Ratio of the vapour pressures of ice and supercooled water, divided by its
    value at 0 C (0.99990 as published), so that pure water freezes at 0 C.

    Parameters
    ----------
    temperature_c : array_like
        Temperature [C], valid -150 to 0.

    Returns
    -------
    ndarray
        ln(a_w) [-], zero at 0 C and negative below.

    References
    ----------
    Murphy & Koop 2005, Q. J. R. Meteorol. Soc. 131, 1539, eqs. 7 and 10.
    """
    kelvin = np.asarray(temperature_c, dtype=float) + ZERO_CELSIUS_K
    return _ln_vapour_ratio(kelvin) - _ln_vapour_ratio(np.asarray(ZERO_CELSIUS_K))


def vapour_pressure_pa(temperature_c: ArrayLike) -> Array:
    """Vapour pressure of liquid water, supercooled below 0 C.

    Parameters
    ----------
    temperature_c : array_like
        Temperature [C], valid -150 to 59; 0.6 % high at 100.

    Returns
    -------
    ndarray
        Pressure [Pa] (3169 at 25 C).

    References
    ----------
    Murphy & Koop 2005, Q. J. R. Meteorol. Soc. 131, 1539, eq. 10.
    """
    kelvin = np.asarray(temperature_c, dtype=float) + ZERO_CELSIUS_K
    return np.exp(_ln_liquid_vapour(kelvin))


def _ln_liquid_vapour(kelvin: Array) -> Array:
    value: Array = (
        54.842763
        - 6763.22 / kelvin
        - 4.210 * np.log(kelvin)
        + 0.000367 * kelvin
        + np.tanh(0.0415 * (kelvin - 218.8))
        * (53.878 - 1331.22 / kelvin - 9.44523 * np.log(kelvin) + 0.014025 * kelvin)
    )
    return value


def _ln_vapour_ratio(kelvin: Array) -> Array:
    ice = 9.550426 - 5723.265 / kelvin + 3.53068 * np.log(kelvin) - 0.00728332 * kelvin
    ratio: Array = ice - _ln_liquid_vapour(kelvin)
    return ratio
