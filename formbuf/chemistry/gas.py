"""Carbon dioxide between a solution and the gas above it.

Henry's constant in its solubility form, H = c / p, with its temperature
coefficient: H(T) = H(25 C) exp(C (1/T - 1/T0)). Dissolved carbon dioxide stands for
CO2(aq) and carbonic acid together, which is the first state of the carbonate
ladder; its activity coefficient is one. A solution open to a gas is solved with
``open_components=("carbonate",)`` and the molality that ``dissolved_mol_kg`` gives.

Left out: salting out (carbon dioxide dissolves about 3 % less in 0.15 mol/kg of
sodium chloride) and the fugacity coefficient of the gas (0.5 % at 1 bar).
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry.equilibrium import Solution
from formbuf.chemistry.ionization import Ladder, state_fractions
from formbuf.chemistry.water import vapour_pressure_pa, water_density_kg_l
from formbuf.constants import (
    GAS_CONSTANT_J_MOL_K,
    REFERENCE_TEMPERATURE_K,
    STANDARD_PRESSURE_PA,
    ZERO_CELSIUS_K,
)
from formbuf.errors import InputError

Array = NDArray[np.float64]

#: Name of the ladder whose first state is dissolved carbon dioxide.
CARBONATE = "carbonate"


@dataclass(frozen=True, slots=True)
class HenryLaw:
    """Solubility of carbon dioxide in water.

    Attributes
    ----------
    solubility_mol_m3_pa : float
        H at 25 C [mol m^-3 Pa^-1], per volume of water.
    temperature_coefficient_k : float
        d ln H / d(1/T) [K].
    """

    solubility_mol_m3_pa: float
    temperature_coefficient_k: float


#: The numbers of ``knowledge/carbon_dioxide.csv``, from Sander 2023, Atmos. Chem.
#: Phys. 23, 10901; a test compares the two.
CARBON_DIOXIDE = HenryLaw(3.3e-4, 2400.0)


def henry_mol_kg_pa(temperature_c: ArrayLike, law: HenryLaw = CARBON_DIOXIDE) -> Array:
    """Molality of dissolved carbon dioxide over its pressure.

    Parameters
    ----------
    temperature_c : array_like
        Temperature [C], valid 0 to about 60.
    law : HenryLaw

    Returns
    -------
    ndarray
        [mol kg^-1 Pa^-1] (3.31e-7 at 25 C).

    References
    ----------
    Sander 2023, Atmos. Chem. Phys. 23, 10901.
    """
    kelvin = np.asarray(temperature_c, dtype=float) + ZERO_CELSIUS_K
    exponent = law.temperature_coefficient_k * (
        1.0 / kelvin - 1.0 / REFERENCE_TEMPERATURE_K
    )
    per_litre = law.solubility_mol_m3_pa / 1000.0 * np.exp(exponent)
    molal: Array = per_litre / water_density_kg_l(temperature_c)
    return molal


def dissolved_mol_kg(
    pressure_pa: ArrayLike, temperature_c: ArrayLike, law: HenryLaw = CARBON_DIOXIDE
) -> Array:
    """Molality of dissolved carbon dioxide under a pressure of the gas.

    Parameters
    ----------
    pressure_pa : array_like
        Partial pressure of carbon dioxide [Pa], 0 to about 500 000.
    temperature_c : array_like
        Temperature [C], valid 0 to about 60.
    law : HenryLaw

    Returns
    -------
    ndarray
        [mol/kg water] (1.4e-5 under air at 25 C).

    Raises
    ------
    InputError
        For a pressure that is negative or not finite.
    """
    molal: Array = _not_negative(
        "the pressure of carbon dioxide", pressure_pa
    ) * henry_mol_kg_pa(temperature_c, law)
    return molal


def pressure_pa(
    dissolved_mol_kg: ArrayLike,
    temperature_c: ArrayLike,
    law: HenryLaw = CARBON_DIOXIDE,
) -> Array:
    """Pressure of carbon dioxide above a solution; the inverse of the above.

    Parameters
    ----------
    dissolved_mol_kg : array_like
        Molality of dissolved carbon dioxide, the first state of carbonate [mol/kg].
    temperature_c : array_like
        Temperature [C], valid 0 to about 60.
    law : HenryLaw

    Returns
    -------
    ndarray
        Partial pressure [Pa].

    Raises
    ------
    InputError
        For a molality that is negative or not finite.
    """
    pressure: Array = _not_negative(
        "dissolved carbon dioxide", dissolved_mol_kg
    ) / henry_mol_kg_pa(temperature_c, law)
    return pressure


def implied_pressure_pa(
    ladders: Sequence[Ladder],
    totals_mol_kg: ArrayLike,
    temperature_c: ArrayLike,
    solution: Solution,
    law: HenryLaw = CARBON_DIOXIDE,
) -> Array:
    """Pressure of carbon dioxide that a closed carbonate solution builds up.

    Parameters
    ----------
    ladders, totals_mol_kg, temperature_c
        The mixture, as for ``formbuf.chemistry.equilibrium.solve``; carbonate closed.
    solution : Solution
        The solved mixture.
    law : HenryLaw

    Returns
    -------
    ndarray, shape (...)
        Partial pressure [Pa] with no headspace; 0 without carbonate.
    """
    names = [ladder.name for ladder in ladders]
    if CARBONATE not in names:
        return np.zeros_like(solution.ph)
    j = names.index(CARBONATE)
    fractions = state_fractions(
        ladders[j], solution.ph, temperature_c, solution.unit_charge_term
    )
    total = np.asarray(totals_mol_kg, dtype=float)[..., j]
    return pressure_pa(total * fractions[..., 0], temperature_c, law)


def headspace_pressure_pa(
    dissolved_mol_kg: ArrayLike,
    headspace_ratio: ArrayLike,
    temperature_c: ArrayLike,
    law: HenryLaw = CARBON_DIOXIDE,
) -> Array:
    """Pressure once dissolved carbon dioxide has shared itself with a closed headspace.

    What bicarbonate gives off meanwhile is not counted: right for a solution acid
    enough to hold little of it (pH below about 5), too low for others.

    Parameters
    ----------
    dissolved_mol_kg : array_like
        Dissolved carbon dioxide before any has left [mol/kg water].
    headspace_ratio : array_like
        Volume of gas over volume of liquid, 0 or more.
    temperature_c : array_like
        Temperature [C].
    law : HenryLaw

    Returns
    -------
    ndarray
        Partial pressure [Pa].

    Raises
    ------
    InputError
        For an amount or a ratio that is negative or not finite.
    """
    ratio = _not_negative("the ratio of headspace to liquid", headspace_ratio)
    kelvin = np.asarray(temperature_c, dtype=float) + ZERO_CELSIUS_K
    litres_kg = ratio / water_density_kg_l(temperature_c)
    in_gas_mol_kg_pa = litres_kg / 1000.0 / (GAS_CONSTANT_J_MOL_K * kelvin)
    pressure: Array = _not_negative("dissolved carbon dioxide", dissolved_mol_kg) / (
        henry_mol_kg_pa(temperature_c, law) + in_gas_mol_kg_pa
    )
    return pressure


def absorbed_acid_mol_kg(
    ladder: Ladder,
    pressure_pa: ArrayLike,
    ph: ArrayLike,
    temperature_c: ArrayLike,
    unit_charge_term: ArrayLike = 0.0,
    law: HenryLaw = CARBON_DIOXIDE,
) -> Array:
    """Acid that carbon dioxide brings to a solution held at a pH under a gas.

    Parameters
    ----------
    ladder : Ladder
        Carbonate; its first state is dissolved carbon dioxide.
    pressure_pa : array_like
        Partial pressure of carbon dioxide [Pa].
    ph : array_like
        pH at which the solution is held.
    temperature_c : array_like
        Temperature [C].
    unit_charge_term : array_like
        D of the activity model; 0 for I = 0.
    law : HenryLaw

    Returns
    -------
    ndarray
        Negative charge on bicarbonate and carbonate at equilibrium with the gas
        [mol/kg water], which is the strong acid of the same effect.
    """
    fractions = state_fractions(ladder, ph, temperature_c, unit_charge_term)
    charges = np.asarray(ladder.charges, dtype=float)
    per_free = -(fractions @ charges) / fractions[..., 0]
    acid: Array = per_free * dissolved_mol_kg(pressure_pa, temperature_c, law)
    return acid


def air_pressure_pa(
    air_fraction: float,
    temperature_c: ArrayLike,
    total_pressure_pa: float = STANDARD_PRESSURE_PA,
) -> Array:
    """Partial pressure of carbon dioxide in air saturated with water vapour.

    Parameters
    ----------
    air_fraction : float
        Mole fraction of carbon dioxide in dry air, 0 to 1.
    temperature_c : array_like
        Temperature [C], 0 to 100.
    total_pressure_pa : float
        Pressure of the air [Pa].

    Returns
    -------
    ndarray
        [Pa] (41.7 at 25 C for a fraction of 0.000425).

    Raises
    ------
    InputError
        For a fraction outside 0 to 1.
    """
    if not 0.0 <= air_fraction <= 1.0:
        msg = f"mole fraction of carbon dioxide of {air_fraction:g}: allowed are 0 to 1"
        raise InputError(msg)
    dry = np.maximum(total_pressure_pa - vapour_pressure_pa(temperature_c), 0.0)
    pressure: Array = air_fraction * dry
    return pressure


def _not_negative(label: str, values: ArrayLike) -> Array:
    numbers = np.asarray(values, dtype=float)
    if not np.all((numbers >= 0.0) & np.isfinite(numbers)):
        msg = f"{label} must be a number of 0 or more"
        raise InputError(msg)
    return numbers
