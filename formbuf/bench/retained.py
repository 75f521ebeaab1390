"""The protein that a membrane holds back: from the brief, or of a fixed charge."""

from __future__ import annotations

from dataclasses import dataclass, replace

from formbuf.bench.setup import Bench
from formbuf.chemistry.ionization import Ladder
from formbuf.chemistry.macro_charge import charge_and_variance
from formbuf.chemistry.macro_ion import curve_through
from formbuf.errors import InputError
from formbuf.library import Library
from formbuf.product.background import DRUG
from formbuf.product.composition import Extra

#: A thinner retentate is no retentate [mg/mL].
LEAST_PROTEIN_MG_ML = 1e-3


@dataclass(frozen=True, slots=True)
class Protein:
    """The protein that the membrane holds back.

    Attributes
    ----------
    ladder : Ladder
        A macro-ion.
    mg_ml : float
        In the retentate.
    mmol_l : float
    volume_ml_g : float
        Partial specific volume.
    """

    ladder: Ladder
    mg_ml: float
    mmol_l: float
    volume_ml_g: float


def fixed_charge(charge: float) -> Ladder:
    """Return a protein whose charge does not move with pH."""
    return Ladder.of_curve(DRUG, curve_through((-2.0, 16.0), (charge, charge)))


def protein_of(bench: Bench) -> Protein:
    """Return the protein of a bench.

    Raises
    ------
    InputError
        Where the product has none, or its charge is not known.
    """
    for extra in bench.background.extras:
        if extra.ladder is not None and extra.ladder.is_macro_ion:
            return Protein(extra.ladder, extra.mg_ml, extra.mmol_l, extra.volume_ml_g)
    msg = "the retentate needs a protein with a known charge and concentration"
    hint = (
        "Give its chains or residues, a net charge, or a titration under [drug], or "
        "--charge, --protein-mg-ml and --molar-mass."
    )
    raise InputError(msg, hint=hint)


def protein_from_options(
    library: Library, *, charge: float, mg_ml: float, molar_mass_g_mol: float
) -> Protein:
    """Return a protein of a fixed charge.

    Raises
    ------
    InputError
        For a concentration or molar mass that cannot be meant.
    """
    if not LEAST_PROTEIN_MG_ML <= mg_ml <= 500.0:
        msg = (
            f"--protein-mg-ml: value {mg_ml:g}, allowed {LEAST_PROTEIN_MG_ML:g} to 500"
        )
        raise InputError(msg)
    if not 1000.0 <= molar_mass_g_mol <= 1e8:
        msg = f"--molar-mass: value {molar_mass_g_mol:g} g/mol, allowed 1000 to 1e8"
        raise InputError(msg)
    if not abs(charge) <= 1000.0:
        msg = f"--charge: value {charge:g}, allowed -1000 to 1000"
        raise InputError(msg)
    volume = library.partial_volumes["protein"].volume_ml_g.value
    return Protein(
        fixed_charge(charge), mg_ml, 1000.0 * mg_ml / molar_mass_g_mol, volume
    )


def with_protein(bench: Bench, protein: Protein) -> Bench:
    """Return a bench whose product holds a protein with its own counter-ions."""
    charge, _ = charge_and_variance(
        protein.ladder, bench.target_ph, bench.measure_temperature_c
    )
    amount = float(charge) * protein.mmol_l
    ions = {"chloride": amount} if amount > 0.0 else {"sodium": -amount}
    extra = Extra(
        DRUG, protein.ladder, protein.mmol_l, protein.mg_ml, protein.volume_ml_g, ions
    )
    return replace(bench, background=replace(bench.background, extras=(extra,)))
