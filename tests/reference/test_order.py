"""The order of the shortlist must make sense to a formulator.

Classic briefs: what any formulator would expect (`practice`, no source). Licensed
choices: public labels and assessment reports, source per row in
``knowledge/checks/licensed_choices.csv``; run for plausibility, nothing is fitted.
"""

from __future__ import annotations

import pytest
from licensed import FAR_FROM_PK, run, tally, without_top_tier

from formbuf import load_library, shortlist
from formbuf.product.brief import brief_from_options

CLASSIC = [
    pytest.param(
        {
            "ph": 6.0,
            "route": "subcutaneous",
            "store": [5.0],
            "drug_kind": "antibody",
            "drug_mg_ml": 50.0,
        },
        ["histidine"],
        ["histidine", "citrate", "phosphate", "acetate", "succinate"],
        id="subcutaneous antibody pH 6.0",
    ),
    pytest.param(
        {
            "ph": 4.5,
            "route": "intravenous",
            "store": [25.0],
            "drug_kind": "small_molecule",
        },
        ["citrate", "acetate"],
        ["citrate", "acetate"],
        id="intravenous small molecule pH 4.5",
    ),
    pytest.param(
        {
            "ph": 7.4,
            "route": "intravenous",
            "store": [25.0],
            "drug_kind": "small_molecule",
            "volume_ml": 1000.0,
        },
        ["tris", "phosphate"],
        ["tris", "phosphate"],
        id="one-litre infusion pH 7.4",
    ),
    pytest.param(
        {
            "ph": 7.2,
            "route": "ophthalmic_topical",
            "store": [25.0],
            "drug_kind": "small_molecule",
        },
        ["phosphate"],
        ["phosphate", "citrate", "tris", "borate"],
        id="eye drop pH 7.2",
    ),
    pytest.param(
        {
            "ph": 7.0,
            "route": "intravenous",
            "store": [5.0],
            "form": "dried",
            "drug_kind": "protein",
            "drug_mg_ml": 5.0,
        },
        ["histidine", "phosphate"],
        ["histidine", "phosphate", "citrate", "tris"],
        id="freeze-dried enzyme pH 7.0",
    ),
]


@pytest.mark.parametrize(("options", "leads", "expected"), CLASSIC)
def test_classic_briefs_come_out_in_a_sensible_order(options, leads, expected):
    """`practice`: the candidates a formulator would name first stand first."""
    result = shortlist(brief_from_options(**options), load_library())
    heads = [c.system.species[0] for c in result.heads]
    print(f"\n{heads[:6]}")

    lead = result.heads[0]
    tied = [result.candidate(key).system.species[0] for key in lead.tied_with]
    assert lead.system.species[0] in leads or set(tied) & set(leads)
    # the usual buffers of the product stand in the upper half of the shortlist
    upper = heads[: max(len(expected) + 2, 4)]
    assert set(expected) <= set(upper)
    keys = [c.key for c in result.heads[:3]]
    assert not {"potassium_phosphate", "sodium_maleate", "sodium_ascorbate"} & set(keys)


def _report(title, outcomes):
    print(f"\n{title}: {len(outcomes)} products")
    for key, share in tally(outcomes).items():
        print(f"  {key:15s} {100 * share:5.1f} %")
    near = [o for o in outcomes if o.distance_to_pk <= FAR_FROM_PK]
    print(f"  without choices over {FAR_FROM_PK} from any pK: {len(near)} products")
    for key, share in tally(near).items():
        print(f"  {key:15s} {100 * share:5.1f} %")
    for o in outcomes:
        if o.position is None:
            print(f"  screened out: {o.id} {o.species}: {o.reasons}")


@pytest.mark.slow
def test_licensed_choices_are_plausible():
    """Makers' species: first or tied for half, in the top three for three quarters.

    The bounds are far below what is measured (printed); they catch a broken ranking,
    they do not tune one.
    """
    outcomes = run(load_library())
    _report("licensed choices", outcomes)

    shares = tally(outcomes)
    assert shares["first or tied"] >= 0.5
    assert shares["top three"] >= 0.75
    assert shares["screened out"] <= 0.05


@pytest.mark.slow
def test_licensed_choices_without_the_top_tier_of_the_kind_table():
    """What reason alone gives, without knowing which buffer is the usual one."""
    outcomes = run(without_top_tier(load_library()))
    _report("licensed choices, top tier removed", outcomes)

    assert tally(outcomes)["top three"] >= 0.7
