"""Donnan equilibrium: closed forms, direction of the effect, both ways round."""

from __future__ import annotations

import math

import numpy as np
import pytest
from bench_support import briefed, library, quick
from hypothesis import given, settings
from hypothesis import strategies as st
from reference_tables import select

from formbuf.bench.retained import (
    fixed_charge,
    protein_from_options,
    protein_of,
    with_protein,
)
from formbuf.bench.retentate import UNTESTED, diafiltration_buffer, retentate
from formbuf.chemistry.donnan import Solute, partition
from formbuf.chemistry.ionization import Ladder
from formbuf.errors import ConvergenceError, InputError

IGG_G_MOL = 148_000.0


def _salt(mol_kg: float) -> list[Solute]:
    return [Solute("sodium", 1, mol_kg), Solute("chloride", -1, mol_kg)]


def _closed_form(charge: float, protein: float, salt: float) -> float:
    """Shift of pH for an ideal 1:1 salt: asinh(z P / 2 m) / ln 10 (Donnan 1911)."""
    return math.asinh(charge * protein / (2.0 * salt)) / math.log(10.0)


@given(
    st.floats(-60.0, 60.0), st.floats(1e-5, 5e-3), st.floats(1e-3, 0.3), st.floats(3, 9)
)
@settings(max_examples=100, deadline=None)
def test_an_ideal_salt_has_a_closed_form(
    charge: float, protein: float, salt: float, ph: float
) -> None:
    found = partition(
        _salt(salt),
        ph,
        25.0,
        protein=fixed_charge(charge),
        protein_mol_kg=protein,
        model="ideal",
    )

    assert found.ph - ph == pytest.approx(_closed_form(charge, protein, salt), abs=1e-9)
    cation, anion = found.molality_mol_kg
    assert cation * anion == pytest.approx(salt * salt, rel=1e-9)
    assert cation - anion + charge * protein == pytest.approx(0.0, abs=1e-9)


@pytest.mark.parametrize(
    ("key", "charge", "mg_ml", "salt"),
    [
        ("protein_0029", 20.0, 100.0, 0.02),
        ("protein_0030", 20.0, 150.0, 0.02),
        ("protein_0031", 10.0, 150.0, 0.01),
        ("protein_0032", -13.0, 100.0, 0.02),
    ],
)
def test_worked_examples(key: str, charge: float, mg_ml: float, salt: float) -> None:
    """Our own worked examples, in the accessible volume (derived)."""
    (row,) = select("protein.csv", id=key)
    room = 1.0 - 0.73e-3 * mg_ml
    found = partition(
        _salt(salt),
        6.0,
        25.0,
        protein=fixed_charge(charge),
        protein_mol_kg=mg_ml / IGG_G_MOL / room,
        model="ideal",
    )

    assert found.ph - 6.0 == pytest.approx(float(row["value"]), abs=0.0006)


def test_no_charge_leaves_volume_exclusion_alone() -> None:
    bench = quick(
        "histidine_hydrochloride", 20.0, 6.0, materials_mmol_l={"sucrose": 200}
    )
    protein = protein_from_options(
        library(), charge=0.0, mg_ml=150.0, molar_mass_g_mol=IGG_G_MOL
    )
    found = retentate(bench, protein)

    assert found.ph_offset == pytest.approx(0.0, abs=1e-9)
    room = 1.0 - 0.73e-3 * 150.0
    for side in found.sides:
        assert side.retentate_mmol_kg == pytest.approx(side.buffer_mmol_kg, rel=1e-8)
        assert side.retentate_mmol_l == pytest.approx(
            room * side.buffer_mmol_l, rel=1e-8
        )


@pytest.mark.parametrize(("charge", "sign"), [(20.0, 1.0), (-20.0, -1.0)])
def test_direction_of_the_offset(charge: float, sign: float) -> None:
    """A basic antibody reads above its buffer, an acidic fusion protein below.

    Bolton et al. 2011, Biotechnol. Prog.; histidine is depleted by a positive protein:
    Miao et al. 2009, Biotechnol. Prog. (both as abstracts only).
    """
    bench = quick("histidine_hydrochloride", 20.0, 6.0)
    protein = protein_from_options(
        library(), charge=charge, mg_ml=120.0, molar_mass_g_mol=IGG_G_MOL
    )
    found = retentate(bench, protein)
    histidine = next(s for s in found.sides if s.component == "histidine")

    assert sign * found.ph_offset > 0.05
    assert sign * (histidine.buffer_mmol_kg - histidine.retentate_mmol_kg) > 0.5


def test_salt_hides_the_offset() -> None:
    protein = protein_from_options(
        library(), charge=20.0, mg_ml=120.0, molar_mass_g_mol=IGG_G_MOL
    )
    offsets = [
        retentate(
            quick(
                "histidine_hydrochloride",
                20.0,
                6.0,
                materials_mmol_l={"sodium_chloride": salt},
            ),
            protein,
        ).ph_offset
        for salt in (0.0, 20.0, 150.0)
    ]

    assert offsets[0] > offsets[1] > offsets[2] > 0.0
    assert offsets[2] < 0.06


@pytest.mark.parametrize("system", ["histidine_hydrochloride", "sodium_phosphate"])
@pytest.mark.parametrize("charge", [-15.0, 4.0, 15.0])
def test_both_sides_are_neutral_and_in_equilibrium(system: str, charge: float) -> None:
    """The buffer found for a retentate gives that retentate back."""
    bench = quick(system, 20.0, 6.5, materials_mmol_l={"sodium_chloride": 30.0})
    protein = protein_from_options(
        library(), charge=charge, mg_ml=100.0, molar_mass_g_mol=IGG_G_MOL
    )
    wanted = diafiltration_buffer(with_protein(bench, protein))
    materials = dict(wanted.buffer_materials_mmol_l)
    salt = materials.pop("sodium_chloride")
    own = {s.component: s.buffer_mmol_l for s in wanted.sides}
    total = own["histidine" if "histidine" in system else "phosphate"]
    again = retentate(
        quick(
            system, total, wanted.buffer_ph, materials_mmol_l={"sodium_chloride": salt}
        ),
        protein,
    )

    assert again.retentate_ph == pytest.approx(6.5, abs=2e-3)
    for side in wanted.sides:
        other = next(s for s in again.sides if s.component == side.component)
        assert other.retentate_mmol_l == pytest.approx(side.retentate_mmol_l, rel=5e-3)


def test_a_protein_of_the_brief_answers_with_its_own_charge() -> None:
    drug = (
        'kind = "antibody"\nconcentration_mg_ml = 100\nmolar_mass_g_mol = 148000\n'
        "isoelectric_point = 8.4\nnet_charge = 15\nnet_charge_ph = 6\n"
    )
    bench = briefed(drug)
    forward = retentate(bench, protein_of(bench))
    backward = diafiltration_buffer(bench)

    assert backward.protein_charge == pytest.approx(15.0, abs=0.01)
    assert 10.0 < forward.protein_charge < 15.0
    assert backward.buffer_ph < backward.retentate_ph == pytest.approx(6.0, abs=1e-6)
    assert forward.notes[0] == backward.notes[0] == UNTESTED


def test_potential_has_the_sign_of_the_charge() -> None:
    found = partition(
        _salt(0.02), 6.0, 25.0, protein=fixed_charge(20.0), protein_mol_kg=1e-3
    )

    assert found.potential_mv == pytest.approx(-59.16 * found.shift, rel=1e-3)
    assert found.potential_mv > 0.0


def test_activity_coefficients_leave_an_equal_salt_alone() -> None:
    found = partition([*_salt(0.1), Solute("sucrose", 0, 0.2)], 6.0, 25.0)

    assert found.shift == pytest.approx(0.0, abs=1e-9)
    assert np.allclose(found.molality_mol_kg, [0.1, 0.1, 0.2])


def test_no_salt_has_no_equilibrium() -> None:
    with pytest.raises(ConvergenceError, match="no Donnan equilibrium"):
        partition([], 6.0, 25.0, protein=fixed_charge(20.0), protein_mol_kg=1e-3)


def test_what_is_no_protein_is_refused() -> None:
    acid = Ladder("acetate", 0, (4.76,), (0.0,), (0.0,))
    with pytest.raises(InputError, match="no macro-ion"):
        partition(_salt(0.1), 6.0, 25.0, protein=acid, protein_mol_kg=1e-3)
    with pytest.raises(InputError, match="needs a protein"):
        protein_of(quick("sodium_phosphate", 10.0, 7.0))
    with pytest.raises(InputError, match="0 or more"):
        partition([Solute("sodium", 1, -0.1)], 6.0, 25.0)
