"""Electrostatic work of binding a proton to a charged macro-ion.

Linderstroem-Lang's model: the net charge Z of a protein is smeared over a sphere, on
which salt ions may come no closer than their own radius. Every group then titrates at

    pK = pK_int - (2 / ln 10) w Z,
    w = (l_B / 2) (1/R - kappa / (1 + kappa a)),  a = R + radius of a salt ion,

with 2/ln 10 = 0.868. It is a mean over the molecule: where the groups sit, and that
an antibody is a Y and no sphere, is left out, so that a part of what it misses stays.
"""

from __future__ import annotations

import math

from formbuf.chemistry.water import debye_huckel_slope, water_density_kg_l
from formbuf.constants import LN10
from formbuf.errors import InputError

#: Avogadro constant, exact (CODATA 2018), 1/mol.
AVOGADRO_PER_MOL = 6.02214076e23
#: Radius of a salt ion, by which it stays off the sphere [nm] (memory, Tanford 1961).
SALT_ION_RADIUS_NM = 0.25
#: Radius of the hydrated over that of the dry sphere. Judgement: it gives w of
#: ribonuclease as read from its titration (0.112, 0.093 and 0.061 at ionic strengths
#: of 0.01, 0.03 and 0.15 mol/L) within a tenth.
HYDRATION_FACTOR = 1.2
#: Temperature for which w is taken [C]; the Bjerrum length is 2.2 % less
#: at 5 C and 5 % more at 60 C.
WORK_TEMPERATURE_C = 25.0


def bjerrum_length_nm(temperature_c: float = WORK_TEMPERATURE_C) -> float:
    """Distance at which two unit charges in water interact by kT [nm].

    Parameters
    ----------
    temperature_c : float
        Temperature [C], 0 to 100.

    Returns
    -------
    float
        0.715 at 25 C, from the Debye-Hueckel slope: (A ln 10)^2 = 2 pi N l_B^3 rho.
    """
    slope = LN10 * float(debye_huckel_slope(temperature_c))
    per_m3 = AVOGADRO_PER_MOL * 1000.0 * float(water_density_kg_l(temperature_c))
    return 1e9 * math.cbrt(slope * slope / (2.0 * math.pi * per_m3))


def inverse_debye_length_per_nm(
    ionic_strength_mol_kg: float, temperature_c: float = WORK_TEMPERATURE_C
) -> float:
    """Return kappa [1/nm].

    Parameters
    ----------
    ionic_strength_mol_kg : float
    temperature_c : float
        Temperature [C], 0 to 100.

    Returns
    -------
    float
        3.29 sqrt(I) at 25 C: half the Bjerrum length times it is A ln 10 sqrt(I).
    """
    slope = LN10 * float(debye_huckel_slope(temperature_c))
    root = math.sqrt(ionic_strength_mol_kg)
    return 2.0 * slope * root / bjerrum_length_nm(temperature_c)


def hydrated_radius_nm(molar_mass_g_mol: float, volume_ml_g: float) -> float:
    """Radius of the sphere that stands for a protein with its water [nm].

    Parameters
    ----------
    molar_mass_g_mol : float
        Above 0.
    volume_ml_g : float
        Partial specific volume, above 0.

    Returns
    -------
    float
        1.90 for ribonuclease, 4.2 for an antibody.
    """
    volume_nm3 = 1e21 * molar_mass_g_mol * volume_ml_g / AVOGADRO_PER_MOL
    return HYDRATION_FACTOR * math.cbrt(3.0 * volume_nm3 / (4.0 * math.pi))


def work_factor(radius_nm: float, ionic_strength_mol_kg: float) -> float:
    """Electrostatic work factor w of a charged sphere at 25 C.

    Parameters
    ----------
    radius_nm : float
        Of the sphere [nm], above 0.
    ionic_strength_mol_kg : float
        0 or more.

    Returns
    -------
    float
        w [-], above 0.

    Raises
    ------
    InputError
        For a radius or ionic strength that cannot be meant.

    References
    ----------
    Linderstroem-Lang 1924, C. R. Trav. Lab. Carlsberg 15 (7); Tanford 1961, Physical
    Chemistry of Macromolecules, chapters 7 and 8 (memory).
    """
    if not (math.isfinite(radius_nm) and radius_nm > 0.0):
        msg = f"radius of {radius_nm:g} nm, allowed above 0"
        raise InputError(msg)
    if not (math.isfinite(ionic_strength_mol_kg) and ionic_strength_mol_kg >= 0.0):
        msg = f"ionic strength of {ionic_strength_mol_kg:g} mol/kg, allowed 0 or more"
        raise InputError(msg)
    kappa = inverse_debye_length_per_nm(ionic_strength_mol_kg)
    screened = kappa / (1.0 + kappa * (radius_nm + SALT_ION_RADIUS_NM))
    return 0.5 * bjerrum_length_nm() * (1.0 / radius_nm - screened)
