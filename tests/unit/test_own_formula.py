"""A user's own formula: what of it buffers, what it carries, what drops it."""

from __future__ import annotations

from typing import Any

import pytest

from formbuf import load_library, shortlist
from formbuf.advice.results import Candidate
from formbuf.errors import InputError
from formbuf.product.brief import brief_from_mapping

LIBRARY = load_library()
BASE: dict[str, Any] = {
    "product": {"route": "subcutaneous", "form": "liquid"},
    "ph": {"target": 6.0, "low": 5.6, "high": 6.4, "release_tolerance": 0.1},
    "storage": [{"temperature_c": 5.0}],
    "loads": {"acid_mmol_l": 0.2, "base_mmol_l": 0.2},
    "container": {"type": "plastic_syringe", "gas_permeable": False},
    "tonicity": {"agent": "sucrose"},
    "drug": {"kind": "antibody", "concentration_mg_ml": 50.0},
}
HISTIDINE = {"l_histidine": 10.0, "l_histidine_monohydrochloride_monohydrate": 10.0}


def judged(materials: dict[str, float], **changes: Any) -> Candidate:
    """Return the own formula of these materials."""
    own = [{"name": "lot", "materials": materials}]
    result = shortlist(brief_from_mapping(BASE | changes | {"candidate": own}), LIBRARY)
    return result.candidate("own:lot")


def test_stabilisers_and_sugar_of_a_formula_are_not_its_buffer() -> None:
    """Arginine and methionine hold no pH at 6 (pK 1.8, 9.0; 2.2, 9.2), sucrose none."""
    bare = judged(HISTIDINE)
    rest = {"l_arginine_hydrochloride": 50.0, "l_methionine": 10.0, "sucrose": 150.0}
    full = judged({**HISTIDINE, **rest})

    assert full.system.species == ("histidine",)
    assert full.concentration_mmol_l == pytest.approx(20.0)
    assert full.buffer_osmolality_mosm_kg == pytest.approx(
        bare.buffer_osmolality_mosm_kg, rel=1e-9
    )
    assert full.osmolality_mosm_kg > bare.osmolality_mosm_kg + 200.0
    assert {w.material for w in full.composition} == {*HISTIDINE, *rest}
    assert not full.screens


def test_a_list_of_materials_is_judged_as_the_same_system() -> None:
    """The recipe of a proposal, written out as materials, asks for the same amount."""
    plain = {"tonicity": {"fill": False}}
    result = shortlist(brief_from_mapping(BASE | plain), LIBRARY)
    head = result.candidate("histidine_hydrochloride")
    same = judged({w.material: w.mmol_l for w in head.composition}, **plain)

    assert same.required_mmol_l == pytest.approx(head.required_mmol_l, rel=0.02)
    assert same.limiting_load == head.limiting_load
    assert same.criteria["precedent"].desirability == pytest.approx(
        head.criteria["precedent"].desirability
    )
    assert same.system.id == "histidine_hydrochloride"


def test_by_hand_what_a_list_of_materials_carries() -> None:
    """Henderson-Hasselbalch for 10 + 10 mmol/L of histidine, its own pH as centre.

    At 25 C only, from 0.1 below its pH to the lower limit; pK' = the pH it reads.
    """
    c = judged(HISTIDINE, storage=[{"temperature_c": 25.0}])
    ph = next(s.ph for s in c.states if "measure" in s.kinds)

    def charged(at: float) -> float:
        return 20.0 / (1.0 + 10.0 ** (at - ph))

    acid = (charged(5.6) - charged(ph - 0.1)) / 0.2
    base = (charged(ph + 0.1) - charged(6.4)) / 0.2
    assert c.carried_share == pytest.approx(min(acid, base), rel=0.03)


def test_an_excluded_ion_drops_a_list_of_materials_too() -> None:
    """The exclusion looks at what is in it, not at the name of a system."""
    acetate = {"acetic_acid_glacial": 1.0, "sodium_acetate_trihydrate": 15.0}
    c = judged(acetate, exclude=["sodium"])
    assert [s.id for s in c.screens if not s.overridden_by] == ["excluded"]


def test_what_a_route_avoids_drops_a_formula_though_it_buffers_nothing() -> None:
    """Borate at pH 6 carries nothing, and is avoided under the skin all the same."""
    c = judged({**HISTIDINE, "boric_acid": 2.0})
    assert c.system.species == ("histidine",)
    assert "precedent_avoid" in {s.id for s in c.screens}


def test_a_formula_of_the_product_without_buffer_is_the_arm_that_is_shown() -> None:
    """Asking for it by name adds nothing and breaks nothing."""
    data = BASE | {"candidate": [{"system": "none"}]}
    result = shortlist(brief_from_mapping(data), LIBRARY)
    assert [c.key for c in result.candidates if c.system.id == "none"] == ["none"]


def test_a_formula_without_any_buffer_is_refused_in_words() -> None:
    """Mannitol alone holds no pH."""
    with pytest.raises(InputError, match="mannitol: none of them holds a proton"):
        judged({"mannitol": 250.0})


def test_a_formula_that_cannot_reach_the_ph_is_dropped_and_says_so() -> None:
    """Acetic acid cannot bring histidine to pH 3: the rest is judged all the same."""
    data = BASE | {
        "ph": {"target": 3.0, "low": 2.6, "high": 3.4, "release_tolerance": 0.1},
        "candidate": [
            {
                "name": "lot",
                "system": "histidine_acetate",
                "concentration_mmol_l": 10.0,
            }
        ],
    }
    c = shortlist(brief_from_mapping(data), LIBRARY).candidate("own:lot")
    assert c.is_own_formula
    assert c.standing == "screened out"
    assert "histidine acetate cannot be brought to pH" in c.screens[0].text
