"""Osmolality of the whole solution, and the water that the solutes leave.

    osmolality = sum m_i  -  Debye-Hueckel part(I)
                 + ln 10 sum_pairs e(cation, anion) m_c m_a  +  sum_neutral b m^2

The Debye-Hueckel part is the integral of the activity model; one coefficient per
cation-anion pair and one per sugar or polyol are fitted to published freezing
points (``knowledge/osmotic.csv``). A pair without data has coefficient zero, which
reads 5 to 15 % high for single salts of multivalent anions at 0.3 osmol/kg.

The coefficients go with the Debye-Hueckel slope near 0 C, where a freezing-point
osmometer reads; taken at 25 C the result is about 0.5 % lower at 0.15 mol/kg.
"""

from __future__ import annotations

from collections.abc import Iterable, Mapping
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry import activity
from formbuf.chemistry.speciation import Particle
from formbuf.chemistry.water import ln_ice_activity, water_density_kg_l
from formbuf.constants import LN10, WATER_MOLAR_MASS_KG_MOL
from formbuf.errors import ConvergenceError, InputError

Array = NDArray[np.float64]

#: Expected error (one standard deviation, fraction of the osmolality) where the
#: coefficients were fitted, and of single salts with every pair coefficient left at
#: zero: residuals of the held rows of 0.1 to 0.6 osmol/kg, which a test recomputes.
EXPECTED_ERROR_FITTED = 0.02
EXPECTED_ERROR_UNFITTED = 0.07
#: Size of the coefficient of a pair without data [kg/mol]: the root mean square of
#: the fitted ones.
UNFITTED_PAIR_KG_MOL = 0.24

OSMOLALITY_LIMIT_MOSM_KG = 20000.0
FREEZING_CAP = 40


@dataclass(frozen=True, slots=True)
class OsmoticLaw:
    """Fitted coefficients of the osmotic coefficient.

    Attributes
    ----------
    pairs : mapping of (cation key, anion key) to float
        e [kg/mol]; keys as ``sodium:1`` and ``phosphate:-2``.
    neutrals : mapping of str to float
        b [kg/mol] of phi = 1 + b m; keys as ``sucrose``, and as ``acetate:0`` for the
        uncharged state of a component.
    """

    pairs: Mapping[tuple[str, str], float]
    neutrals: Mapping[str, float]


@dataclass(frozen=True, slots=True)
class Osmolality:
    """Result of ``osmolality``.

    Attributes
    ----------
    osmolality_mosm_kg : ndarray, shape (...)
    unfitted_pairs : tuple of (cation key, anion key)
        Pairs without data that carry more than 2 mmol/kg of both ions.
    expected_error_mosm_kg : ndarray, shape (...)
        One standard deviation: the error of fitted solutions, and that of the pairs
        without data by how much there is of them.
    """

    osmolality_mosm_kg: Array
    unfitted_pairs: tuple[tuple[str, str], ...]
    expected_error_mosm_kg: Array


def osmolality(
    dissolved: Iterable[Particle],
    neutrals_mol_kg: Mapping[str, ArrayLike],
    temperature_c: ArrayLike,
    law: OsmoticLaw,
) -> Osmolality:
    """Osmolality of a solution from everything dissolved in it.

    Parameters
    ----------
    dissolved : iterable of Particle
        Strong ions, protonation states and aggregates with their molalities.
    neutrals_mol_kg : mapping of str to array_like
        Sugars, polyols and other uncharged solutes [mol/kg water].
    temperature_c : array_like
        Temperature [C] of the Debye-Hueckel slope, 0 to 60; 0 for what a
        freezing-point osmometer reads.
    law : OsmoticLaw

    Returns
    -------
    Osmolality
        Valid to about 0.6 osmol/kg for salts, 1.5 osmol/kg for sugars.
    """
    ions = [p for p in dissolved if p.charge]
    plain = [p for p in dissolved if not p.charge]
    total: Array = np.zeros(())
    double_ionic: Array = np.zeros(())
    for p in plain:
        m = np.asarray(p.molality_mol_kg, dtype=float)
        total = total + m * (1.0 + law.neutrals.get(p.key, 0.0) * m)
    for p in ions:
        total = total + p.molality_mol_kg
        double_ionic = double_ionic + p.charge**2 * p.molality_mol_kg
    slope = activity.slope(temperature_c, "guggenheim")
    total = total - activity.osmotic_debye_huckel(slope, 0.5 * double_ionic)
    unfitted: list[tuple[str, str]] = []
    unknown: Array = np.zeros(())
    for cation in (p for p in ions if p.charge > 0):
        for anion in (p for p in ions if p.charge < 0):
            e = law.pairs.get((cation.key, anion.key))
            both = cation.molality_mol_kg * anion.molality_mol_kg
            if e is not None:
                total = total + LN10 * e * both
            elif _both_present(cation, anion):
                unfitted.append((cation.key, anion.key))
                unknown = unknown + LN10 * UNFITTED_PAIR_KG_MOL * both
    for name, amount in neutrals_mol_kg.items():
        m = np.asarray(amount, dtype=float)
        total = total + m * (1.0 + law.neutrals.get(name, 0.0) * m)
    error = np.hypot(EXPECTED_ERROR_FITTED * total, unknown)
    return Osmolality(1000.0 * total, tuple(unfitted), 1000.0 * error)


def _both_present(cation: Particle, anion: Particle) -> bool:
    least = np.minimum(cation.molality_mol_kg, anion.molality_mol_kg)
    return bool(np.max(least) > 0.002)


def osmolality_at_freezing_mosm_kg(freezing_point_c: ArrayLike) -> Array:
    """Osmolality of a solution that freezes at the given temperature.

    Parameters
    ----------
    freezing_point_c : array_like
        Freezing point [C], 0 to -40.

    Returns
    -------
    ndarray
        [mosmol/kg water] from the water activity of ice.
    """
    osmol: Array = -ln_ice_activity(freezing_point_c) / WATER_MOLAR_MASS_KG_MOL
    return 1000.0 * osmol


def freezing_point_c(osmolality_mosm_kg: ArrayLike) -> Array:
    """Temperature at which ice first forms, from the osmolality.

    Parameters
    ----------
    osmolality_mosm_kg : array_like
        [mosmol/kg water], 0 to about 15000; its own change on cooling is neglected.

    Returns
    -------
    ndarray
        Freezing point [C]; Newton's method on the ice relation, capped.

    Raises
    ------
    InputError
        Outside that range.
    ConvergenceError
        When the cap is reached.
    """
    wanted = np.asarray(osmolality_mosm_kg, dtype=float)
    if not np.all((wanted >= 0.0) & (wanted <= OSMOLALITY_LIMIT_MOSM_KG)):
        msg = (
            f"osmolality must lie between 0 and {OSMOLALITY_LIMIT_MOSM_KG:g} mosmol/kg"
        )
        raise InputError(msg)
    t: Array = -1.858e-3 * wanted
    for _ in range(FREEZING_CAP):
        gap = osmolality_at_freezing_mosm_kg(t) - wanted
        slope = (
            osmolality_at_freezing_mosm_kg(t - 0.01)
            - osmolality_at_freezing_mosm_kg(t + 0.01)
        ) / 0.02
        step = gap / slope
        t = t + step
        if not np.any(np.abs(step) > 1e-9):
            return t
    msg = f"no freezing point found for {float(np.max(wanted)):g} mosmol/kg"
    raise ConvergenceError(msg)


def water_kg_l(solute_volume_ml_l: ArrayLike, temperature_c: ArrayLike = 25.0) -> Array:
    """Water in one litre of solution.

    Parameters
    ----------
    solute_volume_ml_l : array_like
        Volume that the anhydrous solutes take up [mL per L of solution], 0 to 500.
    temperature_c : array_like
        Temperature at which the volume is measured [C].

    Returns
    -------
    ndarray
        [kg water per L of solution].

    Raises
    ------
    InputError
        When the solutes leave no room for water.
    """
    volume = np.asarray(solute_volume_ml_l, dtype=float)
    if not np.all((volume >= 0.0) & (volume < 1000.0)):
        msg = "the solutes must take up 0 to less than 1000 mL per litre"
        raise InputError(msg, hint="check the amounts; they leave no room for water")
    room = 1.0 - volume / 1000.0
    result: Array = water_density_kg_l(temperature_c) * room
    return result
