"""What a brief puts into the bottle besides the buffer, ready for the solver."""

from __future__ import annotations

import numpy as np

from formbuf.chemistry import activity
from formbuf.chemistry.ionization import Ladder, state_fractions
from formbuf.constants import LN10
from formbuf.library import Library
from formbuf.product.composition import Extra
from formbuf.product.drug_charge import (
    macro_amount_mmol_l,
    macro_ladder,
    own_counter_ions,
)
from formbuf.product.product_brief import ProductBrief
from formbuf.product.protein import charge_and_capacity
from formbuf.product.recipe import Background

#: Name of the drug among the components of a mixture.
DRUG = "drug"
#: What a buffer of usual strength, with the counter-ions of a protein, adds to the ionic
#: strength, and its osmoles where a salt fills up to a target (judgement).
BUFFER_IONIC_STRENGTH_MOL_KG = 0.02
BUFFER_MOSM_KG = 40.0
#: Osmoles per particle of a salt that fills.
SALT_OSMOTIC_COEFFICIENT = 0.92


def drug_extra(library: Library, brief: ProductBrief) -> Extra | None:
    """Return the drug as a dissolved component, or None where its amount is unknown.

    A protein whose residues, charge or titration the brief gives is a macro-ion (see
    ``drug_charge``). A drug with pK values is a ladder. One with a counter-ion but no pK values is a
    permanent ion: its counter-ion is then left out together with it from the charge
    balance, and both count as particles. Without either it is an uncharged solute, or
    (a protein given by mass only) just volume.

    Parameters
    ----------
    library : Library
    brief : ProductBrief

    Returns
    -------
    Extra or None
    """
    drug = brief.drug
    mass, amount = drug.concentration_mg_ml, drug.concentration_mmol_l
    ionic = nominal_ionic_strength_mol_kg(library, brief)
    ladder = macro_ladder(library, drug, name=DRUG, ionic_strength_mol_kg=ionic)
    if not mass and not amount and ladder is None:
        return None
    volumes = library.partial_volumes
    volume = volumes["protein" if drug.is_protein else "default_organic"].volume_ml_g
    if ladder is not None:
        ions: dict[str, float] = {}
        if drug.counter_ion is None:
            ph, t = brief.ph.target, brief.ph.measure_temperature_c
            ions = own_counter_ions(drug, ladder, ph, t)
        elif amount:
            ions[drug.counter_ion] = amount * drug.counter_ion_per_mole
        amount = macro_amount_mmol_l(drug)
        return Extra(DRUG, ladder, amount, mass or 0.0, volume.value, ions)
    if drug.pka and amount:
        ladder = Ladder(
            DRUG,
            drug.pka[0].acid_charge,
            tuple(step.pka for step in drug.pka),
            tuple(
                np.nan if step.dh_kj_mol is None else step.dh_kj_mol
                for step in drug.pka
            ),
            tuple(step.dcp_j_mol_k or 0.0 for step in drug.pka),
        )
    ions = {}
    if ladder is not None and drug.counter_ion and amount:
        ions[drug.counter_ion] = amount * drug.counter_ion_per_mole
    particles = amount or 0.0
    if ladder is None and drug.counter_ion and amount:
        particles = amount * (1.0 + drug.counter_ion_per_mole)
    return Extra(DRUG, ladder, particles, mass or 0.0, volume.value, ions)


def nominal_ionic_strength_mol_kg(library: Library, brief: ProductBrief) -> float:
    """Return the ionic strength at which the charges of a protein act on each other.

    One figure for all candidates of a product: the strong ions of excipients, of the
    drug's named counter-ion and of a salt that fills to the osmolality target, with
    0.02 mol/kg for the buffer. A strong ion that weak acids or bases balance counts
    with a singly charged partner. Amounts per litre are taken as per kilogram of
    water.

    Parameters
    ----------
    library : Library
    brief : ProductBrief

    Returns
    -------
    float
        [mol/kg]
    """
    ionic, osmoles = BUFFER_IONIC_STRENGTH_MOL_KG, BUFFER_MOSM_KG
    for excipient in brief.excipient:
        own, particles = _of_salt(library, excipient.material)
        ionic += own * excipient.mmol_l / 1000.0
        osmoles += particles * excipient.mmol_l
    drug = brief.drug
    if drug.counter_ion is not None and drug.concentration_mmol_l:
        amount = drug.concentration_mmol_l * drug.counter_ion_per_mole
        ion = library.ions.get(drug.counter_ion)
        ionic += 0.5 * (ion.charge**2 if ion else 1) * amount / 1000.0
        osmoles += amount
    agent, target = brief.tonicity.agent, brief.tonicity.target_mosm_kg
    if brief.tonicity.fill and agent is not None and target is not None:
        own, particles = _of_salt(library, agent)
        if own > 0.0:
            room = max(target - osmoles, 0.0) / SALT_OSMOTIC_COEFFICIENT
            ionic += own * room / particles / 1000.0
    return ionic


def _of_salt(library: Library, material: str) -> tuple[float, float]:
    """Ionic strength and particles that one mole of a material brings."""
    contents = library.find_material(material).contents
    charges = [
        (library.ions[name].charge, count)
        for name, count in contents.items()
        if name in library.ions
    ]
    squares = sum(z * z * count for z, count in charges)
    left = abs(sum(z * count for z, count in charges))
    return 0.5 * (squares + left), sum(contents.values())


def drug_capacity_mmol_l_ph(library: Library, brief: ProductBrief) -> float | None:
    """Return what the drug alone buffers at the target pH [mmol/L per pH].

    Parameters
    ----------
    library : Library
    brief : ProductBrief

    Returns
    -------
    float or None
        None where nothing is known of its protons; activity coefficients as in
        0.15 mol/kg of salt.
    """
    extra = drug_extra(library, brief)
    if extra is None or extra.ladder is None:
        return None
    ph, t = brief.ph.target, brief.ph.measure_temperature_c
    if extra.ladder.is_macro_ion:
        per_mole = float(charge_and_capacity(extra.ladder, ph, t)[1])
        return per_mole * extra.mmol_l
    d = activity.unit_charge_term(activity.slope(t, "guggenheim"), np.sqrt(0.15))
    fractions = state_fractions(extra.ladder, ph, t, d)
    z = np.asarray(extra.ladder.charges, dtype=float)
    variance = float(fractions @ z**2 - (fractions @ z) ** 2)
    return LN10 * variance * extra.mmol_l


def background_of(library: Library, brief: ProductBrief) -> Background:
    """Return excipients, drug and tonicity agent of a brief.

    Parameters
    ----------
    library : Library
    brief : ProductBrief

    Returns
    -------
    Background
    """
    materials: dict[str, float] = {}
    for excipient in brief.excipient:
        materials[excipient.material] = (
            materials.get(excipient.material, 0.0) + excipient.mmol_l
        )
    extra = drug_extra(library, brief)
    fills = brief.tonicity.fill and brief.tonicity.agent is not None
    return Background(
        materials,
        (extra,) if extra is not None else (),
        brief.tonicity.agent if fills else None,
        brief.tonicity.target_mosm_kg if fills else None,
        brief.ph.measure_temperature_c,
    )
