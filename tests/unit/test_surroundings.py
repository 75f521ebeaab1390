"""The salt in which a buffer is sized, against the product made in full."""

from __future__ import annotations

import numpy as np
import pytest

from formbuf import load_library
from formbuf.advice.case import case_for
from formbuf.advice.sizing import size, windows_of
from formbuf.advice.surroundings import Surroundings, made_in, surroundings_of
from formbuf.chemistry.titration import STRONG_ACID, STRONG_BASE
from formbuf.product.brief import brief_from_mapping, complete
from formbuf.product.recipe import Background, make

LIBRARY = load_library()


def case(ph, load_mmol_l, agent="sodium_chloride", **changes):
    data = {
        "product": {"route": "intravenous"},
        "ph": {
            "target": ph,
            "low": ph - 0.3,
            "high": ph + 0.3,
            "release_tolerance": 0.1,
        },
        "storage": [{"temperature_c": 5.0}],
        "loads": {"acid_mmol_l": load_mmol_l, "base_mmol_l": load_mmol_l},
        "container": {"type": "plastic_vial", "gas_permeable": False},
        "tonicity": {"agent": agent, "target_mosm_kg": 290.0},
        "drug": {"kind": "small_molecule"},
    }
    return case_for(complete(brief_from_mapping(data | changes), LIBRARY))


def sized(c, key):
    system = LIBRARY.systems[key]
    return size(LIBRARY, system, c.brief, c.loads, c.surroundings, c.law, c.settings)


def carried_in_full(c, key, mmol_l):
    """Share of the loads that the own species carry in the product as it is made.

    The product is filled up to its osmolality by its salt, then titrated from each end
    of the release range to the end of the window, at 25 C and at 5 C.
    """
    system, windows = LIBRARY.systems[key], windows_of(c.brief)
    shares = []
    for start, move, load, titrant in (
        (windows.start_low, -windows.room_low, c.loads.acid_mmol_l, STRONG_ACID),
        (windows.start_high, windows.room_high, c.loads.base_mmol_l, STRONG_BASE),
    ):
        made = make(LIBRARY, system, mmol_l, start, 25.0, c.background, c.law).mixture
        osmol = made.osmolality(25.0, made.solve(25.0), c.law)
        assert float(osmol.osmolality_mosm_kg) == pytest.approx(290.0, abs=0.1)
        own = [k for k in map(made.index, system.species) if k >= 0]
        for t in (25.0, 5.0):
            before = made.solve(t)
            after = made.titrate(t, float(before.ph) + move, titrant)
            change = after.charge_mol_kg[own] - before.charge_mol_kg[own]
            carried = abs(float(change.sum())) * 1000.0 * float(made.water_kg_l)
            shares.append(carried / load)
    return min(shares)


@pytest.mark.parametrize(
    ("key", "ph", "load"),
    [
        ("histidine_hydrochloride", 6.2, 2.0),  # at its pK
        ("sodium_phosphate", 7.0, 2.0),  # at its pK, doubly charged
        ("sodium_citrate", 5.5, 2.0),  # between two
        ("sodium_acetate", 6.2, 0.6),  # 1.5 off
        ("sodium_citrate", 7.0, 0.4),  # 1.3 off, triply charged
        ("sodium_phosphate", 5.0, 0.2),  # 1.8 off
        ("tris_acetate", 6.5, 0.6),  # 1.6 off, two species
    ],
)
def test_the_required_concentration_carries_the_loads_in_the_product_as_made(
    key, ph, load
):
    c = case(ph, load)
    required = sized(c, key).required_mmol_l
    share = carried_in_full(c, key, required)
    print(f"{key} at pH {ph}: {required:.1f} mmol/L carries {share:.3f} of the loads")

    assert share == pytest.approx(1.0, abs=0.03)


@pytest.mark.parametrize(
    ("key", "ph", "load"),
    [("sodium_citrate", 7.0, 0.4), ("sodium_phosphate", 5.0, 0.2)],
)
def test_the_salt_beside_ten_millimolar_would_size_wrong(key, ph, load):
    """More buffer leaves room for less salt: 9 % too much citrate, 5 % too little
    phosphate, each over a unit from its pK."""
    c = case(ph, load)
    system = LIBRARY.systems[key]
    ten = make(LIBRARY, system, 10.0, ph, 25.0, c.background, c.law)
    fixed = Background({"sodium_chloride": float(ten.fill_mmol_l)})
    old = size(
        LIBRARY, system, c.brief, c.loads, Surroundings(fixed), c.law, c.settings
    )
    new = sized(c, key)
    print(f"{key}: {old.required_mmol_l:.1f} and {new.required_mmol_l:.1f} mmol/L")

    assert abs(carried_in_full(c, key, old.required_mmol_l) - 1.0) > 0.03
    assert abs(carried_in_full(c, key, new.required_mmol_l) - 1.0) < 0.03


@pytest.mark.parametrize(
    "key", ["sodium_citrate", "glycine", "histidine_acetate", "sodium_bicarbonate"]
)
def test_each_concentration_has_the_salt_it_leaves_room_for(key):
    """Against the fill that is settled by the osmolality, in shares of ionic strength."""
    c = case(6.0, 1.0)
    amounts = np.geomspace(0.3, 150.0, 8)
    target = np.full(8, 6.0)
    system = LIBRARY.systems[key]
    full = make(LIBRARY, system, amounts, target, 25.0, c.background, c.law)
    found, solution = made_in(
        LIBRARY, system, amounts, target, 25.0, c.surroundings, c.law
    )
    off = np.abs(found.fill_mmol_l - full.fill_mmol_l) / 1000.0

    assert np.max(off / solution.ionic_strength_mol_kg) < 0.041
    assert np.ptp(full.fill_mmol_l) > 50.0


def test_a_drug_and_excipients_take_their_room():
    """The salt beside a hydrochloride, a sugar and no buffer, by its osmolality."""
    c = case(
        6.0,
        1.0,
        drug={
            "kind": "small_molecule",
            "concentration_mg_ml": 5.0,
            "molar_mass_g_mol": 250.0,
            "counter_ion": "chloride",
        },
        excipient=[{"material": "mannitol", "mmol_l": 100.0}],
    )
    full = make(LIBRARY, LIBRARY.systems["none"], 1.0, 6.0, 25.0, c.background, c.law)

    assert c.surroundings.fill_mmol_l == pytest.approx(float(full.fill_mmol_l), abs=2.0)


def test_sugar_changes_no_ionic_strength_and_is_left_out():
    c = case(6.0, 1.0, agent="sucrose")
    assert surroundings_of(c.background, LIBRARY, c.law).background.agent is None
    assert c.surroundings.fill_mmol_l == 0.0
