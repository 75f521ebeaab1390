"""The drug of a brief as a macro-ion with its counter-ions.

The best description wins: a titration, then residues, then isoelectric point with a
net charge. Where the brief names no counter-ion the drug is taken to come with its own
(chloride for a positive, sodium for a negative charge), so that by itself it sits at
the target pH, or at the pH at which its titration began.
"""

from __future__ import annotations

from collections.abc import Mapping

import numpy as np

from formbuf.chemistry import activity
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.water import pkw
from formbuf.library import Library
from formbuf.product.product_parts import DrugInfo
from formbuf.product.protein import (
    NOMINAL_MASS_G_MOL,
    charge_and_capacity,
    ladder_from_charge,
    ladder_from_groups,
    ladder_from_titration,
    protein_work,
)

#: Ionic strength at which the water taken off a titration is counted, mol/kg.
TITRATION_IONIC_STRENGTH_MOL_KG = 0.1


def macro_ladder(
    library: Library, drug: DrugInfo, *, name: str, ionic_strength_mol_kg: float
) -> Ladder | None:
    """Return the drug as a macro-ion, or None where it is none or nothing is known.

    Parameters
    ----------
    library : Library
    drug : DrugInfo
    name : str
        Name of the component.
    ionic_strength_mol_kg : float
        Of the product, by which the charges of residues screen each other.

    Raises
    ------
    InputError
        For a net charge on the wrong side of the isoelectric point.
    """
    source = drug.charge_known_from
    if source == "titration":
        return _titrated(drug, name)
    if source == "residues":
        mass = drug.molar_mass_g_mol or NOMINAL_MASS_G_MOL
        work = protein_work(library, mass, ionic_strength_mol_kg)
        return ladder_from_groups(library, drug.residues, name=name, work=work)
    if source == "net_charge":
        # the brief was checked to give all three together
        assert drug.isoelectric_point is not None
        assert drug.net_charge is not None
        assert drug.net_charge_ph is not None
        return ladder_from_charge(
            drug.isoelectric_point, drug.net_charge, drug.net_charge_ph, name=name
        )
    return None


def macro_amount_mmol_l(drug: DrugInfo) -> float:
    """Molecules of the drug [mmol/L]; by a nominal molar mass where none is known."""
    if drug.concentration_mmol_l:
        return drug.concentration_mmol_l
    if drug.concentration_mg_ml:
        return 1000.0 * drug.concentration_mg_ml / NOMINAL_MASS_G_MOL
    return 1.0


def own_counter_ions(
    drug: DrugInfo, ladder: Ladder, target_ph: float, temperature_c: float
) -> dict[str, float]:
    """Ions that the drug brings where the brief names none [mmol/L].

    Parameters
    ----------
    drug : DrugInfo
    ladder : Ladder
        The drug as a macro-ion.
    target_ph : float
        pH of the product.
    temperature_c : float
        Temperature at which it is measured [C].
    """
    ph = target_ph
    if drug.titration:
        readings = [(r.base_mmol_l, r.ph) for r in drug.titration]
        if readings[0][0] <= 0.0 <= readings[-1][0]:
            base, at = zip(*readings, strict=True)
            ph = float(np.interp(0.0, base, at))
    charge = float(charge_and_capacity(ladder, ph, temperature_c)[0])
    amount = charge * macro_amount_mmol_l(drug)
    if abs(amount) < 1e-9:
        return {}
    return {"chloride": amount} if amount > 0.0 else {"sodium": -amount}


def charge_notes(
    drug: DrugInfo, ions_mmol_l: Mapping[str, float], ionic_strength_mol_kg: float
) -> tuple[str, ...]:
    """Say how the charge of a macro-ion is known and what it brings.

    Parameters
    ----------
    drug : DrugInfo
    ions_mmol_l : mapping of str to float
        Counter-ions that come with it.
    ionic_strength_mol_kg : float
        At which the charges of residues were taken to act on each other.
    """
    how = {
        "titration": "its measured titration; beyond the last readings the drug is "
        "taken to bind no more protons",
        "residues": "its residues, whose charges act on each other as on a sphere at "
        f"an ionic strength of {ionic_strength_mol_kg:.2f} mol/kg (nominal, for every "
        "candidate); for antibodies at pH 5 that gives about 0.9 to 1.0 times the "
        "published capacity, so a titration would be better",
        "net_charge": "a straight line from the isoelectric point to the charge given",
    }.get(drug.charge_known_from or "")
    if how is None:
        return ()
    notes = [f"what the drug buffers comes from {how}"]
    if drug.charge_known_from != "residues":
        notes.append(
            "how the drug's own protons move with temperature is estimated from the "
            "groups that usually titrate at each pH"
        )
    if drug.counter_ion is None and ions_mmol_l:
        brought = ", ".join(f"{v:.3g} mmol/L {k}" for k, v in ions_mmol_l.items())
        notes.append(f"the drug is taken to bring its own counter-ions: {brought}")
    return tuple(notes)


def _titrated(drug: DrugInfo, name: str) -> Ladder:
    """Return the curve of a titration, per molecule."""
    if drug.titration:
        ph = np.array([r.ph for r in drug.titration])
        base = np.array([r.base_mmol_l for r in drug.titration])
        bound = (base - _water_mmol_l(ph)) / macro_amount_mmol_l(drug)
    else:
        mass = drug.molar_mass_g_mol or NOMINAL_MASS_G_MOL
        ph = np.array([r.ph for r in drug.titration_mmol_g])
        bound = np.array([r.mmol_g for r in drug.titration_mmol_g]) * mass / 1000.0
    # water may take more than was added where the drug takes nothing
    bound = np.maximum.accumulate(bound)
    return ladder_from_titration(
        tuple(ph), tuple(bound), isoelectric_point=drug.isoelectric_point, name=name
    )


def _water_mmol_l(ph: np.ndarray) -> np.ndarray:
    """Return the base that water itself takes up from pH 7 on [mmol/L]."""
    root = np.sqrt(TITRATION_IONIC_STRENGTH_MOL_KG)
    d = activity.unit_charge_term(activity.slope(25.0, "guggenheim"), root)
    hydroxide = 10.0 ** (ph - pkw(25.0) + d)
    hydrogen = 10.0 ** (-ph + d)
    return 1000.0 * (hydroxide - hydrogen)
