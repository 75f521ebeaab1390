"""Dilution: what is kept, what it tends to, and what a diluent brings."""

from __future__ import annotations

import numpy as np
import pytest
from bench_support import library, quick
from hypothesis import given, settings
from hypothesis import strategies as st

from formbuf.bench.dilution import diluent_mixture, dilute, find_diluent
from formbuf.bench.exposure import expose
from formbuf.bench.setup import make_product
from formbuf.chemistry import gas
from formbuf.errors import InputError, UnknownNameError
from formbuf.product.blend import blend, dissolved
from formbuf.product.composition import mixture
from formbuf.product.liquid import titratable_acidity_mmol_l


@pytest.mark.parametrize("exposure", ["closed", "open"])
def test_dilution_to_infinity_is_water_with_its_carbon_dioxide(exposure: str) -> None:
    found = dilute(
        quick("sodium_citrate", 20.0, 6.0),
        "water_for_injections",
        folds=(1e9,),
        exposure=exposure,  # type: ignore[arg-type]
    )
    air = float(gas.air_pressure_pa(0.000425, 25.0))
    water = expose(library(), mixture(library(), {}), "open", pressure_pa=air).ph
    (state,) = [s for s in found.states if s.diluent_state == "air"]

    assert state.ph == pytest.approx(water, abs=1e-4)
    assert state.osmolality_mosm_kg < 0.05


@pytest.mark.parametrize("diluent", sorted(library().diluents))
def test_no_dilution_is_the_product(diluent: str) -> None:
    found = dilute(quick("sodium_phosphate", 10.0, 7.0), diluent, folds=(1.0,))

    assert [s.ph for s in found.states] == pytest.approx([7.0] * 3, abs=1e-6)


@pytest.mark.parametrize("diluent", sorted(library().diluents))
def test_a_diluent_has_the_ph_of_its_range(diluent: str) -> None:
    record = find_diluent(library(), diluent)
    low, air, high = (
        float(diluent_mixture(library(), record, state, 25.0, 41.7).solve(25.0).ph)
        for state in ("acid end", "air", "basic end")
    )

    assert low == pytest.approx(record.ph_low, abs=1e-6)
    assert high == pytest.approx(record.ph_high, abs=1e-6)
    assert record.ph_low <= air <= record.ph_high


def test_isotonic_saline_has_the_osmolality_of_saline() -> None:
    found = dilute(
        quick("sodium_phosphate", 10.0, 7.0), "sodium_chloride_0p9", folds=(1e6,)
    )

    assert found.states[1].osmolality_mosm_kg == pytest.approx(286.0, abs=3.0)


def test_acidity_of_a_dose_comes_from_the_product_and_the_diluent() -> None:
    bench = quick("sodium_citrate", 20.0, 5.0, dose_volume_ml=10.0)
    made = make_product(bench).mixture
    own = float(titratable_acidity_mmol_l(made, 25.0, made.solve(25.0).ph)) * 0.01
    found = dilute(bench, "water_for_injections", folds=(1.0, 10.0))
    airy = [s for s in found.states if s.diluent_state == "air"]

    assert airy[0].titratable_acidity_mmol_dose == pytest.approx(own, rel=1e-6)
    assert airy[1].titratable_acidity_mmol_dose == pytest.approx(own, rel=0.02)
    acid = [s for s in found.states if s.diluent_state == "acid end"]
    assert acid[1].titratable_acidity_mmol_dose > airy[1].titratable_acidity_mmol_dose


def test_glucose_at_its_acid_end_overcomes_a_weak_buffer() -> None:
    found = dilute(
        quick("histidine_hydrochloride", 5.0, 6.0), "glucose_5", folds=(100.0,)
    )
    low, _, high = found.states

    assert low.ph < 4.0
    assert high.ph > 5.8


@given(st.floats(0.0, 1.0))
@settings(max_examples=40, deadline=None)
def test_blending_keeps_every_amount(share: float) -> None:
    first = make_product(quick("sodium_phosphate", 10.0, 7.0)).mixture
    second = dissolved(
        library(), library().diluents["compound_sodium_lactate"].contents_mmol_l
    )
    both = blend(first, second, np.float64(share))
    for name in ("sodium", "chloride"):
        parts = [
            f * float(m.ions_mol_kg.get(name, 0.0)) * float(m.water_kg_l)
            for m, f in ((first, 1.0 - share), (second, share))
        ]
        found = float(both.ions_mol_kg[name]) * float(both.water_kg_l)
        assert found == pytest.approx(sum(parts), abs=1e-12)
    charge = float(both.strong_charge_mol_kg) * float(both.water_kg_l)
    expected = sum(
        f * float(m.strong_charge_mol_kg) * float(m.water_kg_l)
        for m, f in ((first, 1.0 - share), (second, share))
    )
    assert charge == pytest.approx(expected, abs=1e-12)


def test_calcium_with_phosphate_is_said() -> None:
    found = dilute(
        quick("sodium_phosphate", 20.0, 7.0), "compound sodium lactate", folds=(2.0,)
    )
    text = " ".join(found.notes)

    assert "complexes of calcium with phosphate are not modelled" in text
    assert "may precipitate" in text


def test_calcium_with_histidine_is_not() -> None:
    found = dilute(
        quick("histidine_hydrochloride", 20.0, 6.0),
        "compound_sodium_lactate",
        folds=(2.0,),
    )

    assert not any("complexes" in note for note in found.notes)


def test_dilutions_that_cannot_be() -> None:
    bench = quick("sodium_phosphate", 20.0, 7.0)
    with pytest.raises(InputError, match="value 0"):
        dilute(bench, "glucose_5", folds=(0.5,))
    with pytest.raises(UnknownNameError, match="saline"):
        dilute(bench, "saline")
    with pytest.raises(InputError, match="headspace"):
        dilute(bench, "glucose_5", exposure="headspace")
    with pytest.raises(InputError, match="between 0 and 1"):
        blend(make_product(bench).mixture, make_product(bench).mixture, 1.5)
