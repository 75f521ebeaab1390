"""Activity coefficients of ions at formulation strength.

log10 gamma_i = -z_i^2 D,  D = A sqrt(I) / (1 + 1.5 sqrt(I)),

the Scatchard-Guggenheim form with the ion-size factor of the Bates-Guggenheim
convention, on which the pH of the standard buffers rests. Neutral molecules have
gamma = 1. pH is -log10 of the conventional hydrogen-ion activity. Good to about
0.5 mol/kg; concentrated brines are the business of the ion-interaction module.
"""

from __future__ import annotations

from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry.water import debye_huckel_slope
from formbuf.constants import LN10

Array = NDArray[np.float64]

#: ``guggenheim`` is the model of the tool; ``ideal`` sets every coefficient to one
#: (for textbook examples that do the same).
ActivityModel = Literal["guggenheim", "ideal"]

#: B a in the denominator, kg^0.5 mol^-0.5 (Bates & Guggenheim 1960, Pure Appl.
#: Chem. 1, 163; also the convention of the NEA thermochemical reviews).
ION_SIZE_FACTOR = 1.5


def slope(temperature_c: ArrayLike, model: ActivityModel) -> Array:
    """Return A [kg^0.5 mol^-0.5] at the temperatures [C]; zero for the ideal model."""
    if model == "ideal":
        return np.zeros_like(np.asarray(temperature_c, dtype=float))
    return debye_huckel_slope(temperature_c)


def unit_charge_term(a_slope: ArrayLike, root_ionic_strength: ArrayLike) -> Array:
    """Return D, minus log10 of the activity coefficient of a singly charged ion.

    Parameters
    ----------
    a_slope : array_like
        Debye-Hueckel slope A [kg^0.5 mol^-0.5].
    root_ionic_strength : array_like
        sqrt(I) [mol^0.5 kg^-0.5], 0 to about 0.7.

    Returns
    -------
    ndarray
        D [-]; multiply by z^2 for other charges.
    """
    root = np.asarray(root_ionic_strength, dtype=float)
    term: Array = np.asarray(a_slope) * root / (1.0 + ION_SIZE_FACTOR * root)
    return term


def log10_gamma(
    charge: ArrayLike, ionic_strength_mol_kg: ArrayLike, temperature_c: ArrayLike
) -> Array:
    """log10 of the activity coefficient of an ion.

    Parameters
    ----------
    charge : array_like
        Charge number.
    ionic_strength_mol_kg : array_like
        Ionic strength [mol/kg], 0 to 0.5.
    temperature_c : array_like
        Temperature [C].

    Returns
    -------
    ndarray
    """
    term = unit_charge_term(
        debye_huckel_slope(temperature_c), np.sqrt(ionic_strength_mol_kg)
    )
    result: Array = -(np.asarray(charge, dtype=float) ** 2) * term
    return result


def osmotic_debye_huckel(a_slope: ArrayLike, ionic_strength_mol_kg: ArrayLike) -> Array:
    """Debye-Hueckel part of (1 - phi) times the sum of ion molalities.

    The integrated form of the activity model through the Gibbs-Duhem relation.

    Parameters
    ----------
    a_slope : array_like
        Debye-Hueckel slope A of log10 gamma [kg^0.5 mol^-0.5].
    ionic_strength_mol_kg : array_like
        Ionic strength [mol/kg].

    Returns
    -------
    ndarray
        Osmoles lost to ion-ion attraction [osmol/kg], not negative.

    References
    ----------
    Robinson & Stokes, Electrolyte Solutions, 2nd ed. 1959, eq. 9.7 with B a = 1.5.
    """
    root = np.sqrt(np.asarray(ionic_strength_mol_kg, dtype=float))
    x = 1.0 + ION_SIZE_FACTOR * root
    bracket = x - 2.0 * np.log(x) - 1.0 / x
    lost: Array = 2.0 * np.asarray(a_slope) * LN10 / ION_SIZE_FACTOR**3 * bracket
    return lost
