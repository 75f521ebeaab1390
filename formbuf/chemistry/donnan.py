"""Donnan equilibrium: what small solutes do on either side of a protein's membrane.

At equilibrium each small solute has the same electrochemical potential on both sides:

    log10 m' = log10 m + z L + z^2 (D' - D),

m and m' its molality outside and inside, z its charge, L the Donnan potential over
2.303 RT/F, D of the activity model. L follows from electroneutrality inside, where the
protein's own charge counts. pH inside is pH outside minus L. Molality counts per kg of
water, so that the volume which the protein takes up is excluded by itself. The protein
takes no part in the ionic strength.

Left out: binding of ions to the protein, its second virial coefficient, pressure.
"""

from __future__ import annotations

from collections.abc import Sequence
from dataclasses import dataclass

import numpy as np

from formbuf.chemistry import activity
from formbuf.chemistry.activity import ActivityModel
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.macro_charge import charge_and_variance
from formbuf.constants import GAS_CONSTANT_J_MOL_K, LN10, ZERO_CELSIUS_K
from formbuf.errors import ConvergenceError, InputError

#: Faraday constant, exact (CODATA 2018), C/mol.
FARADAY_C_MOL = 96485.33212331
#: Largest shift of pH across the membrane that is looked for.
SHIFT_LIMIT = 8.0
BISECTIONS = 80
IONIC_STRENGTH_CAP = 200
TOLERANCE_MOL_KG = 1e-12


@dataclass(frozen=True, slots=True)
class Solute:
    """One kind of small particle on the side that is known.

    Attributes
    ----------
    name : str
    charge : int
    molality_mol_kg : float
    """

    name: str
    charge: int
    molality_mol_kg: float


@dataclass(frozen=True, slots=True)
class Partition:
    """The other side of the membrane.

    Attributes
    ----------
    shift : float
        L: what pH loses on the way, and what each positive charge gains in log10.
    ph : float
    molality_mol_kg : tuple of float
        Of each solute, in the order given.
    ionic_strength_mol_kg : float
    unit_charge_term : float
        D of the other side.
    protein_charge : float
        Charges per molecule there; 0 without a protein.
    potential_mv : float
        Of the other side against the known one [mV].
    """

    shift: float
    ph: float
    molality_mol_kg: tuple[float, ...]
    ionic_strength_mol_kg: float
    unit_charge_term: float
    protein_charge: float
    potential_mv: float


def partition(
    solutes: Sequence[Solute],
    ph: float,
    temperature_c: float,
    *,
    protein: Ladder | None = None,
    protein_mol_kg: float = 0.0,
    model: ActivityModel = "guggenheim",
) -> Partition:
    """Bring small solutes into equilibrium across a membrane.

    Parameters
    ----------
    solutes : sequence of Solute
        Every small particle of the known side, hydrogen and hydroxide ions included.
        Where the known side holds the protein, its charge is what is missing to
        neutrality, and the other side has none.
    ph : float
        pH of the known side.
    temperature_c : float
        Temperature [C], 0 to 60.
    protein : Ladder, optional
        Macro-ion on the other side.
    protein_mol_kg : float
        Its molality there [mol/kg water].
    model : {"guggenheim", "ideal"}

    Returns
    -------
    Partition

    Raises
    ------
    InputError
        For a protein that is no macro-ion, or a negative molality.
    ConvergenceError
        Where no shift within 8 pH units makes the other side neutral.

    References
    ----------
    Donnan 1911, Z. Elektrochem. 17, 572; in the form with activity coefficients.
    """
    z = np.array([s.charge for s in solutes], dtype=float)
    m = np.array([s.molality_mol_kg for s in solutes], dtype=float)
    if np.any(m < 0.0) or not np.all(np.isfinite(m)) or protein_mol_kg < 0.0:
        msg = "molalities on a side of a membrane must be 0 or more"
        raise InputError(msg)
    a_slope = float(activity.slope(temperature_c, model))
    d_known = _d(a_slope, 0.5 * float(z**2 @ m))

    def other_side(shift: float) -> tuple[np.ndarray, float, float, float]:
        inside, d = _other_molality(z, m, d_known, shift, a_slope)
        charge = _protein_charge(protein, ph - shift, temperature_c)
        return inside, d, charge, float(z @ inside) + protein_mol_kg * charge

    low, high = -SHIFT_LIMIT, SHIFT_LIMIT
    if not other_side(low)[3] <= 0.0 <= other_side(high)[3]:
        msg = (
            f"no Donnan equilibrium within {SHIFT_LIMIT:g} pH units of pH {ph:.2f} for "
            f"{protein_mol_kg:.3g} mol/kg of protein"
        )
        raise ConvergenceError(msg, hint="check the charge and the salt")
    for _ in range(BISECTIONS):
        middle = 0.5 * (low + high)
        if other_side(middle)[3] > 0.0:
            high = middle
        else:
            low = middle
    shift = 0.5 * (low + high)
    inside, d, charge, left = other_side(shift)
    if abs(left) > max(TOLERANCE_MOL_KG, 1e-9 * float(np.abs(z) @ inside)):
        msg = f"Donnan equilibrium left a charge of {left:.1e} mol/kg at pH {ph:.2f}"
        raise ConvergenceError(msg)
    kelvin = temperature_c + ZERO_CELSIUS_K
    per_unit_mv = 1000.0 * LN10 * GAS_CONSTANT_J_MOL_K * kelvin / FARADAY_C_MOL
    return Partition(
        shift,
        ph - shift,
        tuple(float(x) for x in inside),
        0.5 * float(z**2 @ inside),
        d,
        charge,
        -shift * per_unit_mv,
    )


def _d(a_slope: float, ionic_strength: float) -> float:
    return float(activity.unit_charge_term(a_slope, np.sqrt(ionic_strength)))


def _other_molality(
    z: np.ndarray, m: np.ndarray, d_known: float, shift: float, a_slope: float
) -> tuple[np.ndarray, float]:
    """Molalities across the membrane at a shift, with D settled by bisection."""
    steered = m * 10.0 ** (z * shift)
    if a_slope == 0.0:
        return steered, 0.0
    low, high = 0.0, a_slope / activity.ION_SIZE_FACTOR

    def gap(d: float) -> float:
        inside = steered * 10.0 ** (z**2 * (d - d_known))
        return _d(a_slope, 0.5 * float(z**2 @ inside)) - d

    for _ in range(IONIC_STRENGTH_CAP):
        middle = 0.5 * (low + high)
        if gap(middle) > 0.0:
            low = middle
        else:
            high = middle
        if high - low < 1e-15:
            break
    d = 0.5 * (low + high)
    return steered * 10.0 ** (z**2 * (d - d_known)), d


def _protein_charge(protein: Ladder | None, ph: float, temperature_c: float) -> float:
    if protein is None:
        return 0.0
    return float(charge_and_variance(protein, ph, temperature_c)[0])
