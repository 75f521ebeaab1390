"""A brief without any load: capacity tells nothing apart and is left out."""

from __future__ import annotations

import pytest

from formbuf import load_library
from formbuf.advice.confidence import with_confidence
from formbuf.advice.desirability import geometric_mean
from formbuf.advice.requirement_changes import sensitivity
from formbuf.advice.shortlist import shortlist
from formbuf.errors import InputError
from formbuf.output.explain import explain_page
from formbuf.output.serialise import shortlist_dict
from formbuf.product.brief import brief_from_mapping, complete

LIBRARY = load_library()
SAID = "no load to carry: capacity does not tell the candidates apart"


def brief(load_mmol_l=0.0, **changes):
    data = {
        "product": {"route": "subcutaneous"},
        "ph": {"target": 6.0, "low": 5.7, "high": 6.3, "release_tolerance": 0.1},
        "storage": [{"temperature_c": 5.0}],
        "loads": {"acid_mmol_l": load_mmol_l, "base_mmol_l": load_mmol_l},
        "container": {"type": "plastic_vial", "gas_permeable": False},
        "drug": {"kind": "antibody", "concentration_mg_ml": 50.0},
        "candidate": [
            {"system": "histidine_hydrochloride", "concentration_mmol_l": 20.0}
        ],
    }
    return brief_from_mapping(data | changes)


def test_capacity_is_left_out_and_the_others_keep_their_weights():
    """The overall figure is the geometric mean of the criteria that are left."""
    found = shortlist(brief(), LIBRARY)

    for c in found.candidates:
        assert "capacity" not in c.criteria
        if c.desirability is not None:
            values = {name: x.desirability for name, x in c.criteria.items()}
            mean = geometric_mean(values, found.settings.weights)
            assert c.desirability == pytest.approx(mean)
    loaded = shortlist(brief(0.2), LIBRARY)
    assert "capacity" in loaded.lead.criteria
    assert not any(SAID in text for text in loaded.warnings)


def test_the_weight_of_capacity_changes_nothing_then():
    """It would pull every candidate towards 1 alike, and ties with it."""
    light = shortlist(brief(), LIBRARY)
    heavy = shortlist(brief(ranking={"weights": {"capacity": 20.0}}), LIBRARY)

    assert [c.key for c in light.ranked] == [c.key for c in heavy.ranked]
    for a, b in zip(light.ranked, heavy.ranked, strict=True):
        assert a.desirability == pytest.approx(b.desirability)


def test_capacity_alone_cannot_rank_then():
    weights = dict.fromkeys(LIBRARY.store.toml("criteria.toml")["weights"], 0.0)
    with pytest.raises(InputError, match="every criterion that applies"):
        shortlist(brief(ranking={"weights": {**weights, "capacity": 1.0}}), LIBRARY)


def test_every_output_says_so_and_still_shows_the_capacity():
    found = shortlist(brief(), LIBRARY)
    lead = found.lead
    data = shortlist_dict(found)
    page = explain_page(found, lead)

    assert sum(SAID in text for text in data["warnings"]) == 1
    assert "capacity" not in data["candidates"][0]["criteria"]
    assert data["candidates"][0]["states"][0]["capacity_mmol_l_ph"] > 0.0
    assert SAID in str(page.blocks())
    assert "5 mmol/L at least" in str(page.blocks())


@pytest.mark.slow
def test_draws_and_changes_do_without_it():
    found = with_confidence(shortlist(brief(), LIBRARY), draws=200)
    changes = sensitivity(complete(brief(), LIBRARY))

    assert found.confidence is not None
    assert "capacity" not in {w.criterion for w in changes.weights}
    assert {r.requirement for r in changes.requirements} == {"target_ph", "ceiling"}


def test_alkali_from_glass_is_a_load_though_none_is_stated():
    glass = {"type": "glass_vial", "count_alkali": True, "fill_volume_ml": 1.0}
    found = shortlist(brief(container=glass), LIBRARY)

    assert "capacity" in found.lead.criteria
    assert not any(SAID in text for text in found.warnings)
