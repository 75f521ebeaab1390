"""Desirabilities, order, ties, standing and the shortlist as a whole."""

from __future__ import annotations

import math

import pytest

from formbuf import load_library, shortlist
from formbuf.advice.criteria_table import CRITERIA, Anchors
from formbuf.advice.desirability import deviation_ln, geometric_mean, scaled
from formbuf.errors import InputError, UnknownNameError
from formbuf.product.brief import brief_from_mapping, brief_from_options

LIBRARY = load_library()
BASE = {
    "product": {"route": "subcutaneous"},
    "ph": {"target": 6.0},
    "storage": [{"temperature_c": 5.0}],
    "drug": {"kind": "antibody", "concentration_mg_ml": 50.0},
}


def run(**changes):
    return shortlist(brief_from_mapping(BASE | changes), LIBRARY)


@pytest.mark.parametrize(
    ("value", "expected"),
    [(0.0, 1.0), (2.0, 1.0), (6.0, 0.525), (10.0, 0.05), (99, 0.05)],
)
def test_linear_desirability(value, expected):
    """Derringer & Suich 1980: linear between the anchors, here 2 and 10."""
    anchors = Anchors(2.0, 10.0, "linear", "")
    assert scaled(value, anchors, 10.0, 0.05) == pytest.approx(expected)


def test_logarithmic_desirability():
    """Half way on a log scale from 5 to 50 is the root of 250."""
    anchors = Anchors(5.0, None, "log", "mmol/L")
    assert scaled(math.sqrt(250.0), anchors, 50.0, 0.05) == pytest.approx(0.525)


def test_deviation_is_half_the_difference_over_one_deviation():
    """By hand: d(4) = 0.7625 and d(6) = 0.525 on the scale 2 to 10."""
    anchors = Anchors(2.0, 10.0, "linear", "")
    expected = 0.5 * (math.log(0.7625) - math.log(0.525))
    assert deviation_ln(5.0, 1.0, anchors, 10.0, 0.05) == pytest.approx(expected)


def test_weighted_geometric_mean():
    """Harrington 1965: weights 1 and 3 of 0.25 and 1 give the fourth root."""
    mean = geometric_mean({"a": 0.25, "b": 1.0}, {"a": 1.0, "b": 3.0})
    assert mean == pytest.approx(0.25**0.25)


def test_criteria_that_do_not_apply_are_dropped_for_all():
    """A liquid never frozen has no frozen criterion; a dried one no liquid drift."""
    liquid = run()
    dried = run(product={"route": "intravenous", "form": "dried"}, storage=[])

    assert all("frozen_drift" not in c.criteria for c in liquid.ranked)
    assert all("frozen_drift" in c.criteria for c in dried.ranked)
    assert all("temperature_drift" not in c.criteria for c in dried.ranked)
    names = {tuple(c.criteria) for c in liquid.ranked}
    assert len(names) == 1
    assert list(next(iter(names))) == [n for n in CRITERIA if n in next(iter(names))]


def test_one_place_per_buffering_species():
    """Salts of one species share a rank; the best of them stands for it."""
    result = run()
    heads = [c.system.species[0] for c in result.heads]
    assert len(heads) == len(set(heads))
    for c in result.ranked:
        if c.variant_of:
            head = result.candidate(c.variant_of)
            assert c.rank == head.rank
            assert c.desirability <= head.desirability


def test_ties_are_pairwise_and_mutual():
    """If a is tied with b, b is tied with a; a tie need not carry over."""
    result = run()
    for c in result.heads:
        for key in c.tied_with:
            assert c.key in result.candidate(key).tied_with


def test_standing_and_verdict():
    """One lead, one back-up; the verdict names both and the concentration."""
    result = run()
    standings = [c.standing for c in result.heads]
    assert standings.count("lead") == 1
    assert standings.count("back-up") == 1
    assert result.lead.name in result.verdict
    assert result.backup.name in result.verdict


def test_the_product_without_buffer_is_always_shown():
    """A protein without a titration cannot be judged; nothing is invented."""
    none = run().candidate("none")
    assert none.standing == "not evaluable"
    assert none.rank is None


def test_a_measured_titration_lets_the_product_stand_without_buffer():
    """A titration that carries the loads makes the bare product a candidate."""
    drug = {
        "kind": "antibody",
        "concentration_mg_ml": 100.0,
        "titration": [
            {"ph": 5.0, "base_mmol_l": 0.0},
            {"ph": 7.0, "base_mmol_l": 20.0},
        ],
    }
    none = run(drug=drug).candidate("none")
    assert none.rank is not None
    assert none.carried_share > 1.0


def test_a_drug_with_pk_decides_by_its_own_capacity():
    """50 mmol/L of a drug with pK 6.0 carries the loads; 0.05 mmol/L does not."""

    def none(amount):
        drug = {
            "kind": "small_molecule",
            "concentration_mmol_l": amount,
            "pka": [{"pka": 6.0, "acid_charge": 1}],
            "counter_ion": "chloride",
        }
        return run(drug=drug).candidate("none")

    assert none(50.0).standing == "back-up"
    assert none(0.05).carried_share < 1.0
    assert none(0.05).standing == "viable"


def test_an_own_formula_is_never_resized():
    """It keeps its concentration and is told what it carries."""
    own = [{"name": "lot A", "system": "sodium_citrate", "concentration_mmol_l": 1.0}]
    c = run(candidate=own).candidate("own:lot A")

    assert c.concentration_mmol_l == 1.0
    assert c.is_own_formula
    assert c.carried_share < 1.0
    assert any("of the loads" in note for note in c.notes)


def test_an_own_list_of_materials_reads_its_own_ph():
    """Histidine 10 with its hydrochloride 10 reads near the pK: inside the window."""
    inside = {"l_histidine": 10.0, "l_histidine_monohydrochloride_monohydrate": 10.0}
    outside = {"l_histidine": 20.0}
    own = [
        {"name": "lot B", "materials": inside},
        {"name": "lot C", "materials": outside},
    ]
    result = run(candidate=own)

    b, c = result.candidate("own:lot B"), result.candidate("own:lot C")
    assert b.rank is not None
    assert [s.id for s in c.screens] == ["ph_window"]


def test_an_override_keeps_a_candidate_and_is_recorded():
    """Borate is avoided under the skin; a named scientist may set that aside."""
    override = [
        {
            "rule": rule,
            "system": "sodium_borate",
            "reason": "toxicology assessed in report X-12",
            "name": "A. Chemist",
            "date": "2026-11-30",
        }
        for rule in ("precedent_avoid", "ceiling", "R022")
    ]
    c = run(override=override).candidate("sodium_borate")

    assert c.rank is not None
    assert all("A. Chemist" in s.overridden_by for s in c.screens)


def test_an_override_of_nothing_is_refused():
    """An override names a rule or screen that exists."""
    override = [
        {
            "rule": "R9999",
            "reason": "a reason long enough",
            "name": "A. Chemist",
            "date": "2026-11-30",
        }
    ]
    with pytest.raises(InputError, match="R9999"):
        run(override=override)


def test_weights_and_anchors_of_the_brief_are_used():
    """All weight on drift puts a candidate without drift first."""
    weights = dict.fromkeys(CRITERIA, 0.0) | {"temperature_drift": 1.0}
    lead = run(ranking={"weights": weights}).lead

    assert lead.criteria["temperature_drift"].desirability == 1.0
    wide = run(ranking={"anchors": {"temperature_drift": {"full": 0.5, "floor": 2.0}}})
    c = wide.candidate("histidine_hydrochloride")
    assert c.criteria["temperature_drift"].desirability == 1.0


@pytest.mark.parametrize(
    "ranking",
    [
        {"weights": {"capcity": 1.0}},
        {"weights": dict.fromkeys(CRITERIA, 0.0)},
        {"anchors": {"capacity": {"full": 0.0, "floor": 5.0}}},
        {"anchors": {"tonicity_share": {"full": 0.6, "floor": 0.5}}},
        {"anchors": {"precedent": {"full": 0.6, "floor": 0.7}}},
    ],
)
def test_unusable_rankings_are_refused(ranking):
    """A misspelt criterion, no weight at all, or anchors the wrong way round."""
    with pytest.raises((InputError, UnknownNameError)):
        run(ranking=ranking)


def test_the_mixture_enters_where_neither_alone_carries():
    """Citrate with phosphate is judged on request only, or when both fall short."""
    assert run().candidate("citrate_phosphate") is None
    assert run(require=["citrate_phosphate"]).candidate("citrate_phosphate") is not None


def test_bicarbonate_at_acid_ph_is_refused():
    """At pH 4.5 a closed bicarbonate would need far more than a flushed headspace."""
    result = shortlist(
        brief_from_options(ph=4.5, route="intravenous", drug_kind="small_molecule"),
        LIBRARY,
    )
    c = result.candidate("sodium_bicarbonate")
    assert "carbon_dioxide" in [s.id for s in c.screens]


def test_every_candidate_can_be_rechecked_from_its_composition():
    """Composition and fill, solved again, give the pH and osmolality printed."""
    from formbuf.product.composition import Extra, mixture
    from formbuf.product.osmotics import osmotic_law

    result = run()
    for c in result.ranked:
        materials = {w.material: w.mmol_l for w in c.composition}
        if c.tonicity_fill:
            fill = c.tonicity_fill
            materials[fill.material] = materials.get(fill.material, 0) + fill.mmol_l
        protein = Extra("drug", None, 0.0, 50.0, 0.73)
        mixed = mixture(LIBRARY, materials, extras=(protein,))
        solution = mixed.solve(25.0)
        osmol = mixed.osmolality(25.0, solution, osmotic_law(LIBRARY))
        assert float(solution.ph) == pytest.approx(6.0, abs=1e-3)
        assert float(osmol.osmolality_mosm_kg) == pytest.approx(
            c.osmolality_mosm_kg, abs=0.5
        )


def test_the_table_is_a_data_frame_with_units():
    """One row per candidate, dropped ones too."""
    result = run()
    table = result.table
    assert len(table) == len(result.candidates)
    assert "concentration_mmol_l" in table.columns


def test_volatile_buffers_are_flagged_on_drying_by_their_uncharged_share():
    """Acetate at pH 5 is a third acetic acid: it leaves on drying (`practice`)."""
    dried = run(
        product={"route": "intravenous", "form": "dried"},
        ph={"target": 5.0},
        storage=[],
        drug={"kind": "small_molecule"},
    )
    liquid = run(ph={"target": 5.0})

    def said(result):
        notes = result.candidate("sodium_acetate").notes
        return any("volatile" in note for note in notes)

    assert said(dried)
    assert not said(liquid)
