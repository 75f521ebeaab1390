"""How much buffer the loads ask for, and the screens on it."""

from __future__ import annotations

from dataclasses import replace

import numpy as np
import pytest

from formbuf import load_library
from formbuf.advice import screens
from formbuf.advice.case import case_for
from formbuf.advice.loads import load_budget
from formbuf.advice.precedent import ceiling_mmol_l, standings
from formbuf.advice.sizing import Sizing, proposed_mmol_l, size, windows_of
from formbuf.product.brief import brief_from_mapping, complete

LIBRARY = load_library()


def case(**changes):
    data = {
        "product": {"route": "subcutaneous", "form": "liquid"},
        "ph": {"target": 6.0, "low": 5.7, "high": 6.3, "release_tolerance": 0.1},
        "storage": [{"temperature_c": 5.0}],
        "loads": {"acid_mmol_l": 0.5, "base_mmol_l": 0.5},
        "container": {"type": "plastic_vial", "gas_permeable": False},
        "drug": {"kind": "antibody"},
    }
    data |= changes
    return case_for(complete(brief_from_mapping(data), LIBRARY))


def sized(case_, system_id):
    system = case_.library.systems[system_id]
    return size(
        case_.library,
        system,
        case_.brief,
        case_.loads,
        case_.surroundings,
        case_.law,
        case_.settings,
    )


def test_ten_times_the_load_asks_for_ten_times_the_buffer():
    """`practice`: near its pK a buffer's capacity is proportional to concentration."""
    small = sized(
        case(loads={"acid_mmol_l": 0.05, "base_mmol_l": 0.05}),
        "histidine_hydrochloride",
    )
    large = sized(
        case(loads={"acid_mmol_l": 0.5, "base_mmol_l": 0.5}), "histidine_hydrochloride"
    )

    assert large.required_mmol_l / small.required_mmol_l == pytest.approx(10, rel=0.03)


def test_far_from_its_pk_ionic_strength_counts():
    """Tris at pH 6: the salt it brings raises its pK', so it takes more than tenfold."""
    small = sized(
        case(loads={"acid_mmol_l": 0.05, "base_mmol_l": 0.05}), "tris_hydrochloride"
    )
    large = sized(
        case(loads={"acid_mmol_l": 0.5, "base_mmol_l": 0.5}), "tris_hydrochloride"
    )

    assert large.required_mmol_l / small.required_mmol_l > 11.0


def test_the_required_concentration_just_carries_the_load():
    """Made at the required concentration, acid moves pH from 5.9 to 5.7 exactly."""
    c = case()
    found = sized(c, "histidine_hydrochloride")

    assert found.carried_at(found.required_mmol_l) == pytest.approx(1.0, rel=1e-6)


def test_histidine_by_hand():
    """Henderson-Hasselbalch by hand at I near 0.02: about 8 mmol/L for 0.5 mmol/L.

    Acid 5.9 -> 5.7 with pK' 6.07 + 0.06 (first order): fractions 0.371 and 0.271.
    """
    c = case(storage=[{"temperature_c": 25.0}])
    found = sized(c, "histidine_hydrochloride")

    pk = 6.07 + 0.03
    fraction = [1.0 / (1.0 + 10 ** (pk - ph)) for ph in (5.7, 5.9, 6.1, 6.3)]
    by_hand = 0.5 / min(fraction[1] - fraction[0], fraction[3] - fraction[2])
    assert found.required_mmol_l == pytest.approx(by_hand, rel=0.08)


def test_no_load_asks_for_nothing():
    """Without loads the requirement is zero."""
    found = sized(
        case(loads={"acid_mmol_l": 0.0, "base_mmol_l": 0.0}), "sodium_acetate"
    )
    assert found.required_mmol_l == 0.0
    assert found.limiting_load == "none"


def test_a_buffer_far_from_its_pk_cannot_carry():
    """Lactate at pH 9 never carries 5 mmol/L."""
    c = case(
        ph={"target": 9.0, "low": 8.7, "high": 9.3, "release_tolerance": 0.1},
        loads={"acid_mmol_l": 5.0, "base_mmol_l": 5.0},
    )
    assert sized(c, "sodium_lactate").required_mmol_l is None


def test_glass_alkali_counts_only_in_glass():
    """A 1 mL glass vial adds 0.2 mmol/L of alkali (USP <660> limit), plastic none."""
    glass = case(container={"type": "glass_vial", "fill_volume_ml": 1.0})
    plastic = case()

    assert glass.loads.base_mmol_l == pytest.approx(plastic.loads.base_mmol_l + 0.2)


def test_carbon_dioxide_is_an_acid_load_when_open():
    """At the lower limit, pH 7.7, air gives bicarbonate of about 0.3 mmol/L."""
    c = case(
        ph={"target": 8.0, "low": 7.7, "high": 8.3, "release_tolerance": 0.1},
        storage=[{"temperature_c": 25.0}],
        carbon_dioxide={"exposure": "open"},
    )
    item = next(i for i in c.loads.items if "carbon dioxide" in i.name)
    # H x p x K1 / a(H+) by hand: 3.3e-7 mol/kg/Pa x 43 Pa x 10^(7.7-6.35)
    assert item.acid_mmol_l == pytest.approx(0.318, rel=0.05)


def test_carbon_dioxide_of_a_closed_headspace_is_an_acid_load():
    """Half a volume at 5 kPa holds 1.0 mmol/L (p V / R T); at pH 7.7 most goes in.

    By hand, H = 3.3e-4 mol/m3/Pa (Sander 2023), pK 6.35: bicarbonate is 10^1.35 times
    the free gas, so 1 / (1 + H R T (1 + 10^1.35) / 0.5) = 2.6 % stays above the
    solution, and 4.3 % of the rest is dissolved but free.
    """
    c = case(
        ph={"target": 8.0, "low": 7.7, "high": 8.3, "release_tolerance": 0.1},
        storage=[{"temperature_c": 25.0}],
        carbon_dioxide={
            "exposure": "headspace",
            "headspace_ratio": 0.5,
            "pressure_pa": 5000.0,
        },
    )
    item = next(i for i in c.loads.items if "headspace" in i.name)
    held = 5000.0 * 0.5e-3 / (8.314 * 298.15) * 1000.0
    by_hand = held * (1.0 - 0.026) * (1.0 - 0.043)
    assert item.acid_mmol_l == pytest.approx(by_hand, rel=0.01)


def test_release_extremes_and_room():
    """Target 6.0 +/- 0.1 in 5.7 to 6.3 leaves 0.2 on either side."""
    windows = windows_of(case().brief)
    assert (windows.room_low, windows.room_high) == pytest.approx((0.2, 0.2))
    assert windows.others_c == (5.0,)


@pytest.mark.parametrize(
    ("required", "ceiling", "large", "expected"),
    [
        (2.0, 50.0, False, 5.0),
        (2.2, 50.0, True, 3.0),
        (0.0, 50.0, True, 0.5),
        (7.1, 50.0, False, 8.0),
        (8.0, 50.0, False, 8.0),
        (22.0, 24.0, False, 24.0),
        (90.5, 30.0, False, 30.0),
    ],
)
def test_proposals_are_weighable_and_within_the_ceiling(
    required, ceiling, large, expected
):
    """`practice`: at least 5 mmol/L except for large infusions; rounded up."""
    settings = case().settings
    assert proposed_mmol_l(required, ceiling, settings, large_volume=large) == expected


def test_a_ceiling_holds_as_an_amount_for_large_doses():
    """100 mmol/L in a litre is 100 mmol: ten times what 100 mL may bring."""
    base = {"product": {"route": "intravenous"}, "drug": {"kind": "small_molecule"}}
    small = case(**base, dose={"volume_ml": 10.0})
    large = case(**base, dose={"volume_ml": 1000.0})
    system = LIBRARY.systems["sodium_phosphate"]

    def ceiling(c):
        found = standings(c.library, c.brief, system, {"phosphate": 1.0})
        return ceiling_mmol_l(found, c.brief, c.settings)

    assert ceiling(large) == pytest.approx(ceiling(small) / 10.0)


def _sizing(required, carried):
    return Sizing(
        required, "acid", 25.0, np.array([carried] * 2), np.array([1.0, 100.0])
    )


def test_the_ceiling_screen_spares_default_loads_that_are_mostly_carried():
    """Stated loads screen; default ones only when a third is not carried."""
    short = _sizing(80.0, 0.5)
    fired, _ = screens.ceiling_screen(
        short, 50.0, 1000.0, 1 / 3, loads_are_default=False
    )
    spared, note = screens.ceiling_screen(
        short, 50.0, 1000.0, 1 / 3, loads_are_default=True
    )
    lost, _ = screens.ceiling_screen(
        _sizing(None, 0.2), 50.0, 1000.0, 1 / 3, loads_are_default=True
    )

    assert fired is not None
    assert spared is None
    assert "default loads" in note
    assert lost is not None


def test_the_load_budget_marks_defaults():
    """Loads that nobody stated are marked."""
    c = case(loads={})
    assert load_budget(c.library, c.brief).all_default
    assert not case().loads.all_default


def test_a_trace_of_carbon_dioxide_leaves_default_loads_default():
    """In plastic at pH 4.5 air gives 0.0002 mmol/L; at pH 9.5 it is the larger load."""
    plastic = {"type": "plastic_ampoule", "gas_permeable": True}

    def at(ph):
        window = {"target": ph, "low": ph - 0.3, "high": ph + 0.3}
        return case(ph=window, loads={}, container=plastic).loads

    assert any("carbon dioxide" in item.name for item in at(4.5).items)
    assert at(4.5).all_default
    assert not at(9.5).all_default


def test_an_exclusion_looks_at_what_the_buffer_is_made_of():
    """Glycine set with sodium hydroxide brings sodium, whatever its system's salts."""
    glycine = LIBRARY.systems["glycine"]

    assert screens.exclusion_screens(
        LIBRARY, glycine, ["sodium"], ["glycine", "sodium_hydroxide"]
    )
    assert not screens.exclusion_screens(
        LIBRARY, glycine, ["chloride"], ["glycine", "sodium_hydroxide"]
    )


def test_exclusions_by_species_system_and_ion():
    """Sodium excluded drops every sodium salt and no amine hydrochloride."""
    phosphate = LIBRARY.systems["sodium_phosphate"]
    histidine = LIBRARY.systems["histidine_hydrochloride"]

    assert screens.exclusion_screens(LIBRARY, phosphate, ["sodium"])
    assert screens.exclusion_screens(LIBRARY, phosphate, ["phosphate"])
    assert not screens.exclusion_screens(LIBRARY, histidine, ["sodium"])


def test_a_storage_window_screens_only_where_it_is_given():
    """Tris moves by half a unit at 5 C: dropped by a storage window, else kept."""
    c = case()
    free = replace(c.brief, ph=replace(c.brief.ph, storage_low=None, storage_high=None))
    tight = replace(c.brief, ph=replace(c.brief.ph, storage_low=5.8, storage_high=6.2))

    class State:
        kinds = ("storage",)
        ph = 6.6
        temperature_c = 5.0

    assert screens.storage_window_screen(free, (State(),)) is None
    assert "6.60 at 5 C" in screens.storage_window_screen(tight, (State(),)).text
    State.ph = 6.2041
    assert "6.2041 at 5 C" in screens.storage_window_screen(tight, (State(),)).text
