"""Proteins by their residues against published capacities, and what the brief says.

The charge of a molecule lowers the pK of its groups; by how much depends on the salt
of the product (``formbuf.chemistry.macro_work``).
"""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest
from bench_support import ANTIBODY, ANTIBODY_MASS_G_MOL, briefed, library, quick
from reference_tables import Residual, select, show

from formbuf.bench.challenge import challenge
from formbuf.bench.retained import protein_of
from formbuf.bench.retentate import diafiltration_buffer, retentate
from formbuf.bench.setup import make_product
from formbuf.chemistry.ionization import Ladder
from formbuf.product.background import drug_extra, nominal_ionic_strength_mol_kg
from formbuf.product.brief import brief_from_text, complete
from formbuf.product.product_brief import ProductBrief
from formbuf.product.protein import (
    charge_and_capacity,
    ladder_from_groups,
    protein_work,
)

#: Ionic strength of an antibody with its counter-ions and little else, mol/kg: what a
#: product without salt is given.
LITTLE_SALT_MOL_KG = 0.02
#: Groups of human serum albumin, 66438 g/mol, 17 disulfides (UniProt P02768; memory).
ALBUMIN = {
    "aspartate": 36.0,
    "glutamate": 62.0,
    "histidine": 16.0,
    "lysine": 59.0,
    "arginine": 24.0,
    "tyrosine": 18.0,
    "cysteine": 1.0,
    "n_terminus": 1.0,
    "c_terminus": 1.0,
}
ALBUMIN_MASS_G_MOL = 66_438.0
RESIDUES = "[drug.residues]\n" + "\n".join(f"{k} = {v}" for k, v in ANTIBODY.items())


def _antibody(ionic_strength: float = LITTLE_SALT_MOL_KG) -> Ladder:
    work = protein_work(library(), ANTIBODY_MASS_G_MOL, ionic_strength)
    return ladder_from_groups(library(), ANTIBODY, work=work)


def _published(row_id: str) -> dict[str, str]:
    (row,) = select("protein.csv", id=row_id)
    return row


# ---------------------------------------------------------------- published capacities


def test_capacity_of_an_antibody_at_ph_5() -> None:
    """Derived from Gokarn et al. 2008: within the range that their figure allows.

    Measured in sorbitol or water, without salt. Groups that ignore each other give 2.3
    times the published value.
    """
    row = _published("protein_0004")
    published, low, high = (float(row[key]) for key in ("value", "low", "high"))
    per_mg = 1000.0 / ANTIBODY_MASS_G_MOL
    ladders = {
        "independent groups": replace(_antibody(), work=0.0),
        "in little salt, 0.02 mol/kg": _antibody(),
        "in 0.15 mol/kg": _antibody(0.15),
    }
    found = {
        name: float(charge_and_capacity(ladder, 5.0)[1]) * per_mg
        for name, ladder in ladders.items()
    }
    show(
        "capacity of an antibody at pH 5, mmol/L per pH and mg/mL",
        [
            Residual(name, published, value, "Gokarn et al. 2008", "derived")
            for name, value in found.items()
        ],
    )

    alone, little, much = found.values()
    assert alone / published > 2.0
    assert little / published == pytest.approx(1.0, abs=0.15)
    assert much / published == pytest.approx(1.0, abs=0.15)
    assert low <= little <= high


@pytest.mark.parametrize("mg_ml", [60.0, 80.0])
def test_an_antibody_takes_as_much_acid_as_acetate(mg_ml: float) -> None:
    """Four IgG2 of 60 to 80 mg/mL match 10 mM acetate, pH 6 to 4 (Gokarn 2008)."""
    ph, antibody, acetate = _beside_acetate(mg_ml)
    ours, theirs = (float(np.trapezoid(y, ph)) for y in (antibody, acetate))
    label = f"{mg_ml:g} mg/mL"
    show(
        "acid taken up from pH 6 to 4, mmol/L: antibody beside 10 mM acetate",
        [Residual(label, theirs, ours, "Gokarn et al. 2008", "published")],
        2,
    )

    assert ours >= theirs


@pytest.mark.parametrize("mg_ml", [60.0, 80.0])
@pytest.mark.xfail(
    strict=True,
    reason=(
        "around its pK acetate buffers more than the antibody: at pH 4.7 that of 60 "
        "mg/mL has 0.65 of its capacity, of 80 mg/mL 0.87; published is a statement "
        "over pH 4 to 6"
    ),
)
def test_an_antibody_matches_acetate_at_every_ph(mg_ml: float) -> None:
    """Four IgG2 of 60 to 80 mg/mL exceed 10 mM acetate, pH 4 to 6 (Gokarn 2008)."""
    ph, antibody, acetate = _beside_acetate(mg_ml)
    show(
        f"capacity, mmol/L per pH: {mg_ml:g} mg/mL of antibody beside 10 mM acetate",
        [
            Residual(f"pH {p:.1f}", b, a, "Gokarn et al. 2008", "published")
            for p, a, b in zip(ph, antibody, acetate, strict=True)
        ],
        2,
    )

    assert np.all(antibody >= acetate)


def _beside_acetate(mg_ml: float) -> tuple[np.ndarray, np.ndarray, np.ndarray]:
    ph = np.linspace(4.0, 6.0, 21)
    per_mole = charge_and_capacity(_antibody(), ph)[1]
    acetate = [
        challenge(quick("sodium_acetate", 10.0, float(p)), added_mmol_l=(0.0,))
        .points[0]
        .capacity_mmol_l_ph
        for p in ph
    ]
    return ph, per_mole * 1000.0 * mg_ml / ANTIBODY_MASS_G_MOL, np.asarray(acetate)


def test_capacity_is_linear_in_concentration() -> None:
    """As Gokarn et al. 2008 found, once the part of water itself is taken off."""
    drug = 'kind = "antibody"\nmolar_mass_g_mol = 148000\nconcentration_mg_ml = {}\n'
    found = []
    for mg_ml in (10.0, 20.0, 40.0):
        bench = briefed(drug.format(mg_ml), "none", RESIDUES)
        (point, *_) = challenge(bench, added_mmol_l=(0.0,)).points
        found.append(point.capacity_mmol_l_ph)
    first, second, third = found

    assert (third - second) / 20.0 == pytest.approx((second - first) / 10.0, rel=1e-3)


def test_capacity_of_albumin_in_plasma() -> None:
    """Watson 1999 by its 16 histidines: 37 C, pH 7.4, plasma of about 0.16 mol/kg."""
    row = _published("protein_0019")
    published = float(row["value"])
    work = protein_work(library(), ALBUMIN_MASS_G_MOL, 0.16)
    worked = ladder_from_groups(library(), ALBUMIN, work=work)
    charge, capacity = (float(x) for x in charge_and_capacity(worked, 7.4, 37.0))
    alone = float(charge_and_capacity(replace(worked, work=0.0), 7.4, 37.0)[1])
    show(
        "capacity of albumin, mol/mol and pH",
        [
            Residual("independent groups", published, alone, "Watson 1999", "derived"),
            Residual("with their work", published, capacity, "Watson 1999", "derived"),
        ],
        2,
    )
    # its net charge by the same model: -21 and 16 histidines of pK 6.75
    model = -21.0 + 16.0 / (1.0 + 10.0 ** (7.4 - 6.752))
    show(
        "net charge of albumin",
        [Residual("pH 7.4", model, charge, "Watson 1999", "derived")],
        1,
    )

    assert capacity == pytest.approx(published, rel=0.15)
    assert abs(alone - published) > 2.0 * abs(capacity - published)


def test_charge_of_an_antibody_at_ph_5() -> None:
    """Yang et al. 2019 measured some 40 charges less than sequences give at pH 5.

    Anions that bind count in the charge that moves in a field and are left out here:
    the work accounts for a third of the gap.
    """
    alone = float(charge_and_capacity(replace(_antibody(), work=0.0), 5.0)[0])
    worked = float(charge_and_capacity(_antibody(), 5.0)[0])
    show(
        "charge at pH 5 below that of independent groups",
        [Residual("antibody", 40.0, alone - worked, "Yang et al. 2019", "published")],
        1,
    )

    assert 10.0 < alone - worked < 40.0


# ------------------------------------------------------------- the salt of the product


def _brief(text: str) -> ProductBrief:
    head = '[product]\nroute = "subcutaneous"\n[ph]\ntarget = 6.0\n'
    drug = (
        '[drug]\nkind = "antibody"\nconcentration_mg_ml = 100\n'
        "molar_mass_g_mol = 148000\n"
    )
    return complete(brief_from_text(f"{head}{text}{drug}{RESIDUES}"), library()).brief


SUCROSE = '[tonicity]\ntarget_mosm_kg = 300\nagent = "sucrose"\n'
SALINE = '[tonicity]\ntarget_mosm_kg = 300\nagent = "sodium_chloride"\n'
OPEN = "[tonicity]\nfill = false\n"


def test_ionic_strength_of_products() -> None:
    """Sugar leaves that of the buffer; saline of 300 mosmol/kg is about 0.15 mol/kg."""
    salt = '[[excipient]]\nmaterial = "{}"\nmmol_l = {}\n'
    found = {
        text: nominal_ionic_strength_mol_kg(library(), _brief(text))
        for text in (
            SUCROSE,
            SALINE,
            OPEN + salt.format("sodium_chloride", 100),
            OPEN + salt.format("magnesium_chloride_hexahydrate", 10),
            # a sodium that a weak acid balances
            OPEN + salt.format("sodium_acetate_anhydrous", 10),
        )
    }

    assert list(found.values()) == pytest.approx(
        [0.02, 0.02 + 260.0 / 0.92 / 2000.0, 0.12, 0.05, 0.03]
    )


def test_salt_of_the_product_reaches_the_protein() -> None:
    sugar, saline = (drug_extra(library(), _brief(t)) for t in (SUCROSE, SALINE))
    assert sugar is not None
    assert saline is not None
    assert sugar.ladder is not None
    assert saline.ladder is not None

    assert sugar.ladder.work == pytest.approx(0.031, abs=5e-4)
    assert saline.ladder.work == pytest.approx(0.0166, abs=5e-4)


def test_curves_keep_what_was_measured() -> None:
    """A line of charge, like a titration, holds the work already."""
    bench = briefed(
        'kind = "antibody"\nconcentration_mg_ml = 100\nmolar_mass_g_mol = 148000\n'
        "isoelectric_point = 8.4\nnet_charge = 15\nnet_charge_ph = 6\n"
    )
    (extra,) = bench.background.extras
    assert extra.ladder is not None

    assert extra.ladder.work == 0.0
    assert charge_and_capacity(extra.ladder, 6.0)[0] == pytest.approx(15.0)


def test_the_note_says_what_was_assumed() -> None:
    drug = 'kind = "antibody"\nconcentration_mg_ml = 100\nmolar_mass_g_mol = 148000\n'
    notes = " ".join(briefed(drug, "none", RESIDUES).notes)

    assert "ionic strength of 0.02 mol/kg" in notes
    assert "0.9 to 1.0 times" in notes


def test_retentate_and_product_see_the_same_charge() -> None:
    drug = 'kind = "antibody"\nconcentration_mg_ml = 100\nmolar_mass_g_mol = 148000\n'
    bench = briefed(drug, extra=RESIDUES)
    protein = protein_of(bench)
    assert protein.ladder.work > 0.0

    back = diafiltration_buffer(bench)
    forth = retentate(bench, protein)
    for found in (back, forth):
        expected = charge_and_capacity(protein.ladder, found.retentate_ph)[0]
        assert found.protein_charge == pytest.approx(float(expected), rel=1e-6)


def test_cold_moves_a_protein_with_its_work() -> None:
    """Temperature acts on the pK of the groups, and through them on the charge."""
    drug = 'kind = "antibody"\nconcentration_mg_ml = 100\nmolar_mass_g_mol = 148000\n'
    made = make_product(briefed(drug, "none", RESIDUES)).mixture

    assert 0.05 < float(made.solve(5.0).ph) - float(made.solve(25.0).ph) < 0.6
