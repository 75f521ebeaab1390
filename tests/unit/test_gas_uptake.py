"""Carbon dioxide that a product takes up: cold solutions, and pH that rises with cold."""

from __future__ import annotations

import math

import numpy as np
import pytest

from formbuf import load_library
from formbuf.advice.case import case_for
from formbuf.advice.draw_candidate import draw_candidate, prepare_draws
from formbuf.advice.none_arm import judge_none
from formbuf.advice.sampling import Sampler
from formbuf.advice.shortlist import shortlist
from formbuf.advice.sizing import size, windows_of
from formbuf.chemistry.titration import STRONG_ACID
from formbuf.product.brief import brief_from_mapping, complete
from formbuf.product.recipe import make

LIBRARY = load_library()
#: Henry's constant of Sander 2023 at 25 C [mol/(L Pa)] and its coefficient [K].
HENRY_MOL_L_PA, HENRY_K = 3.3e-7, 2400.0
#: pK1 of carbonic acid (Harned & Davis 1943).
PK1 = {5.0: 6.517, 25.0: 6.352}
GAS_J_MOL_K = 8.314


def henry(t):
    return HENRY_MOL_L_PA * math.exp(HENRY_K * (1 / (t + 273.15) - 1 / 298.15))


def brief(*stored_c, **changes):
    data = {
        "product": {"route": "intravenous"},
        "ph": {"target": 8.0, "low": 7.7, "high": 8.3, "release_tolerance": 0.1},
        "storage": [{"temperature_c": t} for t in stored_c],
        "loads": {"acid_mmol_l": 0.5, "base_mmol_l": 0.5},
        "container": {"type": "plastic_bag", "gas_permeable": True},
        "tonicity": {"agent": "sodium_chloride"},
        "drug": {"kind": "small_molecule"},
    }
    return brief_from_mapping(data | changes)


def case(*stored_c, **changes):
    return case_for(complete(brief(*stored_c, **changes), LIBRARY))


def item(c):
    return next(i for i in c.loads.items if "carbon dioxide" in i.name)


@pytest.mark.parametrize(
    ("stored", "worst_c"), [((25.0,), 25.0), ((5.0,), 5.0), ((5.0, 25.0), 5.0)]
)
def test_the_coldest_storage_takes_up_most(stored, worst_c):
    """By hand H p 10^(pH - pK1) at the lower limit; 22 % more at 5 C than at 25 C."""
    c = case(*stored)
    pressure = c.brief.carbon_dioxide.pressure_pa
    by_hand = 1000.0 * henry(worst_c) * pressure * 10.0 ** (7.7 - PK1[worst_c])

    assert item(c).acid_mmol_l == pytest.approx(by_hand, rel=0.02)
    assert f"and {worst_c:g} C" in item(c).reason
    assert ("the worst of" in item(c).reason) == (stored != (25.0,))


def test_a_headspace_keeps_its_carbon_dioxide():
    """What was closed in at 25 C is what gas and solution hold at 5 C."""
    held = {
        "exposure": "headspace",
        "headspace_ratio": 0.5,
        "pressure_pa": 5000.0,
    }
    c = case(5.0, carbon_dioxide=held, container={"type": "glass_vial"})
    uptake = c.loads.gas
    left = float(uptake.left_pa(7.7, 5.0))
    acid = float(uptake.acid_mmol_l(7.7, 5.0))
    gas = 1000.0 * left * 0.5e-3 / (GAS_J_MOL_K * 278.15)
    free = 1000.0 * henry(5.0) * left
    closed_in = 1000.0 * 5000.0 * 0.5e-3 / (GAS_J_MOL_K * 298.15)

    assert gas + free + acid == pytest.approx(closed_in, rel=0.005)
    assert item(c).acid_mmol_l >= acid


def test_without_gas_there_is_no_uptake():
    c = case(5.0, container={"type": "glass_vial"})
    assert c.loads.gas is None
    assert np.all(c.loads.more_acid_mmol_l(np.array([7.0, 9.0]), 5.0) == 0.0)


def test_an_amine_is_sized_for_what_it_takes_up_cold():
    """Tris reads 0.6 higher at 5 C: its lower limit there meets four times the uptake.

    Made at the required concentration and stored at 5 C: its own species carry the
    stated acid and the bicarbonate of the limit, by hand, to the limit and no further.
    """
    c = case(5.0)
    system = LIBRARY.systems["tris_hydrochloride"]
    found = size(LIBRARY, system, c.brief, c.loads, c.surroundings, c.law, c.settings)
    windows = windows_of(c.brief)
    made = make(
        LIBRARY,
        system,
        found.required_mmol_l,
        windows.start_low,
        25.0,
        c.background,
        c.law,
    ).mixture
    before = made.solve(5.0)
    low = float(before.ph) - windows.room_low
    own = made.index("tris")
    after = made.titrate(5.0, low, STRONG_ACID)
    carried = float(after.charge_mol_kg[own] - before.charge_mol_kg[own])
    bicarbonate = (
        henry(5.0) * c.brief.carbon_dioxide.pressure_pa * 10.0 ** (low - PK1[5.0])
    )

    assert found.limiting_load == "acid"
    assert found.limiting_temperature_c == 5.0
    assert bicarbonate > 3.0 * item(c).acid_mmol_l / 1000.0
    assert 1000.0 * carried * float(made.water_kg_l) == pytest.approx(
        0.5 + 1000.0 * bicarbonate, rel=0.04
    )


def test_a_buffer_whose_ph_stays_is_sized_for_the_budget():
    """Phosphate reads 0.09 higher at 5 C: a quarter more, and no note of its own."""
    notes = {c.key: c.notes for c in shortlist(brief(5.0), LIBRARY).candidates}

    assert any("at 5 C its pH is higher" in n for n in notes["tris_hydrochloride"])
    warm = {c.key: c.notes for c in shortlist(brief(25.0), LIBRARY).candidates}
    assert not any("its pH is higher" in n for n in warm["tris_hydrochloride"])


def test_draws_need_what_the_shortlist_needs():
    """The median of the drawn requirement is the requirement, uptake included."""
    found = shortlist(brief(5.0), LIBRARY)
    candidate = found.candidate("tris_hydrochloride")
    made = draw_candidate(prepare_draws(found, Sampler(2500, 1)), candidate)

    assert np.median(made.required_mmol_l) == pytest.approx(
        candidate.required_mmol_l, rel=0.05
    )


def test_a_carbonate_buffer_is_screened_at_its_worst_temperature():
    """The warmer, the less dissolves: 2.5 times the pressure at 40 C of that at 5 C."""

    def said(*stored):
        found = shortlist(brief(*stored), LIBRARY).candidate("sodium_bicarbonate")
        return next(s.text for s in found.screens if s.id == "carbon_dioxide")

    assert "at 40 C, allowed" in said(5.0, 40.0)
    assert "at 25 C, allowed" in said(5.0)


def test_more_acid_is_more_carbon_dioxide_too():
    """What comes in at a temperature is linear in the load and in the pressure."""
    budget = case(5.0).loads
    for factor in (0.5, 3.0):
        moved = budget.scaled(factor, 1.0)
        assert moved.acid_mmol_l == pytest.approx(factor * budget.acid_mmol_l)
        assert moved.base_mmol_l == budget.base_mmol_l
        more = budget.more_acid_mmol_l(8.3, 5.0)
        assert more > 0.1
        assert moved.more_acid_mmol_l(8.3, 5.0) == pytest.approx(factor * more)


WEAK_ACID = {
    "kind": "small_molecule",
    "concentration_mg_ml": 1.5,
    "molar_mass_g_mol": 300.0,
    "counter_ion": "sodium",
    "pka": [{"pka": 8.3, "acid_charge": 0, "dh_kj_mol": 50.0}],
}


def test_the_product_without_buffer_meets_the_cold_as_a_buffer_does():
    """Its charges do not move with temperature, its pH and the uptake at it do.

    So it carries as much at 5 C as at 25 C, against the load that 5 C brings.
    """
    warm, cold = (case(t, drug=WEAK_ACID) for t in (25.0, 5.0))
    held = judge_none(warm).carried_share * warm.loads.acid_mmol_l
    found = judge_none(cold)
    bare = make(
        LIBRARY,
        LIBRARY.systems["none"],
        1.0,
        cold.brief.ph.target - cold.brief.ph.release_tolerance,
        25.0,
        cold.background,
        cold.law,
    ).mixture
    windows = windows_of(cold.brief)
    low = float(bare.solve(5.0).ph) - windows.room_low
    load = cold.loads.acid_mmol_l + float(cold.loads.more_acid_mmol_l(low, 5.0))

    assert load > 1.5 * warm.loads.acid_mmol_l
    assert found.carried_share == pytest.approx(held / load, rel=0.05)
    assert any("takes up" in note for note in found.notes)


def test_a_trace_of_carbon_dioxide_is_no_load():
    acid = {"target": 4.0, "low": 3.7, "high": 4.3}
    none = {"acid_mmol_l": 0.0, "base_mmol_l": 0.0}
    c = case(25.0, ph=acid, loads=none)

    assert 0.0 < c.loads.acid_mmol_l < 1e-3
    assert not c.loads.has_load
    found = shortlist(brief(25.0, ph=acid, loads=none), LIBRARY)
    assert any("no load to carry" in text for text in found.warnings)
    assert "capacity" not in found.lead.criteria
