"""Proteins as macro-ions: from residues, from a charge, or from a measured titration.

Residues: groups with the pK of model peptides, read in 0.1 mol/L of salt, that act on
each other through the net charge of the molecule (``formbuf.chemistry.macro_work``).
At pH 5 the capacity of an antibody is then 0.88 times the published one in little salt
and 1.01 times in 0.15 mol/kg; without that term it was 2.3 times. The model smears the
charge over a sphere, which an antibody, a Y, is not; where groups sit, ions that bind
and other groups (glycans, phosphates) are left out. Since bound anions count in a
measured charge, not in the protons taken up, the net charge still exceeds what
electrophoresis finds. A measured titration is worth more.
"""

from __future__ import annotations

from collections.abc import Mapping, Sequence
from typing import Literal

import numpy as np
from numpy.typing import ArrayLike, NDArray

from formbuf.chemistry import macro_ion
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.macro_charge import charge_and_variance
from formbuf.chemistry.macro_ion import Sites, curve_through
from formbuf.chemistry.macro_work import hydrated_radius_nm, work_factor
from formbuf.constants import LN10
from formbuf.errors import InputError, UnknownNameError
from formbuf.library import Library
from formbuf.library.tables import Column, Schema

Array = NDArray[np.float64]
PkSet = Literal["model_peptide", "folded_average"]

#: Range of pH over which a straight line through two charges is drawn.
LINE_PH = (-2.0, 16.0)
#: Molar mass taken where none is known; it counts particles and gives the size of the
#: molecule [g/mol] (judgement).
NOMINAL_MASS_G_MOL = 100_000.0
BISECTIONS = 60

ENTHALPIES = Schema(
    "side_chain_enthalpies.csv",
    (
        Column("group", "id", required=True),
        Column("species", "id", required=True, refers_to="species.csv"),
        Column("step", "integer", required=True, low=1, high=12),
        Column("basis", required=True, choices=("judgement",)),
        Column("note"),
    ),
    ("group",),
)


def ladder_from_groups(
    library: Library,
    groups: Mapping[str, float],
    *,
    name: str = "drug",
    pk_set: PkSet = "model_peptide",
    work: float = 0.0,
) -> Ladder:
    """Return a protein as groups that act on each other through the net charge.

    Parameters
    ----------
    library : Library
    groups : mapping of str to float
        Groups per molecule by the names of ``side_chains.csv``.
    name : str
        Name of the component.
    pk_set : {"model_peptide", "folded_average"}
        Thurlkill et al. 2006 (model pentapeptides) or Grimsley et al. 2009 (averages
        over folded proteins).
    work : float
        Electrostatic work factor, see ``protein_work``; 0 for independent groups.

    Returns
    -------
    Ladder
        Enthalpies are those of the same group in the free amino acid or a dipeptide;
        NaN for tyrosine and arginine.

    Raises
    ------
    UnknownNameError
        For a group that the table does not hold.
    InputError
        Where no group is counted.
    """
    known = library.side_chains
    unknown = next((group for group in groups if group not in known), None)
    if unknown is not None:
        raise UnknownNameError("group", unknown, known, where="drug.residues")
    counted = {group: count for group, count in groups.items() if count > 0.0}
    if not counted:
        msg = "the protein has no ionisable group, allowed at least one"
        raise InputError(msg, hint=f"groups are {', '.join(known)}")
    heats = _enthalpies(library)
    chains = [known[group] for group in counted]
    return Ladder(
        name,
        0,
        tuple(
            (
                c.pk_model_peptide if pk_set == "model_peptide" else c.pk_folded_average
            ).value
            for c in chains
        ),
        tuple(heats.get(c.group, (np.nan, 0.0))[0] for c in chains),
        tuple(heats.get(c.group, (np.nan, 0.0))[1] for c in chains),
        sites=tuple(Sites(counted[c.group], c.acid_charge) for c in chains),
        work=work,
    )


def protein_work(
    library: Library, molar_mass_g_mol: float, ionic_strength_mol_kg: float
) -> float:
    """Return the electrostatic work factor of a protein as a hydrated sphere at 25 C.

    Parameters
    ----------
    library : Library
        For the partial specific volume of proteins.
    molar_mass_g_mol : float
        Above 0.
    ionic_strength_mol_kg : float
        Of the product, 0 or more.

    Returns
    -------
    float
        w [-]; 0.031 for an antibody at 0.02 mol/kg, 0.017 at 0.15.
    """
    volume = library.partial_volumes["protein"].volume_ml_g.value
    radius = hydrated_radius_nm(molar_mass_g_mol, volume)
    return work_factor(radius, ionic_strength_mol_kg)


def _enthalpies(library: Library) -> dict[str, tuple[float, float]]:
    """Enthalpy [kJ/mol] and heat capacity [J/(mol K)] of ionization by group."""
    found: dict[str, tuple[float, float]] = {}
    for row in library.read_table(ENTHALPIES):
        number = row.integer("step")
        for step in library.species[row.text("species")].steps:
            if step.step == number and step.dh_kj_mol is not None:
                dcp = step.dcp_j_mol_k.value if step.dcp_j_mol_k else 0.0
                found[row.text("group")] = (step.dh_kj_mol.value, dcp)
    return found


def ladder_from_charge(
    isoelectric_point: float, net_charge: float, ph: float, *, name: str = "drug"
) -> Ladder:
    """Return a protein whose charge is a straight line through two points.

    Parameters
    ----------
    isoelectric_point : float
        pH of no net charge.
    net_charge : float
        Charges per molecule at ``ph``.
    ph : float
    name : str

    Returns
    -------
    Ladder

    Raises
    ------
    InputError
        Where charge and pH lie on the wrong sides of the isoelectric point.
    """
    if abs(ph - isoelectric_point) < 0.05 or net_charge * (isoelectric_point - ph) <= 0:
        msg = (
            f"net charge {net_charge:g} at pH {ph:g} with isoelectric point "
            f"{isoelectric_point:g}: allowed positive below it, negative above it, at "
            "least 0.05 away"
        )
        raise InputError(msg)
    slope = net_charge / (ph - isoelectric_point)
    charges = [slope * (end - isoelectric_point) for end in LINE_PH]
    return Ladder.of_curve(name, curve_through(LINE_PH, charges))


def ladder_from_titration(
    ph: Sequence[float],
    base_mol_mol: Sequence[float],
    *,
    isoelectric_point: float | None = None,
    name: str = "drug",
) -> Ladder:
    """Return a protein known by a measured titration.

    Parameters
    ----------
    ph : sequence of float
        Rising.
    base_mol_mol : sequence of float
        Strong base bound per mole of protein (negative: acid), rising with pH.
    isoelectric_point : float, optional
        Where the charge is zero; without it, or outside the points, the charge is
        counted from where no base was added (or from the first point).
    name : str

    Returns
    -------
    Ladder
        Beyond the measured points the charge stays as it is.

    Raises
    ------
    InputError
        For fewer than two points or readings that do not rise.
    """
    x, y = np.asarray(ph, dtype=float), np.asarray(base_mol_mol, dtype=float)
    if x.size < 2 or np.any(np.diff(x) <= 0.0) or np.any(np.diff(y) < 0.0):
        msg = "a titration needs two points or more, pH and base rising together"
        raise InputError(msg)
    curve = curve_through(x, -y)
    zero = float(np.interp(0.0, y, x)) if y[0] <= 0.0 <= y[-1] else float(x[0])
    if isoelectric_point is not None and x[0] <= isoelectric_point <= x[-1]:
        zero = isoelectric_point
    at_zero = float(macro_ion.curve_charge(curve, zero)[0])
    return Ladder.of_curve(name, curve_through(x, -y - at_zero))


def charge_and_capacity(
    ladder: Ladder, ph: ArrayLike, temperature_c: float = 25.0
) -> tuple[Array, Array]:
    """Net charge and protons taken up per pH, per molecule.

    Parameters
    ----------
    ladder : Ladder
        A macro-ion.
    ph : array_like, shape (...)
    temperature_c : float
        Temperature [C].

    Returns
    -------
    tuple of (ndarray, ndarray), shape (...)
        Charges per molecule, and mol of protons per mol and pH.
    """
    charge, variance = charge_and_variance(ladder, ph, temperature_c)
    return charge, LN10 * variance


def isoelectric_point(ladder: Ladder, temperature_c: float = 25.0) -> float:
    """Return the pH at which a protein carries no net charge.

    Parameters
    ----------
    ladder : Ladder
        A macro-ion.
    temperature_c : float
        Temperature [C].

    Raises
    ------
    InputError
        Where the charge does not pass zero between pH 0 and 14.
    """
    low, high = 0.0, 14.0
    ends = charge_and_capacity(ladder, [low, high], temperature_c)[0]
    if not ends[0] >= 0.0 >= ends[1]:
        msg = (
            f"{ladder.name}: the charge goes from {ends[0]:.1f} at pH 0 to "
            f"{ends[1]:.1f} at pH 14 and is never zero"
        )
        raise InputError(msg)
    for _ in range(BISECTIONS):
        middle = 0.5 * (low + high)
        if float(charge_and_capacity(ladder, middle, temperature_c)[0]) > 0.0:
            low = middle
        else:
            high = middle
    return 0.5 * (low + high)
